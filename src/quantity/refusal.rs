//! Why a text was not understood: where, while reading what, what was found and what would have been accepted.

use std::fmt;
use std::ops::Range;

/// A text that was not understood.
#[derive(Clone, Debug, PartialEq)]
pub struct Refusal {
    /// The bytes of the text in question; empty at its end.
    pub at: Range<usize>,
    /// What was being read: "the unit".
    pub reading: &'static str,
    /// What was wrong there.
    pub kind: RefusalKind,
}

/// What was wrong at the place of a [`Refusal`].
#[derive(Clone, Debug, PartialEq)]
pub enum RefusalKind {
    /// Something stood there that does not belong there.
    Unexpected {
        /// The text found.
        found: String,
        /// What would have been accepted.
        accepted: String,
    },
    /// The text ended too early.
    Ended {
        /// What would have been accepted.
        accepted: String,
    },
    /// The number was read but cannot be used.
    OutOfRange {
        /// The number as read, with its unit.
        found: String,
        /// The numbers that can be used.
        accepted: String,
    },
}

impl Refusal {
    /// Makes a refusal of what was found at `at`; an empty text there counts as the end.
    pub fn found(
        at: Range<usize>,
        reading: &'static str,
        found: &str,
        accepted: impl Into<String>,
    ) -> Self {
        let accepted = accepted.into();
        let kind = if found.is_empty() {
            RefusalKind::Ended { accepted }
        } else {
            RefusalKind::Unexpected {
                found: found.to_owned(),
                accepted,
            }
        };
        Self { at, reading, kind }
    }

    /// Makes a refusal of a number that was read but lies outside what is usable.
    pub fn out_of_range(
        at: Range<usize>,
        reading: &'static str,
        found: String,
        accepted: impl Into<String>,
    ) -> Self {
        Self {
            at,
            reading,
            kind: RefusalKind::OutOfRange {
                found,
                accepted: accepted.into(),
            },
        }
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let reading = self.reading;
        match &self.kind {
            RefusalKind::Unexpected { found, accepted } => {
                let found = harmless(found);
                let position = self.at.start + 1;
                write!(
                    f,
                    "found `{found}` at position {position} while reading {reading}; accepted here: {accepted}"
                )
            }
            RefusalKind::Ended { accepted } => {
                let position = self.at.start;
                write!(
                    f,
                    "found the end after position {position} while reading {reading}; accepted here: {accepted}"
                )
            }
            RefusalKind::OutOfRange { found, accepted } => {
                write!(
                    f,
                    "{reading} {found} is out of range; accepted here: {accepted}"
                )
            }
        }
    }
}

impl std::error::Error for Refusal {}

/// Returns the text with control characters (escape sequences among them) and direction marks shown as `\u{…}`, and cut
/// to a length that fits a message.
pub fn harmless(text: &str) -> String {
    const LONGEST: usize = 40;
    let mut shown = String::new();
    for (n_chars, character) in text.chars().enumerate() {
        if n_chars == LONGEST {
            shown.push('…');
            break;
        }
        if super::engineering::is_harmless(character) {
            shown.push(character);
        } else {
            shown.extend(character.escape_unicode());
        }
    }
    shown
}
