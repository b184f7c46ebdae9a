//! Looking for damage, in a log that opens.

use std::collections::{BTreeMap, HashMap, HashSet};

use rusqlite::Connection;

use super::failure::{Act, Fault};
use super::row::{COLUMNS, Deed, Row};
use super::standing::Standing;
use super::tally::{self, Recount};
use super::{Log, read};
use crate::app::{LogFailure, Record, RecordId};

/// Something in a log that is not as it was written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Damage {
    /// The structure of the file, in the words of the engine.
    File(String),
    /// One entry, or a row that takes one back: in words, with its number.
    Entry(RecordId, String),
    /// Rows of these numbers, first and last, are gone; if one took an entry back, that entry seems to stand.
    Missing(RecordId, RecordId),
    /// The text of a profile, in words.
    Profile(String),
    /// The counts do not follow from the entries.
    Counts(String),
}

impl std::fmt::Display for Damage {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Self::File(what) | Self::Profile(what) | Self::Counts(what) => f.write_str(what),
            Self::Entry(id, what) => write!(f, "entry {id}: {what}"),
            Self::Missing(first, last) if first == last => write!(f, "entry {first} is missing"),
            Self::Missing(first, last) => write!(f, "entries {first} to {last} are missing"),
        }
    }
}

impl Log {
    /// Checks the whole log and returns what is wrong with it; nothing, if all is well. Takes about a second for 100,000 entries.
    ///
    /// # Errors
    /// If the log cannot be read at all.
    pub fn verify(&self) -> Result<Vec<Damage>, LogFailure> {
        verify(&self.connection).map_err(|fault| fault.said(Act::Verify, &self.path))
    }
}

fn verify(connection: &Connection) -> Result<Vec<Damage>, Fault> {
    let transaction = connection.unchecked_transaction()?;
    let mut damages = structure(&transaction);
    if damages.is_empty() {
        let profiles = profiles(&transaction, &mut damages)?;
        let rows = rows(&transaction, &mut damages)?;
        references(&rows, &profiles, &mut damages);
        counts(&transaction, &rows, &mut damages);
    }
    Ok(damages)
}

fn structure(connection: &Connection) -> Vec<Damage> {
    let check = || {
        let mut statement = connection.prepare("PRAGMA integrity_check")?;
        let lines = statement.query_map([], |row| row.get::<_, String>(0))?;
        lines.collect::<rusqlite::Result<Vec<_>>>()
    };
    match check() {
        Ok(lines) => lines
            .into_iter()
            .filter(|line| line != "ok")
            .map(Damage::File)
            .collect(),
        Err(error) => vec![Damage::File(error.to_string())],
    }
}

fn profiles(connection: &Connection, damages: &mut Vec<Damage>) -> Result<HashSet<i64>, Fault> {
    let mut statement = connection.prepare("SELECT id, hash, text, sum FROM profile")?;
    let mut rows = statement.query([])?;
    let mut known = HashSet::new();
    while let Some(row) = rows.next()? {
        match read::profile(row) {
            Ok((id, _, _)) => drop(known.insert(id)),
            Err(fault) => damages.push(Damage::Profile(said_shortly(fault))),
        }
    }
    Ok(known)
}

fn rows(connection: &Connection, damages: &mut Vec<Damage>) -> Result<BTreeMap<i64, Row>, Fault> {
    let mut statement = connection.prepare(&format!("SELECT {COLUMNS} FROM entry ORDER BY id"))?;
    let mut rows = statement.query([])?;
    let (mut found, mut expected) = (BTreeMap::new(), 1);
    while let Some(row) = rows.next()? {
        let id: i64 = row.get(0)?;
        if id > expected {
            damages.push(Damage::Missing(RecordId(expected), RecordId(id - 1)));
        }
        expected = id.saturating_add(1);
        match Row::read(row) {
            Ok(row) => drop(found.insert(id, row)),
            Err(fault) => damages.push(Damage::Entry(RecordId(id), said_shortly(fault))),
        }
    }
    Ok(found)
}

/// Checks that each row names rows and profiles that are there, of its lot and of the right kind.
fn references(rows: &BTreeMap<i64, Row>, profiles: &HashSet<i64>, damages: &mut Vec<Damage>) {
    for row in rows.values() {
        if let Deed::Entry { profile, .. } = row.deed
            && !profiles.contains(&profile)
        {
            damages.push(Damage::Entry(
                RecordId(row.id),
                format!("its profile {profile} is missing"),
            ));
        }
        if let Some(target) = row.voids() {
            let fits = rows.get(&target).is_some_and(|found| {
                let wants_void = matches!(row.deed, Deed::Redo(_));
                found.lot == row.lot
                    && matches!(found.deed, Deed::Void(_)) == wants_void
                    && !matches!(found.deed, Deed::Redo(_))
            });
            if !fits {
                damages.push(Damage::Entry(
                    RecordId(row.id),
                    format!("{target}, which it voids, is not there or not of its kind"),
                ));
            }
        }
    }
}

/// Counts again, by another way than the counts are kept.
fn counts(connection: &Connection, rows: &BTreeMap<i64, Row>, damages: &mut Vec<Damage>) {
    let (mut standing, mut recount) = (Standing::default(), Recount::default());
    let entries: HashMap<i64, &Record> = rows
        .values()
        .filter_map(|row| record(row).map(|record| (row.id, record)))
        .collect();
    for row in rows.values().rev() {
        let live = i64::from(standing.pass(row).is_none());
        match &row.deed {
            Deed::Entry { record, .. } => recount.add(record, row.id, live),
            Deed::Void(target) => add_other(&mut recount, &entries, row.id, Some(*target)),
            Deed::Redo(void) => add_other(
                &mut recount,
                &entries,
                row.id,
                rows.get(void).and_then(Row::voids),
            ),
        }
    }
    match tally::read(connection) {
        Ok(counts) if recount.agrees_with(&counts) => {}
        Ok(_) => damages.push(Damage::Counts(
            "its counts do not agree with its entries".to_owned(),
        )),
        Err(fault) => damages.push(Damage::Counts(said_shortly(fault))),
    }
}

fn record(row: &Row) -> Option<&Record> {
    match &row.deed {
        Deed::Entry { record, .. } => Some(record),
        Deed::Void(_) | Deed::Redo(_) => None,
    }
}

fn add_other(recount: &mut Recount, entries: &HashMap<i64, &Record>, id: i64, target: Option<i64>) {
    if let Some(record) = target.and_then(|target| entries.get(&target)) {
        recount.add(record, id, 0);
    }
}

/// What is damaged, without the act and the path.
pub(super) fn said_shortly(fault: Fault) -> String {
    match fault {
        Fault::Damaged(what) => what,
        Fault::Engine(error) => error.to_string(),
        other => format!("{other:?}"),
    }
}
