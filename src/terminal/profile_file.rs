//! A profile on the disk: there as a whole or not at all, and never over another one unless the person said so.

use std::fs::{self, File, OpenOptions};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use crate::app::{Draft, Existing, ProfileFailure};

/// Writes a profile beside its place and moves it there; returns the place, written out. Missing folders are made, with
/// the person's own permissions, as the file is.
pub(super) fn write(draft: &Draft) -> Result<PathBuf, ProfileFailure> {
    let place = at_home(&draft.path);
    put(&place, &draft.text, draft.existing).map_err(|error| {
        if error.kind() == io::ErrorKind::AlreadyExists {
            return ProfileFailure::Exists;
        }
        ProfileFailure::Failed {
            message: format!("cannot write {}: {}", place.display(), plain(&error)),
            hint: "see whether the folder is there and may be written to".to_owned(),
        }
    })?;
    Ok(place)
}

fn put(place: &Path, text: &str, existing: Existing) -> io::Result<()> {
    // A link stays a link: what it points to is written.
    let place = match (fs::symlink_metadata(place), existing) {
        (Ok(_), Existing::Kept) => return Err(io::ErrorKind::AlreadyExists.into()),
        (Ok(_), Existing::Replaced) => fs::canonicalize(place)?,
        (Err(error), _) if error.kind() == io::ErrorKind::NotFound => std::path::absolute(place)?,
        (Err(error), _) => return Err(error),
    };
    let before = fs::metadata(&place).ok();
    if before.as_ref().is_some_and(|about| !about.is_file()) {
        return Err(io::Error::other("it is not a regular file"));
    }
    let (Some(folder), Some(name)) = (place.parent(), place.file_name()) else {
        return Err(io::Error::other("it names no file"));
    };
    fs::create_dir_all(folder)?;
    let mut beside = name.to_owned();
    beside.push(format!(".{}.unfinished", std::process::id()));
    let beside = Unfinished(place.with_file_name(beside));
    let mut file = OpenOptions::new()
        .write(true)
        .create_new(true)
        .open(&beside.0)
        .map_err(|error| match error.kind() {
            io::ErrorKind::AlreadyExists => {
                io::Error::other(format!("{} is in the way", beside.0.display()))
            }
            _ => error,
        })?;
    file.write_all(text.as_bytes())?;
    if let Some(before) = before {
        file.set_permissions(before.permissions())?;
    }
    file.sync_all()?;
    match existing {
        Existing::Kept => place_new(&beside.0, &place)?,
        Existing::Replaced => fs::rename(&beside.0, &place)?,
    }
    File::open(folder)?.sync_all()
}

/// Gives the file its name, unless another program has taken it meanwhile.
fn place_new(beside: &Path, place: &Path) -> io::Result<()> {
    match fs::hard_link(beside, place) {
        Err(error) if error.kind() != io::ErrorKind::AlreadyExists => {
            // Some file systems know no second names.
            if fs::symlink_metadata(place).is_ok() {
                return Err(io::ErrorKind::AlreadyExists.into());
            }
            fs::rename(beside, place)
        }
        linked => linked,
    }
}

/// Returns the path with the home folder for a `~` at its start, which a shell would have put there.
fn at_home(path: &Path) -> PathBuf {
    match (path.strip_prefix("~"), etcetera::home_dir()) {
        (Ok(rest), Ok(home)) => home.join(rest),
        _ => path.to_owned(),
    }
}

/// Returns what went wrong without the system's number for it.
fn plain(error: &io::Error) -> String {
    let text = error.to_string();
    text.split(" (os error").next().unwrap_or(&text).to_owned()
}

/// A file that is removed again unless it was moved.
struct Unfinished(PathBuf);

impl Drop for Unfinished {
    fn drop(&mut self) {
        // Gone already if it was moved; if it cannot be removed, its name says what it is.
        let _ = fs::remove_file(&self.0);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Folder(PathBuf);

    impl Folder {
        fn new(name: &str) -> Self {
            let name = format!("nulltray-profile-{}-{name}", std::process::id());
            let path = std::env::temp_dir().join(name);
            fs::create_dir_all(&path).expect("a temporary folder");
            Self(path)
        }

        fn write(&self, name: &str, text: &str, existing: Existing) -> String {
            let draft = Draft {
                path: self.0.join(name),
                text: text.to_owned(),
                existing,
            };
            match write(&draft) {
                Ok(path) => fs::read_to_string(path).expect("it is there"),
                Err(ProfileFailure::Exists) => "exists".to_owned(),
                Err(ProfileFailure::Failed { message, .. }) => {
                    message.replace(self.0.to_str().expect("UTF-8"), "DIR")
                }
            }
        }

        fn names(&self) -> Vec<String> {
            let entries = fs::read_dir(&self.0).expect("a folder").flatten();
            let names = entries.map(|entry| entry.file_name().to_string_lossy().into_owned());
            names.collect()
        }
    }

    impl Drop for Folder {
        fn drop(&mut self) {
            let _ = fs::remove_dir_all(&self.0);
        }
    }

    #[test]
    fn a_file_is_written_over_only_if_that_was_asked() {
        let folder = Folder::new("over");
        assert_eq!(folder.write("m.toml", "one", Existing::Kept), "one");
        assert_eq!(folder.write("m.toml", "two", Existing::Kept), "exists");
        assert_eq!(folder.write("m.toml", "two", Existing::Replaced), "two");
        assert_eq!(folder.names(), ["m.toml"]);
    }

    #[test]
    fn folders_are_made_and_failures_are_said() {
        let folder = Folder::new("made");
        assert_eq!(folder.write("a/b/m.toml", "one", Existing::Kept), "one");
        assert_eq!(
            folder.write("a/b/m.toml/c", "one", Existing::Kept),
            "cannot write DIR/a/b/m.toml/c: Not a directory"
        );
        assert_eq!(
            folder.write("a", "one", Existing::Replaced),
            "cannot write DIR/a: it is not a regular file"
        );
    }

    #[cfg(unix)]
    #[test]
    fn links_and_permissions_stay() {
        use std::os::unix::fs::{PermissionsExt, symlink};
        let folder = Folder::new("links");
        folder.write("real.toml", "one", Existing::Kept);
        let real = folder.0.join("real.toml");
        fs::set_permissions(&real, fs::Permissions::from_mode(0o600)).expect("ours");
        symlink(&real, folder.0.join("m.toml")).expect("a link");
        assert_eq!(folder.write("m.toml", "two", Existing::Kept), "exists");
        assert_eq!(folder.write("m.toml", "two", Existing::Replaced), "two");
        assert_eq!(fs::read_to_string(&real).expect("there"), "two");
        let mode = fs::metadata(&real).expect("there").permissions().mode();
        assert_eq!(mode & 0o777, 0o600);
    }
}
