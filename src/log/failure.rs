//! What can go wrong, and how it is said: the only place with the wording.

use std::io;
use std::path::Path;

use rusqlite::ErrorCode;

use crate::app::LogFailure;

/// What was being done.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Act {
    Open,
    Append,
    TakeBack,
    BringBack,
    Read,
    BackUp,
    Verify,
    Salvage,
}

/// What went wrong, before it is known where.
#[derive(Debug)]
pub(super) enum Fault {
    /// The database engine refused.
    Engine(rusqlite::Error),
    /// The system refused.
    System(io::Error),
    /// The file holds something that was never written so.
    Damaged(String),
    /// Another file, or none, is at the path now; the entry that was written into the lost one just before, if any.
    Moved { written: bool },
    /// A database or another file, but not ours.
    Foreign,
    /// Written by a newer version of the program.
    Newer { found: i32, known: i32 },
    /// Neither a file nor nothing.
    NotAFile(&'static str),
    /// What was asked for makes no sense with what stands in the log.
    Refused { what: String, hint: &'static str },
}

impl From<rusqlite::Error> for Fault {
    fn from(error: rusqlite::Error) -> Self {
        Self::Engine(error)
    }
}

impl From<io::Error> for Fault {
    fn from(error: io::Error) -> Self {
        Self::System(error)
    }
}

const SALVAGE: &str =
    "`nulltray log export` reads what is left of it; a backup made earlier may hold more";

impl Fault {
    /// Tells whether the log itself is what is wrong.
    pub(super) fn is_damage(&self) -> bool {
        match self {
            Self::Damaged(_) => true,
            Self::Engine(error) => matches!(
                error.sqlite_error_code(),
                Some(ErrorCode::DatabaseCorrupt | ErrorCode::NotADatabase)
            ),
            _ => false,
        }
    }

    /// Says it: the act, the path, what was found, and the next thing to try.
    pub(super) fn said(self, act: Act, path: &Path) -> LogFailure {
        let (what, hint) = self.words(act);
        LogFailure {
            message: format!("cannot {} {}: {what}", act.words(), path.display()),
            hint,
        }
    }

    fn words(self, act: Act) -> (String, String) {
        let (what, hint) = match self {
            Self::Engine(error) => return engine_words(&error, act),
            Self::System(error) => return system_words(&error, act),
            Self::Damaged(what) => (format!("it is damaged: {what}"), SALVAGE),
            Self::Moved { written: false } => (
                "the log was moved or removed".to_owned(),
                "put it back, or start the program again for a new log; nothing was written",
            ),
            Self::Moved { written: true } => (
                "the log was moved or removed while it was written".to_owned(),
                "put it back and look at its last entry before you enter it again",
            ),
            Self::Foreign => (
                "it is not a log of nulltray; it was left as it is".to_owned(),
                "give another file with --log",
            ),
            Self::Newer { found, known } => (
                format!(
                    "it is of version {found}, and this program knows version {known}; it was left as it is"
                ),
                "use the newer program, or give another file with --log",
            ),
            Self::NotAFile(kind) => (
                format!("it is {kind}, not a file"),
                "give a file with --log",
            ),
            Self::Refused { what, hint } => (what, hint),
        };
        (what, hint.to_owned())
    }
}

impl Act {
    fn words(self) -> &'static str {
        match self {
            Self::Open => "open",
            Self::Append => "append to",
            Self::TakeBack => "take back an entry of",
            Self::BringBack => "bring back an entry of",
            Self::Read => "read",
            Self::BackUp => "back up to",
            Self::Verify => "verify",
            Self::Salvage => "salvage",
        }
    }

    /// What becomes of the thing at hand if the act failed with nothing written.
    fn then(self) -> &'static str {
        match self {
            Self::Append => "; the reading is still in the prompt",
            _ => "",
        }
    }
}

fn engine_words(error: &rusqlite::Error, act: Act) -> (String, String) {
    const READONLY_ROLLBACK: i32 = 776;
    const READONLY_DBMOVED: i32 = 1032;
    const READONLY_DIRECTORY: i32 = 1544;
    let rusqlite::Error::SqliteFailure(code, text) = error else {
        return match error {
            rusqlite::Error::InvalidColumnType(..)
            | rusqlite::Error::FromSqlConversionFailure(..)
            | rusqlite::Error::IntegralValueOutOfRange(..)
            | rusqlite::Error::Utf8Error(..) => {
                (format!("it is damaged: {error}"), SALVAGE.to_owned())
            }
            _ => defect(&error.to_string()),
        };
    };
    let text = text.as_deref().unwrap_or("no reason given");
    let (what, hint) = match (code.code, code.extended_code) {
        (ErrorCode::DiskFull, _) => ("disk is full", "free some space, then try again"),
        (ErrorCode::ReadOnly, READONLY_DBMOVED) => {
            return Fault::Moved { written: false }.words(act);
        }
        (ErrorCode::ReadOnly, READONLY_ROLLBACK) => (
            "it was left in the middle of a write, and here nothing may be written to set it right",
            "copy it and the file beside it that ends in -journal to a folder of your own",
        ),
        (ErrorCode::ReadOnly, READONLY_DIRECTORY) => (
            "its folder cannot be written",
            "allow writing in the folder, or give another file with --log",
        ),
        (ErrorCode::ReadOnly, _) => (
            "the file or its folder cannot be written",
            "allow writing, or give another file with --log",
        ),
        (ErrorCode::CannotOpen | ErrorCode::PermissionDenied, _) => (
            "its folder is missing or may not be written, or the file may not be opened",
            "check both, or give another file with --log",
        ),
        (ErrorCode::DatabaseBusy | ErrorCode::DatabaseLocked, _) => (
            "another program holds the log",
            "close it, or try again in a moment",
        ),
        (ErrorCode::NotADatabase, _) => (
            "it is not a log of nulltray, or its beginning is damaged; it was left as it is",
            "give another file with --log, or use a backup",
        ),
        (ErrorCode::DatabaseCorrupt, _) => {
            return (format!("it is damaged: {text}"), SALVAGE.to_owned());
        }
        (ErrorCode::SystemIoFailure, _) => {
            let hint = match act {
                Act::Append | Act::TakeBack | Act::BringBack => {
                    "take it as not saved: check the disk, start the program again and look at the last entry"
                }
                _ => "check the disk, then try again",
            };
            return (format!("disk error: {text}"), hint.to_owned());
        }
        (ErrorCode::OutOfMemory, _) => {
            ("not enough memory", "close other programs, then try again")
        }
        (ErrorCode::TooBig, _) => ("the entry is too long", "shorten it"),
        _ => return defect(text),
    };
    (what.to_owned(), format!("{hint}{}", act.then()))
}

fn system_words(error: &io::Error, act: Act) -> (String, String) {
    let (what, hint) = match error.kind() {
        io::ErrorKind::NotFound => ("there is no such file", "check the path"),
        io::ErrorKind::PermissionDenied => {
            ("not permitted", "check who owns it, or give another path")
        }
        io::ErrorKind::ReadOnlyFilesystem => ("its folder cannot be written", "give another path"),
        io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
            ("disk is full", "free some space, then try again")
        }
        io::ErrorKind::AlreadyExists => {
            ("a file of that name is there already", "give another name")
        }
        io::ErrorKind::NotADirectory => (
            "a part of the path is a file, not a folder",
            "check the path",
        ),
        _ => {
            return (
                error.to_string(),
                format!("check the path and the disk{}", act.then()),
            );
        }
    };
    (what.to_owned(), format!("{hint}{}", act.then()))
}

fn defect(text: &str) -> (String, String) {
    (
        format!("a defect in nulltray: {text}"),
        "please report it, with what you did before; nothing was written".to_owned(),
    )
}

#[cfg(test)]
mod tests {
    use rusqlite::ffi;

    use super::*;

    #[track_caller]
    fn check(extended_code: i32, act: Act, expected: &str) {
        let error = rusqlite::Error::SqliteFailure(ffi::Error::new(extended_code), None);
        assert_eq!(
            Fault::from(error)
                .said(act, Path::new("/salvage/parts.db"))
                .to_string(),
            expected
        );
    }

    #[test]
    fn each_failure_of_the_engine_is_one_clear_sentence() {
        check(
            13,
            Act::Append,
            "cannot append to /salvage/parts.db: disk is full; free some space, then try again; the reading is still in the prompt",
        );
        check(
            13,
            Act::TakeBack,
            "cannot take back an entry of /salvage/parts.db: disk is full; free some space, then try again",
        );
        check(
            8,
            Act::BringBack,
            "cannot bring back an entry of /salvage/parts.db: the file or its folder cannot be written; \
             allow writing, or give another file with --log",
        );
        check(
            1032,
            Act::Append,
            "cannot append to /salvage/parts.db: the log was moved or removed; \
             put it back, or start the program again for a new log; nothing was written",
        );
        check(
            1544,
            Act::Open,
            "cannot open /salvage/parts.db: its folder cannot be written; \
             allow writing in the folder, or give another file with --log",
        );
        check(
            5,
            Act::Read,
            "cannot read /salvage/parts.db: another program holds the log; close it, or try again in a moment",
        );
        check(
            11,
            Act::Read,
            "cannot read /salvage/parts.db: it is damaged: no reason given; \
             `nulltray log export` reads what is left of it; a backup made earlier may hold more",
        );
        check(
            26,
            Act::Open,
            "cannot open /salvage/parts.db: it is not a log of nulltray, or its beginning is damaged; it was left as it is; \
             give another file with --log, or use a backup",
        );
        check(
            778,
            Act::Append,
            "cannot append to /salvage/parts.db: disk error: no reason given; \
             take it as not saved: check the disk, start the program again and look at the last entry",
        );
        check(
            1811,
            Act::Append,
            "cannot append to /salvage/parts.db: a defect in nulltray: no reason given; \
             please report it, with what you did before; nothing was written",
        );
    }
}
