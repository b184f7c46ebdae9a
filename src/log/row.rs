//! One row of `entry`: what it holds, to and from columns, and its check sum.

use std::io::Write;

use chrono::{DateTime, FixedOffset};
use rusqlite::types::{FromSql, Value, ValueRef};

use super::failure::Fault;
use crate::app::{Outcome, Raw, Record, RecordId, RecordKind};

/// The columns in order, `sum` last.
pub(super) const COLUMNS: &str = "id, kind, voids, profile, lot, time, \
    marking, family, switch, dial, dark_from, dark_to, lamp, temperature, heated_hours, leakage, leakage_voltage, looks, note, \
    chosen_reading, typed, \
    nominal_pf, low_pf, high_pf, limits_from, capacitance_pf, uncertainty_pf, own_uncertainty_pf, loss, loss_below, \
    deviation_percent, probability_inside, probability_flat, reading_probability, finding, compartment, remark, sum";

/// How many there are, with `sum`.
pub(super) const N_COLUMNS: usize = 38;

/// What a row does.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Deed {
    /// An entry of the person, made with the profile of that number.
    Entry { record: Box<Record>, profile: i64 },
    /// Takes back the entry of that number.
    Void(i64),
    /// Takes back the `void` row of that number.
    Redo(i64),
}

/// A row of `entry`, its sum checked.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Row {
    pub(super) id: i64,
    pub(super) lot: String,
    pub(super) time: DateTime<FixedOffset>,
    pub(super) deed: Deed,
}

impl Row {
    /// The columns of the row, `sum` included.
    pub(super) fn values(&self) -> Vec<Value> {
        let mut values = Vec::with_capacity(N_COLUMNS);
        values.push(Value::Integer(self.id));
        let (kind, voids, profile) = match &self.deed {
            Deed::Entry { record, profile } => (
                kind_name(record.kind),
                record.replaces.map(|id| id.0),
                Some(*profile),
            ),
            Deed::Void(target) => ("void", Some(*target), None),
            Deed::Redo(target) => ("redo", Some(*target), None),
        };
        values.push(text(kind));
        values.push(whole(voids));
        values.push(whole(profile));
        values.push(text(&self.lot));
        values.push(text(&self.time.to_rfc3339()));
        match &self.deed {
            Deed::Entry { record, .. } => {
                raw_values(&record.raw, &mut values);
                outcome_values(&record.outcome, &mut values);
            }
            Deed::Void(_) | Deed::Redo(_) => values.resize(N_COLUMNS - 1, Value::Null),
        }
        let sum = sum(values.iter().map(ValueRef::from));
        values.push(Value::Integer(sum));
        values
    }

    /// Reads a row selected by [`COLUMNS`].
    pub(super) fn read(row: &rusqlite::Row<'_>) -> Result<Self, Fault> {
        let id: i64 = row.get(0)?;
        let damaged = |what: &str| Fault::Damaged(format!("entry {id} {what}"));
        if row.get::<_, i64>(N_COLUMNS - 1)? != sum_of(row, N_COLUMNS - 1)? {
            return Err(damaged("is not as it was written (check sum)"));
        }
        let mut cells = Cells { row, next: 1 };
        let kind: String = cells.take()?;
        let voids: Option<i64> = cells.take()?;
        let profile: Option<i64> = cells.take()?;
        let lot: String = cells.take()?;
        let time = DateTime::parse_from_rfc3339(&cells.take::<String>()?)
            .map_err(|_| damaged("has no readable time"))?;
        if voids.is_some_and(|target| target >= id) {
            return Err(damaged("names a later one"));
        }
        let deed = match (kind.as_str(), voids, profile) {
            ("void", Some(target), _) => Deed::Void(target),
            ("redo", Some(target), _) => Deed::Redo(target),
            (name, voids, Some(profile)) => {
                let kind = kind_of(name).ok_or_else(|| damaged("is of an unknown kind"))?;
                let raw = take_raw(&mut cells)?;
                let outcome = take_outcome(&mut cells)?;
                let record = Record {
                    lot: lot.clone(),
                    kind,
                    raw,
                    outcome,
                    replaces: voids.map(RecordId),
                };
                Deed::Entry {
                    record: Box::new(record),
                    profile,
                }
            }
            _ => return Err(damaged("names nothing it could stand for")),
        };
        Ok(Self {
            id,
            lot,
            time,
            deed,
        })
    }

    /// The row that this one takes back or replaces.
    pub(super) fn voids(&self) -> Option<i64> {
        match &self.deed {
            Deed::Entry { record, .. } => record.replaces.map(|id| id.0),
            Deed::Void(target) | Deed::Redo(target) => Some(*target),
        }
    }
}

/// The time as it can be written: RFC 3339 knows offsets in whole minutes only.
pub(super) fn writable(time: DateTime<FixedOffset>) -> Result<DateTime<FixedOffset>, Fault> {
    let minutes = time.offset().local_minus_utc() / 60;
    let rounded =
        FixedOffset::east_opt(minutes * 60).map_or(time, |offset| time.with_timezone(&offset));
    match DateTime::parse_from_rfc3339(&rounded.to_rfc3339()) {
        Ok(read) if read == rounded => Ok(rounded),
        _ => Err(Fault::Refused {
            what: format!("the time {time} cannot be written"),
            hint: "set the clock of the computer",
        }),
    }
}

pub(super) fn kind_name(kind: RecordKind) -> &'static str {
    match kind {
        RecordKind::Part => "part",
        RecordKind::Check => "check",
        RecordKind::Zero => "zero",
    }
}

pub(super) fn kind_of(name: &str) -> Option<RecordKind> {
    [RecordKind::Part, RecordKind::Check, RecordKind::Zero]
        .into_iter()
        .find(|kind| kind_name(*kind) == name)
}

/// The CRC-32 of the cells in the text form of the module page.
pub(super) fn sum<'a>(cells: impl Iterator<Item = ValueRef<'a>>) -> i64 {
    let mut form = Vec::with_capacity(1024);
    cells.for_each(|cell| put(&mut form, cell));
    i64::from(crc32fast::hash(&form))
}

/// The same of the first `n` columns of a row.
pub(super) fn sum_of(row: &rusqlite::Row<'_>, n: usize) -> rusqlite::Result<i64> {
    let mut form = Vec::with_capacity(1024);
    for index in 0..n {
        put(&mut form, row.get_ref(index)?);
    }
    Ok(i64::from(crc32fast::hash(&form)))
}

fn put(form: &mut Vec<u8>, cell: ValueRef<'_>) {
    // Writing into memory cannot fail.
    let _ = match cell {
        ValueRef::Null => form.write_all(b"n"),
        ValueRef::Integer(number) => write!(form, "i{number}"),
        ValueRef::Real(number) => write!(form, "r{:016x}", number.to_bits()),
        ValueRef::Text(bytes) => {
            write!(form, "t{}:", bytes.len()).and_then(|()| form.write_all(bytes))
        }
        ValueRef::Blob(bytes) => {
            write!(form, "b{}:", bytes.len()).and_then(|()| form.write_all(bytes))
        }
    };
    form.push(b';');
}

fn text(text: &str) -> Value {
    Value::Text(text.to_owned())
}

fn some_text(text: Option<&String>) -> Value {
    text.map_or(Value::Null, |text| Value::Text(text.clone()))
}

fn whole(number: Option<i64>) -> Value {
    number.map_or(Value::Null, Value::Integer)
}

/// The database keeps no NaN (it would come back as empty) and no minus on zero; so they are gone before the sum is made.
fn real(number: Option<f64>) -> Value {
    match number {
        Some(number) if !number.is_nan() => Value::Real(if number == 0.0 { 0.0 } else { number }),
        _ => Value::Null,
    }
}

fn raw_values(raw: &Raw, values: &mut Vec<Value>) {
    values.push(text(&raw.marking));
    values.push(some_text(raw.family.as_ref()));
    values.push(text(&raw.switch));
    let cells = [
        &raw.dial,
        &raw.dark_from,
        &raw.dark_to,
        &raw.lamp,
        &raw.temperature,
        &raw.heated_hours,
        &raw.leakage,
        &raw.leakage_voltage,
        &raw.looks,
        &raw.note,
    ];
    values.extend(cells.into_iter().map(|cell| some_text(cell.as_ref())));
    values.push(whole(raw.chosen_reading.map(i64::from)));
    values.push(text(&raw.typed));
}

fn outcome_values(outcome: &Outcome, values: &mut Vec<Value>) {
    values.extend([outcome.nominal_pf, outcome.low_pf, outcome.high_pf].map(real));
    values.push(some_text(outcome.limits_from.as_ref()));
    let numbers = [
        outcome.capacitance_pf,
        outcome.uncertainty_pf,
        outcome.own_uncertainty_pf,
        outcome.loss,
        outcome.loss_below,
        outcome.deviation_percent,
        outcome.probability_inside,
        outcome.probability_flat,
        outcome.reading_probability,
    ];
    values.extend(numbers.map(real));
    values.push(text(&outcome.finding));
    values.push(some_text(outcome.compartment.as_ref()));
    values.push(text(&outcome.remark));
}

/// Walks along the columns of a row.
struct Cells<'a, 'b> {
    row: &'a rusqlite::Row<'b>,
    next: usize,
}

impl Cells<'_, '_> {
    fn take<T: FromSql>(&mut self) -> rusqlite::Result<T> {
        let index = self.next;
        self.next += 1;
        self.row.get(index)
    }
}

fn take_raw(cells: &mut Cells<'_, '_>) -> rusqlite::Result<Raw> {
    Ok(Raw {
        marking: cells.take()?,
        family: cells.take()?,
        switch: cells.take()?,
        dial: cells.take()?,
        dark_from: cells.take()?,
        dark_to: cells.take()?,
        lamp: cells.take()?,
        temperature: cells.take()?,
        heated_hours: cells.take()?,
        leakage: cells.take()?,
        leakage_voltage: cells.take()?,
        looks: cells.take()?,
        note: cells.take()?,
        chosen_reading: cells.take()?,
        typed: cells.take()?,
    })
}

fn take_outcome(cells: &mut Cells<'_, '_>) -> rusqlite::Result<Outcome> {
    Ok(Outcome {
        nominal_pf: cells.take()?,
        low_pf: cells.take()?,
        high_pf: cells.take()?,
        limits_from: cells.take()?,
        capacitance_pf: cells.take()?,
        uncertainty_pf: cells.take()?,
        own_uncertainty_pf: cells.take()?,
        loss: cells.take()?,
        loss_below: cells.take()?,
        deviation_percent: cells.take()?,
        probability_inside: cells.take()?,
        probability_flat: cells.take()?,
        reading_probability: cells.take()?,
        finding: cells.take()?,
        compartment: cells.take()?,
        remark: cells.take()?,
    })
}
