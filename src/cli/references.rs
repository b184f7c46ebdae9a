//! From a CSV of reference parts to readings for a calibration, every mistake with its line.

use std::io::Read;

use csv::StringRecord;

use super::failure::Failure;
use super::harmless::line;
use super::predict::switch_named;
use super::row::seen;
use crate::meter::{Meter, ReferenceReading, check_reading};
use crate::quantity::{Farad, Fraction, parse};

const COLUMNS: [&str; 8] = [
    "capacitance",
    "uncertainty",
    "loss",
    "switch",
    "dial",
    "dark_from",
    "dark_to",
    "label",
];
const NEEDED: [&str; 3] = ["capacitance", "uncertainty", "switch"];

/// More rows than anyone reads off a meter.
const MOST_ROWS: usize = 1000;

/// The readings of a file, with the line of each.
pub(super) struct References {
    pub(super) readings: Vec<ReferenceReading>,
    pub(super) lines: Vec<u64>,
}

/// Reads the file; `name` is what it is called in messages.
///
/// # Errors
/// Every row that cannot be read, with its line, in one failure.
pub(super) fn read(input: impl Read, name: &str, meter: &Meter) -> Result<References, Failure> {
    let mut reader = csv::ReaderBuilder::new()
        .flexible(true)
        .trim(csv::Trim::All)
        .from_reader(input);
    let header = reader
        .headers()
        .map_err(|error| unreadable(name, &error))?
        .clone();
    check_header(&header, name)?;
    let mut references = References {
        readings: Vec::new(),
        lines: Vec::new(),
    };
    let mut mistakes = Vec::new();
    for row in reader.records() {
        let row = row.map_err(|error| unreadable(name, &error))?;
        let at = row.position().map_or(0, csv::Position::line);
        match reading(&header, &row, meter) {
            Ok(reading) => {
                references.readings.push(reading);
                references.lines.push(at);
            }
            Err(why) => mistakes.push(format!("{name}:{at}: {why}")),
        }
        if references.readings.len() > MOST_ROWS {
            return Err(Failure::input(format!(
                "{name} has more than {MOST_ROWS} rows"
            )));
        }
    }
    if mistakes.is_empty() {
        Ok(references)
    } else {
        Err(Failure::input(mistakes.join("\n")))
    }
}

fn unreadable(name: &str, error: &csv::Error) -> Failure {
    Failure::input(format!("cannot read {name}: {}", line(&error.to_string())))
}

fn check_header(header: &StringRecord, name: &str) -> Result<(), Failure> {
    let missing: Vec<&str> = NEEDED
        .into_iter()
        .filter(|needed| !header.iter().any(|found| found == *needed))
        .collect();
    let unknown: Vec<String> = header
        .iter()
        .filter(|found| !COLUMNS.contains(found))
        .map(|found| format!("`{}`", line(found)))
        .collect();
    let reading = ["dial", "dark_from"]
        .into_iter()
        .any(|needed| header.iter().any(|found| found == needed));
    let what = if !missing.is_empty() {
        format!("no column {}", missing.join(", "))
    } else if !unknown.is_empty() {
        format!("unknown column {}", unknown.join(", "))
    } else if !reading {
        "no column dial, nor dark_from and dark_to".to_owned()
    } else {
        return Ok(());
    };
    Err(Failure::input(format!(
        "{name}:1: {what}; known here: {}",
        COLUMNS.join(", ")
    )))
}

fn reading(
    header: &StringRecord,
    row: &StringRecord,
    meter: &Meter,
) -> Result<ReferenceReading, String> {
    let cell = |name: &str| {
        let index = header.iter().position(|column| column == name);
        index.and_then(|index| row.get(index)).unwrap_or_default()
    };
    let capacitance: Farad =
        parse(cell("capacitance")).map_err(|refusal| format!("capacitance: {refusal}"))?;
    let switch = switch_named(meter, cell("switch"))?;
    let seen = seen(
        meter,
        cell("dial"),
        [cell("dark_from"), cell("dark_to")],
        "",
    )?;
    let reading = ReferenceReading {
        label: cell("label").to_owned(),
        capacitance,
        standard_uncertainty: uncertainty(cell("uncertainty"), capacitance)?,
        loss: loss(cell("loss"))?,
        switch,
        seen,
    };
    check_reading(meter, &reading).map_err(|kind| kind.to_string())?;
    Ok(reading)
}

/// A quantity or a percentage; open terminals need none.
fn uncertainty(text: &str, capacitance: Farad) -> Result<Farad, String> {
    if text.is_empty() && capacitance.get() == 0.0 {
        return Ok(Farad::new(0.0));
    }
    if text.ends_with('%') {
        let fraction =
            Fraction::parse(text).map_err(|refusal| format!("uncertainty: {refusal}"))?;
        return Ok(capacitance * fraction.get());
    }
    parse(text).map_err(|refusal| format!("uncertainty: {refusal}, or a percentage as in 0.5 %"))
}

fn loss(text: &str) -> Result<f64, String> {
    if text.is_empty() {
        return Ok(0.0);
    }
    let number = super::harmless::plain_number(text);
    number.ok_or_else(|| format!("loss is `{}`; accepted: a number from 0 to 1", line(text)))
}
