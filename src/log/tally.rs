//! How many entries stand, without reading them.

use std::cell::RefCell;
use std::collections::BTreeMap;
use std::sync::Arc;

use rusqlite::types::{Value, ValueRef};
use rusqlite::{Connection, OptionalExtension, params};

use super::Log;
use super::failure::{Act, Fault};
use super::row::{self, kind_name, kind_of};
use crate::app::{LogFailure, Record, RecordId, RecordKind};

/// How many entries of a lot, a kind, a finding and a compartment stand.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Count {
    /// The lot.
    pub lot: String,
    /// What was measured.
    pub kind: RecordKind,
    /// inside, outside, undecided, dead or unread.
    pub finding: String,
    /// The place, `no place`, or `None` when no tray was in force.
    pub compartment: Option<String>,
    /// Entries that stand; zero if all were taken back.
    pub live: u64,
    /// Rows of the log that are accounted for here, those that take back and bring back included.
    rows: i64,
    first: i64,
    last: i64,
}

/// A lot, as the list of lots shows it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Lot {
    /// Its name.
    pub name: String,
    /// Its first entry.
    pub first: RecordId,
    /// The last thing that happened in it.
    pub last: RecordId,
    /// Parts that stand.
    pub n_parts: u64,
}

/// All counts of a log at one moment.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Counts(Arc<[Count]>);

impl Counts {
    /// Returns every count, sorted by lot.
    pub fn all(&self) -> &[Count] {
        &self.0
    }

    /// Returns the counts of one lot.
    pub fn of_lot<'a>(&'a self, lot: &str) -> impl Iterator<Item = &'a Count> + use<'a> {
        let start = self.0.partition_point(|count| count.lot.as_str() < lot);
        let end = self.0.partition_point(|count| count.lot.as_str() <= lot);
        self.0.iter().take(end).skip(start)
    }

    /// Returns the parts that stand in each compartment, over all lots; `None` for those sorted with no tray in force. No zeros.
    pub fn by_compartment(&self) -> BTreeMap<Option<&str>, u64> {
        let mut parts = BTreeMap::new();
        for count in self
            .0
            .iter()
            .filter(|count| count.kind == RecordKind::Part && count.live > 0)
        {
            *parts.entry(count.compartment.as_deref()).or_default() += count.live;
        }
        parts
    }

    /// Returns the lots, the one in which something happened last at the end.
    pub fn lots(&self) -> Vec<Lot> {
        let mut lots: Vec<Lot> = Vec::new();
        for count in self.0.iter() {
            let n_parts = if count.kind == RecordKind::Part {
                count.live
            } else {
                0
            };
            match lots.last_mut().filter(|lot| lot.name == count.lot) {
                Some(lot) => {
                    lot.first = lot.first.min(RecordId(count.first));
                    lot.last = lot.last.max(RecordId(count.last));
                    lot.n_parts += n_parts;
                }
                None => lots.push(Lot {
                    name: count.lot.clone(),
                    first: RecordId(count.first),
                    last: RecordId(count.last),
                    n_parts,
                }),
            }
        }
        lots.sort_by_key(|lot| lot.last);
        lots
    }

    /// Returns the numbers of the first and last row of a lot, `None` if it has none.
    pub(super) fn span(&self, lot: &str) -> Option<(i64, i64)> {
        let first = self.of_lot(lot).map(|count| count.first).min()?;
        let last = self.of_lot(lot).map(|count| count.last).max()?;
        Some((first, last))
    }

    /// Returns the number of the last row of the log, 0 if it has none.
    pub(super) fn last(&self) -> i64 {
        self.0.iter().map(|count| count.last).max().unwrap_or(0)
    }
}

impl Log {
    /// Returns how many entries stand, by lot, kind, finding and compartment.
    ///
    /// Takes time by the number of lots, not of entries.
    ///
    /// # Errors
    /// If the log cannot be read, or the counts do not account for each row of it.
    pub fn counts(&self) -> Result<Counts, LogFailure> {
        let counts = || {
            let transaction = self.connection.unchecked_transaction()?;
            read_anew(&transaction, &self.counts)
        };
        counts().map_err(|fault: Fault| fault.said(Act::Read, &self.path))
    }
}

/// Returns all counts, read again only if something happened in the log since: every change is a new row.
pub(super) fn read_anew(connection: &Connection, known: &RefCell<Counts>) -> Result<Counts, Fault> {
    let mut known = known.borrow_mut();
    if known.last() != last_row(connection)? {
        *known = read(connection)?;
    }
    Ok(known.clone())
}

/// Returns the number of the last row, 0 if there is none.
pub(super) fn last_row(connection: &Connection) -> Result<i64, Fault> {
    let mut statement = connection.prepare_cached("SELECT coalesce(max(id), 0) FROM entry")?;
    Ok(statement.query_row([], |row| row.get(0))?)
}

/// Reads all counts and checks that they account for every row.
pub(super) fn read(connection: &Connection) -> Result<Counts, Fault> {
    let mut statement =
        connection.prepare_cached("SELECT lot, kind, finding, place, live, rows, first, last, sum FROM tally ORDER BY lot, kind, finding, place")?;
    let mut rows = statement.query([])?;
    let mut counts = Vec::new();
    while let Some(row) = rows.next()? {
        counts.push(count(row)?);
    }
    let counts = Counts(counts.into());
    let last = last_row(connection)?;
    let accounted: i64 = counts
        .0
        .iter()
        .map(|count| count.rows)
        .fold(0, i64::saturating_add);
    if accounted == last && counts.last() == last {
        Ok(counts)
    } else {
        Err(Fault::Damaged(format!(
            "its counts account for {accounted} rows up to number {}, its last is {last}",
            counts.last()
        )))
    }
}

/// The counts that should be there, for entries told one by one.
#[derive(Debug, Default)]
pub(super) struct Recount(BTreeMap<Key, (i64, i64, i64, i64)>);

type Key = (String, &'static str, String, String);

impl Recount {
    /// Counts a row: that of the record itself, or one that takes it back or brings it back (`live` then 0).
    pub(super) fn add(&mut self, record: &Record, id: i64, live: i64) {
        let key = (
            record.lot.clone(),
            kind_name(record.kind),
            record.outcome.finding.clone(),
            place(record),
        );
        let count = self.0.entry(key).or_insert((0, 0, id, id));
        *count = (
            count.0 + live,
            count.1 + 1,
            count.2.min(id),
            count.3.max(id),
        );
    }

    /// Tells whether these are the counts that were read.
    pub(super) fn agrees_with(&self, counts: &Counts) -> bool {
        let read = counts.0.iter().map(|count| {
            let place = place_of(count.compartment.as_deref());
            (
                (
                    count.lot.as_str(),
                    kind_name(count.kind),
                    count.finding.as_str(),
                    place,
                ),
                (
                    i64::try_from(count.live).ok(),
                    count.rows,
                    count.first,
                    count.last,
                ),
            )
        });
        let own = self
            .0
            .iter()
            .map(|((lot, kind, finding, place), (live, rows, first, last))| {
                (
                    (lot.as_str(), *kind, finding.as_str(), place.clone()),
                    (Some(*live), *rows, *first, *last),
                )
            });
        read.eq(own)
    }
}

/// What a change does to the count of an entry.
#[derive(Clone, Copy, Debug)]
pub(super) enum Change {
    /// The row of that number belongs to it and makes it stand.
    Stands(i64),
    /// The row of that number belongs to it and makes it no longer stand.
    Falls(i64),
    /// It stands again because of another row.
    Returns,
    /// It no longer stands because of another row.
    Yields,
}

/// Changes the count of the entry; inside a transaction of the caller.
pub(super) fn change(
    connection: &Connection,
    record: &Record,
    change: Change,
) -> Result<(), Fault> {
    let kind = kind_name(record.kind);
    let (finding, place) = (&record.outcome.finding, place(record));
    let old = connection
        .prepare_cached(
            "SELECT lot, kind, finding, place, live, rows, first, last, sum FROM tally WHERE lot = ?1 AND kind = ?2 AND finding = ?3 AND place = ?4",
        )?
        .query_row(params![record.lot, kind, finding, place], |row| Ok(count(row)))
        .optional()?
        .transpose()?;
    let (live, id) = match change {
        Change::Stands(id) => (1, Some(id)),
        Change::Falls(id) => (-1, Some(id)),
        Change::Returns => (1, None),
        Change::Yields => (-1, None),
    };
    let (old_live, old_rows, first, last) = match (&old, id) {
        (Some(old), _) => (
            i64::try_from(old.live).unwrap_or(i64::MAX),
            old.rows,
            old.first,
            old.last,
        ),
        (None, Some(id)) => (0, 0, id, id - 1),
        (None, None) => return Err(disagree()),
    };
    let new_live = old_live.saturating_add(live);
    if new_live < 0 || id.is_some_and(|id| id <= last) {
        return Err(disagree());
    }
    let (rows, last) = (
        old_rows.saturating_add(i64::from(id.is_some())),
        id.unwrap_or(last),
    );
    let numbers = [new_live, rows, first, last];
    let keys = [record.lot.as_str(), kind, finding, &place];
    let sum = row::sum(
        keys.iter()
            .map(|key| ValueRef::Text(key.as_bytes()))
            .chain(numbers.iter().map(|number| ValueRef::Integer(*number))),
    );
    let values = keys
        .iter()
        .map(|key| Value::Text((*key).to_owned()))
        .chain(numbers.iter().map(|number| Value::Integer(*number)));
    connection
        .prepare_cached(
            "INSERT INTO tally (lot, kind, finding, place, live, rows, first, last, sum) VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9)
            ON CONFLICT DO UPDATE SET live = excluded.live, rows = excluded.rows, first = excluded.first, last = excluded.last, sum = excluded.sum",
        )?
        .execute(rusqlite::params_from_iter(values.chain([Value::Integer(sum)])))?;
    Ok(())
}

fn disagree() -> Fault {
    Fault::Damaged("its counts do not agree with its entries".to_owned())
}

fn count(row: &rusqlite::Row<'_>) -> Result<Count, Fault> {
    if row.get::<_, i64>(8)? != row::sum_of(row, 8)? {
        return Err(Fault::Damaged(
            "a count in it is not as it was written (check sum)".to_owned(),
        ));
    }
    let kind: String = row.get(1)?;
    let place: String = row.get(3)?;
    Ok(Count {
        lot: row.get(0)?,
        kind: kind_of(&kind).ok_or_else(disagree)?,
        finding: row.get(2)?,
        compartment: place.strip_prefix(':').map(str::to_owned),
        live: u64::try_from(row.get::<_, i64>(4)?).map_err(|_| disagree())?,
        rows: row.get(5)?,
        first: row.get(6)?,
        last: row.get(7)?,
    })
}

fn place(record: &Record) -> String {
    place_of(record.outcome.compartment.as_deref())
}

fn place_of(compartment: Option<&str>) -> String {
    compartment.map_or_else(String::new, |compartment| format!(":{compartment}"))
}
