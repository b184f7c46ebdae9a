//! From the text of a table to typed rows: one shape for every file in `data/`, every mistake with its line.
//!
//! ```text
//! format = 1
//! title  = "…"       what a row is, for the listing
//! source = "…"       where the facts were published; a row may name its own
//! [[row]] …          sorted by their key, keys unique
//! ```

use serde::Deserialize;
use serde::de::DeserializeOwned;
use std::fmt;
use std::ops::Range;
use toml::Spanned;

/// A mistake in a table, with its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TableError {
    /// The name of the file in `data/`.
    pub file: String,
    /// The line, counted from 1.
    pub line: usize,
    /// The column in characters, counted from 1.
    pub column: usize,
    /// What is wrong there.
    pub message: String,
}

/// One row of a table in words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TableRow {
    /// What kind of row it is: "tolerance letter".
    pub table: String,
    /// The row in words: "J: ±5 %".
    pub text: String,
    /// Where the fact was published.
    pub source: String,
}

/// A row as it stands in the file, with what turns it into a typed row.
pub(super) trait RawRow: DeserializeOwned {
    /// The typed row.
    type Typed: fmt::Display;
    /// What the rows are sorted by; no two rows have the same.
    fn key(&self) -> String;
    /// The row's own source.
    fn source(&self) -> Option<&str>;
    /// Returns the typed row, or what is wrong with it.
    fn typed(self) -> Result<Self::Typed, String>;
}

/// A typed row with its source.
pub(super) struct Sourced<T> {
    /// The row.
    pub(super) row: T,
    /// Where it was published.
    pub(super) source: String,
}

/// A table read.
pub(super) struct Table<T> {
    /// What a row is.
    title: String,
    /// The rows, in the order of their keys.
    pub(super) rows: Vec<Sourced<T>>,
}

impl<T> Table<T> {
    /// Returns the rows without their sources.
    pub(super) fn iter(&self) -> impl Iterator<Item = &T> {
        self.rows.iter().map(|sourced| &sourced.row)
    }
}

impl<T: fmt::Display> Table<T> {
    /// Returns every row in words.
    pub(super) fn listing(&self) -> Vec<TableRow> {
        let row = |sourced: &Sourced<T>| TableRow {
            table: self.title.clone(),
            text: sourced.row.to_string(),
            source: sourced.source.clone(),
        };
        self.rows.iter().map(row).collect()
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawTable<R> {
    format: Spanned<u32>,
    title: String,
    source: Spanned<String>,
    row: Vec<Spanned<R>>,
}

/// Reads a table of rows.
pub(super) fn read_rows<R: RawRow>(file: &str, text: &str) -> Result<Table<R::Typed>, TableError> {
    let raw: RawTable<R> = read_toml(file, text)?;
    head(file, text, &raw.format, &raw.source)?;
    let common = raw.source.into_inner();
    let mut rows = Vec::with_capacity(raw.row.len());
    let mut last_key: Option<String> = None;
    for spanned in raw.row {
        let at = spanned.span();
        let row = spanned.into_inner();
        let key = row.key();
        if last_key.as_ref().is_some_and(|last| last >= &key) {
            let message = format!("the row of {key} stands out of order, or its key is not unique");
            return Err(place(file, text, at, message));
        }
        last_key = Some(key);
        let source = row.source().unwrap_or(&common).to_owned();
        let row = row
            .typed()
            .map_err(|message| place(file, text, at, message))?;
        rows.push(Sourced { row, source });
    }
    Ok(Table {
        title: raw.title,
        rows,
    })
}

/// Reads any table file by serde.
pub(super) fn read_toml<T: DeserializeOwned>(file: &str, text: &str) -> Result<T, TableError> {
    toml::from_str(text).map_err(|error| {
        let at = error.span().unwrap_or(0..0);
        place(file, text, at, error.message().to_owned())
    })
}

/// Checks the head every table has.
pub(super) fn head(
    file: &str,
    text: &str,
    format: &Spanned<u32>,
    source: &Spanned<String>,
) -> Result<(), TableError> {
    if *format.get_ref() != 1 {
        let message = format!("format {} is not known; known here: 1", format.get_ref());
        return Err(place(file, text, format.span(), message));
    }
    if source.get_ref().trim().is_empty() {
        let message = "the source is empty".to_owned();
        return Err(place(file, text, source.span(), message));
    }
    Ok(())
}

/// Makes the error for a place in the text.
pub(super) fn place(file: &str, text: &str, at: Range<usize>, message: String) -> TableError {
    let before = text.get(..at.start).unwrap_or_default();
    let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
    TableError {
        file: file.to_owned(),
        line: before.matches('\n').count() + 1,
        column: before.get(line_start..).map_or(0, |s| s.chars().count()) + 1,
        message,
    }
}

impl fmt::Display for TableError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self {
            file,
            line,
            column,
            message,
        } = self;
        write!(f, "{file}:{line}:{column}: {message}")
    }
}

impl std::error::Error for TableError {}
