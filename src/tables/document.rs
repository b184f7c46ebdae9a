//! TOML files that people write: a tree with places, walked with our own lists of keys, every mistake reported.

mod values;

use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use crate::quantity::{Refusal, harmless};

/// A mistake in a file, with its place.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Complaint {
    /// Line, counted from 1.
    pub line: usize,
    /// Column in characters, counted from 1.
    pub column: usize,
    /// What is wrong and what would be accepted.
    pub message: String,
}

impl std::fmt::Display for Complaint {
    /// Writes "14:1: unknown key …".
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}:{}: {}", self.line, self.column, self.message)
    }
}

/// A file being read: its tree, and the mistakes found so far.
#[derive(Debug)]
pub struct Document<'t> {
    text: &'t str,
    complaints: Vec<Complaint>,
}

/// A table of the file with its name and place.
#[derive(Clone, Debug)]
pub struct Section<'d> {
    /// Its name as written, with brackets; the whole file has none.
    pub name: String,
    /// Where it starts.
    pub at: Range<usize>,
    table: &'d DeTable<'d>,
}

/// Whether a key must be there.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Need {
    /// Its absence is a mistake.
    Required,
    /// It may be left out.
    Optional,
}

/// Which numbers make sense.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bound {
    /// Above zero.
    Positive,
    /// Zero and above.
    NotNegative,
    /// Any finite number.
    Any,
}

/// A value with its place.
#[derive(Clone, Debug, PartialEq)]
pub struct Placed<T> {
    /// The value.
    pub value: T,
    /// Its bytes in the file.
    pub at: Range<usize>,
}

/// After so many mistakes the rest is only counted.
const MOST_COMPLAINTS: usize = 100;

/// Parses the text; syntax errors are recorded and what could be read is still there to be walked.
pub fn tree(text: &str) -> (Spanned<DeTable<'_>>, Document<'_>) {
    let (table, errors) = DeTable::parse_recoverable(text);
    let mut document = Document {
        text,
        complaints: Vec::new(),
    };
    for error in errors {
        document.complain(error.span().unwrap_or(0..0), error.message().to_owned());
    }
    (table, document)
}

impl<'t> Document<'t> {
    /// Returns the whole file as a section.
    pub fn root<'d>(table: &'d Spanned<DeTable<'d>>) -> Section<'d> {
        Section {
            name: String::new(),
            at: 0..0,
            table: table.get_ref(),
        }
    }

    /// Returns the text of the file.
    pub fn text(&self) -> &'t str {
        self.text
    }

    /// Records a mistake.
    pub fn complain(&mut self, at: Range<usize>, message: String) {
        let (line, column) = self.place(at.start);
        self.complaints.push(Complaint {
            line,
            column,
            message,
        });
    }

    /// Records a mistake inside a text value.
    pub fn refuse(&mut self, at: &Range<usize>, key: &str, refusal: &Refusal) {
        self.complain(at.clone(), format!("`{key}`: {refusal}"));
    }

    /// Returns the mistakes in the order of the file; past a hundred only their number.
    pub fn into_complaints(mut self) -> Vec<Complaint> {
        self.complaints.sort();
        self.complaints.dedup();
        let n_more = self.complaints.len().saturating_sub(MOST_COMPLAINTS);
        self.complaints.truncate(MOST_COMPLAINTS);
        if let (Some(last), true) = (self.complaints.last().cloned(), n_more > 0) {
            let message = format!("and {n_more} more mistakes from here on");
            self.complaints.push(Complaint { message, ..last });
        }
        self.complaints
    }

    /// Returns whether no mistake was found so far.
    pub fn is_clean(&self) -> bool {
        self.complaints.is_empty()
    }

    /// Complains of every key that is not among the known ones, naming the nearest.
    pub fn check_keys(&mut self, section: &Section<'_>, known: &[&str]) {
        for key in section.table.keys() {
            let found = key.get_ref().as_ref();
            if !known.contains(&found) {
                let place = if section.name.is_empty() {
                    String::new()
                } else {
                    format!(" in {}", section.name)
                };
                let hint = nearest(found, known)
                    .map_or(String::new(), |near| format!("did you mean `{near}`? "));
                let list = known.join(", ");
                let found = harmless(found);
                self.complain(
                    key.span(),
                    format!("unknown key `{found}`{place}; {hint}Known here: {list}"),
                );
            }
        }
    }

    /// Returns a table of the section.
    pub fn section<'d>(
        &mut self,
        parent: &Section<'d>,
        key: &str,
        need: Need,
    ) -> Option<Section<'d>> {
        let value = self.get(parent, key, need)?;
        match value.get_ref() {
            DeValue::Table(table) => Some(Section {
                name: format!("[{key}]"),
                at: value.span(),
                table,
            }),
            other => {
                let found = other.type_str();
                self.complain(
                    value.span(),
                    format!("`{key}` is a {found}; accepted here: a table, [{key}]"),
                );
                None
            }
        }
    }

    /// Returns the tables of an array of tables, at most `most` of them; more are a mistake.
    pub fn sections<'d>(
        &mut self,
        parent: &Section<'d>,
        key: &str,
        most: usize,
        need: Need,
    ) -> Vec<Section<'d>> {
        let Some(value) = self.get(parent, key, need) else {
            return Vec::new();
        };
        let DeValue::Array(array) = value.get_ref() else {
            let found = value.get_ref().type_str();
            self.complain(
                value.span(),
                format!("`{key}` is a {found}; accepted here: tables, each headed [[{key}]]"),
            );
            return Vec::new();
        };
        if let Some(extra) = array.get(most) {
            self.complain(
                extra.span(),
                format!(
                    "there are {} [[{key}]]; accepted here: at most {most}",
                    array.len()
                ),
            );
        }
        let mut sections = Vec::new();
        for item in array.iter().take(most) {
            if let DeValue::Table(table) = item.get_ref() {
                sections.push(Section {
                    name: format!("[[{key}]]"),
                    at: item.span(),
                    table,
                });
            } else {
                self.complain(
                    item.span(),
                    format!(
                        "`{key}` holds a {}; accepted here: tables",
                        item.get_ref().type_str()
                    ),
                );
            }
        }
        sections
    }

    /// Returns the items of an array, at most `most` of them; more are a mistake.
    pub fn items<'d>(
        &mut self,
        section: &Section<'d>,
        key: &str,
        most: usize,
        need: Need,
    ) -> Option<Placed<Vec<&'d Spanned<DeValue<'d>>>>> {
        let value = self.get(section, key, need)?;
        let Some(array) = value.get_ref().as_array() else {
            let found = value.get_ref().type_str();
            self.complain(
                value.span(),
                format!("`{key}` is a {found}; accepted here: a list in brackets"),
            );
            return None;
        };
        if array.len() > most {
            self.complain(
                value.span(),
                format!(
                    "`{key}` has {} items; accepted here: at most {most}",
                    array.len()
                ),
            );
        }
        Some(Placed {
            value: array.iter().take(most).collect(),
            at: value.span(),
        })
    }

    /// Returns the value of a key as it stands; its absence is a mistake if it is needed.
    pub fn get<'d>(
        &mut self,
        section: &Section<'d>,
        key: &str,
        need: Need,
    ) -> Option<&'d Spanned<DeValue<'d>>> {
        let value = section.table.get(key);
        if value.is_none() && need == Need::Required {
            let place = if section.name.is_empty() {
                "the file".to_owned()
            } else {
                section.name.clone()
            };
            self.complain(section.at.clone(), format!("`{key}` is missing in {place}"));
        }
        value
    }

    /// Returns the line, counted from 1, in which a place lies.
    pub fn line_of(&self, at: &Range<usize>) -> usize {
        self.place(at.start).0
    }

    fn place(&self, byte: usize) -> (usize, usize) {
        let before = self.text.get(..byte).unwrap_or(self.text);
        let line = before.bytes().filter(|b| *b == b'\n').count() + 1;
        let column = before
            .rsplit('\n')
            .next()
            .unwrap_or_default()
            .chars()
            .count()
            + 1;
        (line, column)
    }
}

impl<'d> Section<'d> {
    /// Returns the keys with their values, in alphabetical order.
    pub fn entries(
        &self,
    ) -> impl Iterator<
        Item = (
            &'d Spanned<std::borrow::Cow<'d, str>>,
            &'d Spanned<DeValue<'d>>,
        ),
    > {
        self.table.iter()
    }

    /// Returns where a key's value stands.
    pub fn place_of(&self, key: &str) -> Option<Range<usize>> {
        self.table.get(key).map(Spanned::span)
    }
}

/// Returns the known word nearest to the one found, if it is near enough to be meant.
pub fn nearest<'k>(found: &str, known: &[&'k str]) -> Option<&'k str> {
    // Long names cost time squared and resemble nothing.
    if found.len() > 64 {
        return None;
    }
    known
        .iter()
        .map(|word| (strsim::normalized_damerau_levenshtein(found, word), *word))
        .filter(|(likeness, _)| *likeness > 0.55)
        .max_by(|x, y| x.0.total_cmp(&y.0))
        .map(|(_, word)| word)
}
