//! `nulltray judge`: a file of readings in, the same with findings out, row by row.

use std::borrow::Cow;
use std::collections::HashMap;
use std::io::{self, Read, Write};
use std::path::Path;

use csv::ByteRecord;

use super::Streams;
use super::args::{JudgeArgs, Places};
use super::columns::{Columns, Copied};
use super::decode::decode_marking;
use super::failure::{Failure, Finish};
use super::harmless::unarmed;
use super::row::{self, Row};
use super::setup::{self, unreadable};
use super::sheet::{Cell, Form, OUTPUTS, Sheet, output_cells, typed_cell};
use crate::app::{Marked, Outcome, Setup, assess, outcome};
use crate::tables::Family;

/// How many markings are kept decoded; a lot has few different ones.
const KEPT_MARKINGS: usize = 4096;
const BUFFER: usize = 1 << 16;
/// The longest row, in bytes: a quotation mark left open must not read the whole file as one cell.
const LONGEST_ROW: usize = 1 << 20;

/// Runs the command.
pub(super) fn run(
    args: &JudgeArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let setup = setup::for_command(places, streams.stderr)?;
    let form = if args.json { Form::Json } else { Form::Csv };
    if args.file == Path::new("-") {
        let task = Task {
            name: "standard input",
            form,
            setup: &setup,
        };
        return task.run(
            &mut *streams.stdin,
            &mut *streams.stdout,
            &mut *streams.stderr,
        );
    }
    let file = setup::table(&args.file)?;
    let name = args.file.display().to_string();
    let task = Task {
        name: &name,
        form,
        setup: &setup,
    };
    task.run(file, &mut *streams.stdout, &mut *streams.stderr)
}

struct Task<'a> {
    /// What the input is called in messages.
    name: &'a str,
    form: Form,
    setup: &'a Setup,
}

impl Task<'_> {
    fn run(
        &self,
        input: impl Read,
        stdout: &mut dyn Write,
        stderr: &mut dyn Write,
    ) -> Result<Finish, Failure> {
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .buffer_capacity(BUFFER)
            .from_reader(Bounded {
                inner: input,
                n_left: LONGEST_ROW,
            });
        let mut record = ByteRecord::new();
        if !self.next(&mut reader, &mut record)? {
            return Err(Failure::input(format!(
                "{} is empty: a header is needed",
                self.name
            )));
        }
        let columns = Columns::read(&record).map_err(|failure| Failure {
            message: format!("{}: {}", self.name, failure.message),
            ..failure
        })?;
        for warning in &columns.warnings {
            let _ = writeln!(stderr, "{}: {warning}", self.name);
        }
        let names = columns.copied.iter().map(|copied| copied.name.as_str());
        let mut sheet = Sheet::start(self.form, stdout, names.chain(OUTPUTS))?;
        let mut known = Known::default();
        let mut unread = Unread::default();
        let mut judge_all = || -> Result<(), Failure> {
            while self.next(&mut reader, &mut record)? {
                let outcome = match row::read(&columns, &record, &self.setup.meter) {
                    Ok(row) => self.judge(&row, &mut known),
                    Err(reason) => {
                        unread.count(&record);
                        Outcome {
                            finding: "unread".to_owned(),
                            remark: reason,
                            ..Outcome::default()
                        }
                    }
                };
                write_row(&mut sheet, &columns.copied, &record, &outcome)?;
            }
            Ok(())
        };
        // What was judged before the input failed is a whole table all the same.
        let judged = judge_all();
        sheet.finish()?;
        judged?;
        Ok(unread.said(self.name, stderr))
    }

    fn next(
        &self,
        reader: &mut csv::Reader<Bounded<impl Read>>,
        record: &mut ByteRecord,
    ) -> Result<bool, Failure> {
        reader.get_mut().n_left = LONGEST_ROW;
        let line = reader.position().line();
        reader.read_byte_record(record).map_err(|error| {
            let text = error.to_string();
            match error.into_kind() {
                csv::ErrorKind::Io(error) if error.kind() == io::ErrorKind::InvalidData => {
                    Failure::input(format!(
                        "{}: the row at line {line} has no end within {} kB",
                        self.name,
                        LONGEST_ROW >> 10
                    ))
                    .hint("look for a quotation mark left open in that row")
                }
                csv::ErrorKind::Io(error) => unreadable(self.name, &error),
                _ => Failure::input(format!("{}: {text}", self.name)),
            }
        })
    }

    fn judge(&self, row: &Row<'_>, known: &mut Known) -> Outcome {
        let marked = known.marked(&row.marking, row.family);
        let assessment = assess(self.setup, marked, row.switch, row.seen, &row.circumstances);
        outcome(self.setup, marked, &assessment)
    }
}

/// Input that ends in an error where a row does not end.
struct Bounded<R> {
    inner: R,
    /// How much may still be read for the row at hand.
    n_left: usize,
}

impl<R: Read> Read for Bounded<R> {
    fn read(&mut self, bytes: &mut [u8]) -> io::Result<usize> {
        if self.n_left == 0 {
            return Err(io::ErrorKind::InvalidData.into());
        }
        let n_read = self.inner.read(bytes)?;
        self.n_left = self.n_left.saturating_sub(n_read);
        Ok(n_read)
    }
}

/// Markings decoded so far, at most [`KEPT_MARKINGS`]; when there are more, all are forgotten and collected afresh, which
/// costs a decoding each and no bookkeeping.
#[derive(Default)]
struct Known {
    marked: HashMap<String, Marked>,
    key: String,
}

impl Known {
    fn marked(&mut self, marking: &str, family: Option<Family>) -> &Marked {
        const SEPARATOR: char = '\0';
        self.key.clear();
        self.key.push_str(family.map_or("", Family::name));
        self.key.push(SEPARATOR);
        self.key.push_str(marking);
        if !self.marked.contains_key(&self.key) && self.marked.len() >= KEPT_MARKINGS {
            self.marked.clear();
        }
        if !self.marked.contains_key(&self.key) {
            let fresh = Marked {
                decoding: decode_marking(marking, family),
                family,
                chosen: None,
            };
            self.marked.insert(self.key.clone(), fresh);
        }
        &self.marked[&self.key]
    }
}

/// The rows that could not be read.
#[derive(Default)]
struct Unread {
    n_rows: usize,
    first_line: Option<u64>,
}

impl Unread {
    fn count(&mut self, record: &ByteRecord) {
        self.n_rows += 1;
        if self.first_line.is_none() {
            self.first_line = record.position().map(csv::Position::line);
        }
    }

    fn said(&self, name: &str, stderr: &mut dyn Write) -> Finish {
        if self.n_rows > 0 {
            let rows = if self.n_rows == 1 { "row" } else { "rows" };
            let line = self.first_line.unwrap_or_default();
            let _ = writeln!(
                stderr,
                "{name}: {} {rows} could not be read, the first at line {line}; `remark` says why",
                self.n_rows
            );
        }
        Finish::after(self.n_rows)
    }
}

fn write_row<W: Write>(
    sheet: &mut Sheet<W>,
    copied: &[Copied],
    record: &ByteRecord,
    outcome: &Outcome,
) -> io::Result<()> {
    let texts: Vec<Cow<'_, str>> = copied
        .iter()
        .map(|copied| String::from_utf8_lossy(record.get(copied.position).unwrap_or_default()))
        .collect();
    let inputs = texts.iter().zip(copied).map(|(text, copied)| {
        let text = unarmed(text);
        match copied.column {
            Some(column) if column.holds_numbers() => typed_cell(Some(text)),
            _ => Cell::Text(text),
        }
    });
    sheet.row(inputs.chain(output_cells(outcome)))
}
