//! Why a command could not do its work, and what that means for the exit code.

use std::fmt;
use std::io::{self, Write};
use std::path::Path;

use super::harmless::lines;
use crate::app::LogFailure;
use crate::tables::document::Complaint;

/// What kind of thing went wrong; decides the exit code.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum FailureKind {
    /// Something in the input was wrong.
    Input,
    /// The command line was wrong.
    Usage,
    /// A file or the terminal failed.
    Io,
    /// A defect in the program.
    Defect,
}

/// How a command ended that could do its work.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Finish {
    /// Everything was done.
    Done,
    /// Everything was done, but something in the input was wrong, which has been said.
    InputWrong,
}

/// A command that could not do its work.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Failure {
    /// What kind of thing went wrong.
    pub(super) kind: FailureKind,
    /// What was found and where, in one sentence or a line a mistake.
    pub(super) message: String,
    /// The next things to try.
    pub(super) hints: Vec<String>,
}

impl Finish {
    /// Returns `InputWrong` if anything was wrong.
    pub(super) fn after(n_wrong: usize) -> Self {
        if n_wrong == 0 {
            Self::Done
        } else {
            Self::InputWrong
        }
    }

    /// Returns the exit code.
    pub(super) fn code(self) -> u8 {
        match self {
            Self::Done => 0,
            Self::InputWrong => 1,
        }
    }
}

impl FailureKind {
    /// Returns the exit code.
    pub(super) fn code(self) -> u8 {
        match self {
            Self::Input => 1,
            Self::Usage => 2,
            Self::Io => 3,
            Self::Defect => 4,
        }
    }
}

impl Failure {
    /// Makes a failure of the input.
    pub(super) fn input(message: impl Into<String>) -> Self {
        Self::new(FailureKind::Input, message)
    }

    /// Makes a failure of the command line.
    pub(super) fn usage(message: impl Into<String>) -> Self {
        Self::new(FailureKind::Usage, message)
    }

    /// Makes a failure of a file or the terminal.
    pub(super) fn io(message: impl Into<String>) -> Self {
        Self::new(FailureKind::Io, message)
    }

    /// Makes a failure that is the program's own.
    pub(super) fn defect(message: impl Into<String>) -> Self {
        Self::new(FailureKind::Defect, message)
    }

    /// Adds the next thing to try.
    pub(super) fn hint(mut self, hint: impl Into<String>) -> Self {
        self.hints.push(hint.into());
        self
    }

    /// Makes a failure of an act on a file: "cannot read shelf.toml: …".
    pub(super) fn file(act: &str, path: &Path, error: &io::Error) -> Self {
        Self::io(format!("cannot {act} {}: {}", path.display(), plain(error)))
    }

    /// Makes a failure of the mistakes in a file, a line each.
    pub(super) fn mistakes(path: &Path, complaints: &[Complaint]) -> Self {
        let lines: Vec<String> = complaints
            .iter()
            .map(|complaint| format!("{}:{complaint}", path.display()))
            .collect();
        Self::input(lines.join("\n"))
    }

    /// Returns the exit code.
    pub(super) fn code(&self) -> u8 {
        self.kind.code()
    }

    /// Writes message and hints; that standard error may be closed is nobody's concern any more.
    pub(super) fn report(&self, stderr: &mut dyn Write) {
        let text = self.to_string();
        let _ = stderr
            .write_all(lines(&text).as_bytes())
            .and_then(|()| stderr.flush());
    }

    fn new(kind: FailureKind, message: impl Into<String>) -> Self {
        Self {
            kind,
            message: message.into(),
            hints: Vec::new(),
        }
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        writeln!(f, "{}", self.message)?;
        for hint in &self.hints {
            writeln!(f, "  {hint}")?;
        }
        Ok(())
    }
}

/// What is written goes to standard output; reading failures are named where the path is known.
impl From<io::Error> for Failure {
    fn from(error: io::Error) -> Self {
        Self::io(format!("cannot write the output: {}", plain(&error)))
    }
}

impl From<LogFailure> for Failure {
    fn from(failure: LogFailure) -> Self {
        Self::io(failure.message).hint(failure.hint)
    }
}

/// Returns an I/O error in plain words, without the number of the operating system.
pub(super) fn plain(error: &io::Error) -> String {
    match error.kind() {
        io::ErrorKind::NotFound => "there is no such file".to_owned(),
        io::ErrorKind::PermissionDenied => "permission denied".to_owned(),
        io::ErrorKind::StorageFull => "the disk is full".to_owned(),
        io::ErrorKind::IsADirectory => "it is a folder".to_owned(),
        _ => {
            let text = error.to_string();
            let short = text
                .split_once(" (os error")
                .map_or(text.as_str(), |(words, _)| words);
            let mut letters = short.chars();
            letters.next().map_or_else(String::new, |first| {
                first.to_lowercase().chain(letters).collect()
            })
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_kind_has_its_exit_code() {
        let codes = [
            Failure::input("x").code(),
            Failure::usage("x").code(),
            Failure::io("x").code(),
            Failure::defect("x").code(),
        ];
        assert_eq!(codes, [1, 2, 3, 4]);
    }

    #[test]
    fn errors_of_the_system_are_put_plainly() {
        assert_eq!(
            plain(&io::Error::from_raw_os_error(28)),
            "the disk is full",
            "ENOSPC"
        );
        assert_eq!(
            plain(&io::Error::from_raw_os_error(5)),
            "input/output error"
        );
    }
}
