//! Opening: what may be opened, what is left alone, and how the engine is set.

use std::cell::RefCell;
use std::fs;
use std::os::unix::fs::MetadataExt;
use std::path::{Path, PathBuf};
use std::time::Duration;

use rusqlite::{Connection, OpenFlags, TransactionBehavior};

use super::Log;
use super::failure::{Act, Fault};
use super::schema::{self, Head};
use super::tally::{self, Counts};
use crate::app::LogFailure;

/// How long one program waits for another.
const PATIENCE: Duration = Duration::from_secs(5);

/// How a log began.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Start {
    /// It was there.
    Existing,
    /// There was no file; now there is.
    Created,
    /// There was a file with nothing in it. Worth saying: it may once have held something.
    Empty,
}

impl std::fmt::Display for Start {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Self::Existing => "the log goes on",
            Self::Created => "starting a new log",
            Self::Empty => "the file is empty, starting a new log",
        })
    }
}

/// Which file it is, whatever its name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Identity {
    device: u64,
    inode: u64,
}

impl Identity {
    fn of(path: &Path) -> Result<Self, Fault> {
        let metadata = fs::metadata(path)?;
        Ok(Self {
            device: metadata.dev(),
            inode: metadata.ino(),
        })
    }

    /// Tells whether the same file is still at the path.
    pub(super) fn still_at(self, path: &Path) -> bool {
        Self::of(path).is_ok_and(|found| found == self)
    }
}

impl Log {
    /// Opens the log at the path for reading and writing, making it and its folder if they are missing.
    ///
    /// # Errors
    /// Refuses what is not a regular file, a file that is not a log, a log of a newer version and a damaged one; each is left as it was. Says so
    /// if the file or folder cannot be written, and if another program holds the log for more than five seconds.
    pub fn open(path: &Path) -> Result<(Self, Start), LogFailure> {
        open(path).map_err(|fault| fault.said(Act::Open, path))
    }

    /// Opens the log at the path for reading only; the file and its folder may be write-protected.
    ///
    /// # Errors
    /// As for [`Log::open`]; also if there is no file or an empty one.
    pub fn open_read_only(path: &Path) -> Result<Self, LogFailure> {
        open_read_only(path).map_err(|fault| fault.said(Act::Open, path))
    }

    /// Sets how long this handle waits for another one; five seconds at first.
    ///
    /// # Errors
    /// None that is known; the engine could refuse.
    pub fn wait_at_most(&self, patience: Duration) -> Result<(), LogFailure> {
        self.connection
            .busy_timeout(patience)
            .map_err(|error| Fault::from(error).said(Act::Open, &self.path))
    }

    /// Returns the path, absolute.
    pub fn path(&self) -> &Path {
        &self.path
    }
}

fn open(path: &Path) -> Result<(Log, Start), Fault> {
    let path = std::path::absolute(path)?;
    let found = look_at(&path)?;
    if found.is_none()
        && let Some(folder) = path.parent()
    {
        fs::create_dir_all(folder)?;
    }
    let mut connection = connect(
        &path,
        OpenFlags::SQLITE_OPEN_READ_WRITE | OpenFlags::SQLITE_OPEN_CREATE,
    )?;
    let identity = Identity::of(&path)?;
    let head = read_head(&connection)?;
    if !head.is_blank() {
        check_head(head)?;
    }
    if connection.is_readonly("main")? {
        return Err(Fault::Refused {
            what: "the file cannot be written".to_owned(),
            hint: "allow writing, or give another file with --log; `nulltray log show` can read it",
        });
    }
    set_up(&connection)?;
    connection.pragma_update_and_check(None, "journal_mode", "DELETE", |_| Ok(()))?;
    connection.pragma_update(None, "synchronous", "EXTRA")?;
    let start = if head.is_blank() {
        begin(&mut connection, &path, found)?
    } else {
        Start::Existing
    };
    let counts = RefCell::new(check_content(&connection)?);
    Ok((
        Log {
            connection,
            path,
            identity,
            counts,
        },
        start,
    ))
}

/// Writes the tables, unless another program was faster.
///
/// The engine takes a file shorter than a page for an empty database, whatever stands in it, so the length decides. It is asked for under
/// the lock: another program may be making the log just now, and what a broken making left behind has been undone.
fn begin(connection: &mut Connection, path: &Path, found: Option<u64>) -> Result<Start, Fault> {
    let transaction = connection.transaction_with_behavior(TransactionBehavior::Immediate)?;
    let head = Head::read(&transaction)?;
    if !head.is_blank() {
        check_head(head)?;
        return Ok(Start::Existing);
    }
    if fs::metadata(path)?.len() > 0 {
        return Err(Fault::Foreign);
    }
    schema::create(&transaction)?;
    transaction.commit()?;
    Ok(if found.is_some() {
        Start::Empty
    } else {
        Start::Created
    })
}

fn open_read_only(path: &Path) -> Result<Log, Fault> {
    let path = std::path::absolute(path)?;
    match look_at(&path)? {
        None => return Err(std::io::Error::from(std::io::ErrorKind::NotFound).into()),
        Some(0) => {
            return Err(Fault::Refused {
                what: "the file is empty".to_owned(),
                hint: "give another file with --log",
            });
        }
        Some(_) => {}
    }
    let connection = connect(&path, OpenFlags::SQLITE_OPEN_READ_ONLY)?;
    let identity = Identity::of(&path)?;
    check_head(read_head(&connection)?)?;
    set_up(&connection)?;
    let counts = RefCell::new(check_content(&connection)?);
    Ok(Log {
        connection,
        path,
        identity,
        counts,
    })
}

/// Returns the length of the file at the path, `None` if there is none.
pub(super) fn look_at(path: &Path) -> Result<Option<u64>, Fault> {
    match fs::metadata(path) {
        Ok(metadata) if metadata.is_file() => Ok(Some(metadata.len())),
        Ok(metadata) if metadata.is_dir() => Err(Fault::NotAFile("a folder")),
        Ok(_) => Err(Fault::NotAFile("a device, a pipe or a socket")),
        Err(error) if error.kind() == std::io::ErrorKind::NotFound => {
            match fs::symlink_metadata(path) {
                Ok(metadata) if metadata.is_symlink() => {
                    Err(Fault::NotAFile("a link that leads nowhere"))
                }
                // Not there, or made just now by another program.
                _ => Ok(None),
            }
        }
        Err(error) => Err(error.into()),
    }
}

/// Opens the file itself, links resolved: the engine is told to follow none, and refuses links to folders too.
fn connect(path: &Path, how: OpenFlags) -> Result<Connection, Fault> {
    let resolved = match fs::canonicalize(path) {
        Ok(resolved) => resolved,
        Err(_) => resolve_folder(path)?,
    };
    let flags = how | OpenFlags::SQLITE_OPEN_NO_MUTEX | OpenFlags::SQLITE_OPEN_NOFOLLOW;
    let connection = Connection::open_with_flags(resolved, flags)?;
    connection.busy_timeout(PATIENCE)?;
    Ok(connection)
}

fn resolve_folder(path: &Path) -> Result<PathBuf, Fault> {
    match (path.parent(), path.file_name()) {
        (Some(folder), Some(name)) => Ok(fs::canonicalize(folder)?.join(name)),
        _ => Err(Fault::NotAFile("a folder")),
    }
}

/// Reads the head at one moment: another program may be making the log just now.
fn read_head(connection: &Connection) -> Result<Head, Fault> {
    let transaction = connection.unchecked_transaction()?;
    Ok(Head::read(&transaction)?)
}

fn check_head(head: Head) -> Result<(), Fault> {
    match head {
        Head { application_id, .. } if application_id != schema::APPLICATION_ID => {
            Err(Fault::Foreign)
        }
        Head { version, .. } if version > schema::VERSION => Err(Fault::Newer {
            found: version,
            known: schema::VERSION,
        }),
        Head { version, .. } if version < schema::VERSION => Err(Fault::Damaged(format!(
            "it says it is of version {version}"
        ))),
        _ => Ok(()),
    }
}

/// Settings of this connection that write nothing.
///
/// Without `recursive_triggers` an INSERT OR REPLACE would erase an entry past the trigger that guards it.
fn set_up(connection: &Connection) -> Result<(), Fault> {
    for (name, value) in [
        ("foreign_keys", "ON"),
        ("recursive_triggers", "ON"),
        ("trusted_schema", "OFF"),
        ("cell_size_check", "ON"),
    ] {
        connection.pragma_update(None, name, value)?;
    }
    Ok(())
}

/// The checks that are cheap enough for every start; [`Log::verify`] makes the others.
fn check_content(connection: &Connection) -> Result<Counts, Fault> {
    schema::check(connection)?;
    let transaction = connection.unchecked_transaction()?;
    tally::read(&transaction)
}
