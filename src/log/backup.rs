//! A copy of a log that is in use.

use std::fs::{self, File};
use std::io;
use std::path::{Path, PathBuf};

use super::Log;
use super::failure::{Act, Fault};
use crate::app::LogFailure;

impl Log {
    /// Copies the log to a new file, compacted, and returns when the copy is on disk under that name.
    ///
    /// The file appears complete or not at all.
    ///
    /// # Errors
    /// If there is a file of that name, the folder cannot be written, the disk is full, or the log is damaged.
    pub fn backup(&self, to: &Path) -> Result<(), LogFailure> {
        self.copy_to(to).map_err(|fault| {
            if fault.is_damage() {
                fault.said(Act::Read, &self.path)
            } else {
                fault.said(Act::BackUp, to)
            }
        })
    }

    fn copy_to(&self, to: &Path) -> Result<(), Fault> {
        let to = std::path::absolute(to)?;
        refuse_existing(&to)?;
        let unfinished = Unfinished::beside(&to)?;
        let Some(name) = unfinished.0.to_str() else {
            return Err(Fault::Refused {
                what: "the path is not UTF-8".to_owned(),
                hint: "back up to another folder and copy it from there",
            });
        };
        self.connection.execute("VACUUM INTO ?1", [name])?;
        File::open(&unfinished.0)?.sync_all()?;
        refuse_existing(&to)?;
        fs::rename(&unfinished.0, &to)?;
        if let Some(folder) = to.parent() {
            File::open(folder)?.sync_all()?;
        }
        Ok(())
    }
}

fn refuse_existing(path: &Path) -> Result<(), Fault> {
    match fs::symlink_metadata(path) {
        Ok(_) => Err(io::Error::from(io::ErrorKind::AlreadyExists).into()),
        Err(error) if error.kind() == io::ErrorKind::NotFound => Ok(()),
        Err(error) => Err(error.into()),
    }
}

/// A file that is removed again unless it was renamed.
#[derive(Debug)]
struct Unfinished(PathBuf);

impl Unfinished {
    fn beside(path: &Path) -> Result<Self, Fault> {
        let Some(name) = path.file_name() else {
            return Err(Fault::NotAFile("a folder"));
        };
        let mut name = name.to_owned();
        name.push(format!(".{}.unfinished", std::process::id()));
        let path = path.with_file_name(name);
        refuse_existing(&path)?;
        Ok(Self(path))
    }
}

impl Drop for Unfinished {
    fn drop(&mut self) {
        // Gone already if all went well; if it cannot be removed, its name says what it is.
        let _ = fs::remove_file(&self.0);
    }
}
