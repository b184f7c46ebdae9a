//! Tables written row by row, as CSV or as a JSON array of objects: the answers of `judge`, the export of the log.
//!
//! CSV: a header, comma-separated, quoted where needed, one `\n` a row, formulas defused (see [`super::harmless`]).
//! JSON: one object a row with the same keys; numbers as numbers, empty cells null. A cell that people type (a reading) is
//! a number where it is one and a string where it is not (`21.8/21.6`, `stop`); all other text stays text, `105` in a
//! marking included.

use std::borrow::Cow;
use std::io::{self, Write};

use super::harmless::{cell, plain_number, write_json};
use super::number;
use crate::app::Outcome;

/// The columns that come out of judging, in their order.
pub(super) const OUTPUTS: [&str; 15] = [
    "nominal_pF",
    "low_pF",
    "high_pF",
    "limits_from",
    "capacitance_pF",
    "uncertainty_pF",
    "loss",
    "loss_below",
    "deviation_percent",
    "probability_inside",
    "probability_flat",
    "reading_probability",
    "finding",
    "compartment",
    "remark",
];

/// How a table is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Form {
    /// Comma-separated.
    Csv,
    /// An array of objects.
    Json,
}

/// One cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Cell<'a> {
    /// Nothing.
    Empty,
    /// Words; empty ones are an empty cell.
    Text(&'a str),
    /// What a person typed as a reading.
    Typed(&'a str),
    /// A number.
    Number(f64),
    /// A count.
    Count(i64),
}

/// A table being written.
pub(super) struct Sheet<W: Write> {
    form: Writer<W>,
    digits: Vec<u8>,
}

enum Writer<W: Write> {
    Csv(Box<csv::Writer<W>>),
    Json {
        out: io::BufWriter<W>,
        /// Each column's name as JSON, colon included, made once.
        keys: Vec<Vec<u8>>,
        n_rows: usize,
    },
}

const BUFFER: usize = 1 << 16;

impl<W: Write> Sheet<W> {
    /// Starts a table with these columns.
    pub(super) fn start<'a>(
        form: Form,
        out: W,
        names: impl Iterator<Item = &'a str>,
    ) -> io::Result<Self> {
        let form = match form {
            Form::Csv => {
                let mut writer = csv::WriterBuilder::new()
                    .buffer_capacity(BUFFER)
                    .flexible(true)
                    .from_writer(out);
                for name in names {
                    writer.write_field(cell(name).as_bytes())?;
                }
                writer.write_record(None::<&[u8]>)?;
                Writer::Csv(Box::new(writer))
            }
            Form::Json => {
                let mut out = io::BufWriter::with_capacity(BUFFER, out);
                out.write_all(b"[")?;
                Writer::Json {
                    out,
                    keys: keys(names)?,
                    n_rows: 0,
                }
            }
        };
        Ok(Self {
            form,
            digits: Vec::with_capacity(32),
        })
    }

    /// Writes a row: as many cells as there are columns.
    pub(super) fn row<'a>(&mut self, cells: impl Iterator<Item = Cell<'a>>) -> io::Result<()> {
        let digits = &mut self.digits;
        match &mut self.form {
            Writer::Csv(writer) => {
                for one in cells {
                    match one {
                        Cell::Empty => writer.write_field(b"")?,
                        Cell::Text(text) | Cell::Typed(text) => {
                            writer.write_field(cell(text).as_bytes())?;
                        }
                        Cell::Number(value) => writer.write_field(written(value, digits))?,
                        Cell::Count(count) => writer.write_field(count.to_string())?,
                    }
                }
                writer.write_record(None::<&[u8]>)?;
            }
            Writer::Json { out, keys, n_rows } => {
                out.write_all(if *n_rows == 0 { b"\n{" } else { b",\n{" })?;
                *n_rows += 1;
                for (n, (key, one)) in keys.iter().zip(cells).enumerate() {
                    if n > 0 {
                        out.write_all(b",")?;
                    }
                    out.write_all(key)?;
                    write_value(out, one, digits)?;
                }
                out.write_all(b"}")?;
            }
        }
        Ok(())
    }

    /// Ends the table.
    pub(super) fn finish(&mut self) -> io::Result<()> {
        match &mut self.form {
            Writer::Csv(writer) => writer.flush(),
            Writer::Json { out, n_rows, .. } => {
                out.write_all(if *n_rows == 0 { b"]\n" } else { b"\n]\n" })?;
                out.flush()
            }
        }
    }
}

/// Returns the cells of [`OUTPUTS`].
pub(super) fn output_cells(outcome: &Outcome) -> [Cell<'_>; 15] {
    let number = |value: Option<f64>| match value {
        Some(value) if value.is_finite() => Cell::Number(value),
        _ => Cell::Empty,
    };
    [
        number(outcome.nominal_pf),
        number(outcome.low_pf),
        number(outcome.high_pf),
        text_cell(outcome.limits_from.as_deref()),
        number(outcome.capacitance_pf),
        number(outcome.uncertainty_pf),
        number(outcome.loss),
        number(outcome.loss_below),
        number(outcome.deviation_percent),
        number(outcome.probability_inside),
        number(outcome.probability_flat),
        number(outcome.reading_probability),
        Cell::Text(&outcome.finding),
        text_cell(outcome.compartment.as_deref()),
        Cell::Text(&outcome.remark),
    ]
}

/// Returns a text that may be missing as a cell.
pub(super) fn text_cell(text: Option<&str>) -> Cell<'_> {
    text.map_or(Cell::Empty, Cell::Text)
}

/// Returns a reading that may be missing as a cell.
pub(super) fn typed_cell(text: Option<&str>) -> Cell<'_> {
    text.map_or(Cell::Empty, Cell::Typed)
}

/// The names as keys; a name that comes again gets a number, so that no object has a key twice.
fn keys<'a>(names: impl Iterator<Item = &'a str>) -> io::Result<Vec<Vec<u8>>> {
    let mut seen: Vec<&str> = Vec::new();
    let mut keys = Vec::new();
    for name in names {
        let n_before = seen.iter().filter(|earlier| **earlier == name).count();
        seen.push(name);
        let unique = match n_before {
            0 => Cow::Borrowed(name),
            n => Cow::Owned(format!("{name} {}", n + 1)),
        };
        let mut key = Vec::new();
        write_json(&mut key, unique.as_ref())?;
        key.push(b':');
        keys.push(key);
    }
    Ok(keys)
}

fn write_value(out: &mut dyn Write, one: Cell<'_>, digits: &mut Vec<u8>) -> io::Result<()> {
    match one {
        Cell::Empty | Cell::Text("") | Cell::Typed("") => out.write_all(b"null"),
        Cell::Text(text) => write_json(out, text),
        Cell::Typed(text) => match plain_number(text.trim()) {
            Some(value) => out.write_all(written(value, digits)),
            None => write_json(out, text),
        },
        Cell::Number(value) => out.write_all(written(value, digits)),
        Cell::Count(count) => write!(out, "{count}"),
    }
}

fn written(value: f64, digits: &mut Vec<u8>) -> &[u8] {
    digits.clear();
    number::append(value, digits);
    digits
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table(form: Form) -> String {
        let mut out = Vec::new();
        let mut sheet = Sheet::start(form, &mut out, ["a", "b", "a"].into_iter()).expect("memory");
        let rows = [
            [Cell::Text("105"), Cell::Typed("21,8"), Cell::Number(1.5)],
            [Cell::Text("=1"), Cell::Typed("21.8/21.6"), Cell::Empty],
            [Cell::Text("a,\"b\""), Cell::Typed("-3"), Cell::Count(7)],
        ];
        for row in rows {
            sheet.row(row.into_iter()).expect("memory");
        }
        sheet.finish().expect("memory");
        drop(sheet);
        String::from_utf8(out).expect("UTF-8")
    }

    #[test]
    fn csv_is_quoted_and_defused() {
        assert_eq!(
            table(Form::Csv),
            "a,b,a\n105,\"21,8\",1.5\n'=1,21.8/21.6,\n\"a,\"\"b\"\"\",-3,7\n"
        );
    }

    #[test]
    fn json_has_numbers_text_and_null() {
        assert_eq!(
            table(Form::Json),
            "[\n{\"a\":\"105\",\"b\":21.8,\"a 2\":1.5},\n{\"a\":\"=1\",\"b\":\"21.8/21.6\",\"a 2\":null},\n{\"a\":\"a,\\\"b\\\"\",\"b\":-3,\"a 2\":7}\n]\n"
        );
    }
}
