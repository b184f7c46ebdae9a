//! Reading entries and profiles.

use std::collections::HashMap;
use std::ops::ControlFlow;

use chrono::{DateTime, FixedOffset};
use rusqlite::types::ValueRef;
use rusqlite::{Connection, OptionalExtension};

use super::Log;
use super::failure::{Act, Fault};
use super::row::{self, COLUMNS, Deed, Row};
use super::standing::Standing;
use super::tally::{self, Counts};
use crate::app::{Entry, LogFailure, RecordId, RecordKind};

/// Which entries are wanted.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Which {
    /// Those that stand.
    Live,
    /// Those that were taken back or replaced, too.
    All,
}

impl Log {
    /// Returns the entries of a lot, or of the whole log, in the order of writing.
    ///
    /// # Errors
    /// If the log cannot be read, or anything in that range is not as it was written.
    pub fn entries(&self, lot: Option<&str>, which: Which) -> Result<Vec<Entry>, LogFailure> {
        let read = || {
            let transaction = self.connection.unchecked_transaction()?;
            let counts = tally::read_anew(&transaction, &self.counts)?;
            let (entries, n_live) = collect(&transaction, &counts, lot, which, usize::MAX)?;
            let counted: u64 = counts
                .all()
                .iter()
                .filter(|count| lot.is_none_or(|lot| count.lot == lot))
                .map(|count| count.live)
                .sum();
            if n_live == counted {
                Ok(entries)
            } else {
                Err(Fault::Damaged(format!(
                    "{n_live} entries stand, {counted} were counted"
                )))
            }
        };
        read().map_err(|fault| fault.said(Act::Read, &self.path))
    }

    /// Returns the last `n` entries of a lot, in the order of writing.
    ///
    /// # Errors
    /// As for [`Log::entries`].
    pub fn last(&self, lot: &str, n: usize, which: Which) -> Result<Vec<Entry>, LogFailure> {
        let read = || {
            let transaction = self.connection.unchecked_transaction()?;
            let counts = tally::read_anew(&transaction, &self.counts)?;
            Ok(collect(&transaction, &counts, Some(lot), which, n)?.0)
        };
        read().map_err(|fault: Fault| fault.said(Act::Read, &self.path))
    }

    /// Returns all readings of check parts and open terminals, of all lots, voided ones too, in the order of writing.
    ///
    /// # Errors
    /// As for [`Log::entries`].
    pub fn checks(&self) -> Result<Vec<Entry>, LogFailure> {
        let read = || {
            let transaction = self.connection.unchecked_transaction()?;
            let counts = tally::read_anew(&transaction, &self.counts)?;
            let is_check = |count: &&tally::Count| count.kind != RecordKind::Part;
            let of_checks = counts.all().iter().filter(is_check);
            let (n_kinds, n_counted) =
                of_checks.fold((0, 0), |(n, live), count| (n + 1, live + count.live));
            // Parts are never read: of all rows only those that void a check or are one matter here.
            let entries = if n_kinds == 0 {
                Vec::new()
            } else {
                checks(&transaction)?
            };
            let n_live = entries.iter().filter(|e| e.voided.is_none()).count();
            if usize::try_from(n_counted).is_ok_and(|counted| counted == n_live) {
                Ok(entries)
            } else {
                Err(Fault::Damaged(format!(
                    "{n_live} check readings stand, {n_counted} were counted"
                )))
            }
        };
        read().map_err(|fault| fault.said(Act::Read, &self.path))
    }

    /// Returns one entry, `None` if that number is no entry.
    ///
    /// # Errors
    /// As for [`Log::entries`].
    pub fn entry(&self, id: RecordId) -> Result<Option<Entry>, LogFailure> {
        let read = || {
            let transaction = self.connection.unchecked_transaction()?;
            match find(&transaction, id.0)? {
                Some((row, voided)) => Profiles::default().entry(&transaction, row, voided),
                None => Ok(None),
            }
        };
        read().map_err(|fault| fault.said(Act::Read, &self.path))
    }

    /// Returns the text of the profile with that hash (eight lower-case hexadecimal digits); of several, the one first used last.
    ///
    /// # Errors
    /// If the log cannot be read, or the text is not as it was written.
    pub fn profile_text(&self, hash: &str) -> Result<Option<String>, LogFailure> {
        let Ok(number) = u32::from_str_radix(hash, 16) else {
            return Ok(None);
        };
        let read = || {
            let mut statement = self.connection.prepare(
                "SELECT id, hash, text, sum FROM profile WHERE hash = ?1 ORDER BY id DESC LIMIT 1",
            )?;
            let found = statement
                .query_row([i64::from(number)], |row| Ok(profile(row)))
                .optional()?
                .transpose()?;
            Ok(found.map(|(_, _, text)| text))
        };
        read().map_err(|fault: Fault| fault.said(Act::Read, &self.path))
    }
}

/// A row, and when it was voided.
pub(super) type Seen = (Row, Option<DateTime<FixedOffset>>);

/// Visits the rows from `last` down to `first`, each with the time at which it was voided, until told to stop.
///
/// Numbers have no gap, so a row that is gone is noticed.
pub(super) fn newest_first(
    connection: &Connection,
    (first, last): (i64, i64),
    mut visit: impl FnMut(Row, Option<DateTime<FixedOffset>>) -> Result<ControlFlow<()>, Fault>,
) -> Result<(), Fault> {
    let mut statement = connection.prepare_cached(&format!(
        "SELECT {COLUMNS} FROM entry WHERE id BETWEEN ?1 AND ?2 ORDER BY id DESC"
    ))?;
    let mut rows = statement.query([first, last])?;
    let mut standing = Standing::default();
    let mut expected = last;
    while let Some(row) = rows.next()? {
        let row = Row::read(row)?;
        if row.id != expected {
            return Err(Fault::Damaged(format!("entry {expected} is missing")));
        }
        expected -= 1;
        let voided = standing.pass(&row);
        if visit(row, voided)?.is_break() {
            return Ok(());
        }
    }
    if expected < first {
        Ok(())
    } else {
        Err(Fault::Damaged(format!("entry {expected} is missing")))
    }
}

fn checks(connection: &Connection) -> Result<Vec<Entry>, Fault> {
    let mut statement = connection.prepare_cached(&format!(
        "SELECT {COLUMNS} FROM entry WHERE kind <> 'part' ORDER BY id DESC"
    ))?;
    let mut rows = statement.query([])?;
    let (mut standing, mut profiles) = (Standing::default(), Profiles::default());
    let mut entries = Vec::new();
    while let Some(row) = rows.next()? {
        let row = Row::read(row)?;
        let voided = standing.pass(&row);
        entries.extend(profiles.entry(connection, row, voided)?);
    }
    entries.reverse();
    Ok(entries)
}

/// Returns the row of that number and when it was voided; `None` if there is no such row.
pub(super) fn find(connection: &Connection, id: i64) -> Result<Option<Seen>, Fault> {
    let counts = tally::read(connection)?;
    if id < 1 || id > counts.last() {
        return Ok(None);
    }
    let lot: String = connection.query_row("SELECT lot FROM entry WHERE id = ?1", [id], |row| {
        row.get(0)
    })?;
    let Some((_, last)) = counts.span(&lot).filter(|(_, last)| id <= *last) else {
        return Err(Fault::Damaged(format!("entry {id} is in no lot")));
    };
    let mut found = None;
    newest_first(connection, (id, last), |row, voided| {
        found = Some((row, voided));
        Ok(ControlFlow::Continue(()))
    })?;
    Ok(found)
}

/// Reads one row that must be there.
pub(super) fn read_row(connection: &Connection, id: i64) -> Result<Row, Fault> {
    let mut statement =
        connection.prepare_cached(&format!("SELECT {COLUMNS} FROM entry WHERE id = ?1"))?;
    let row = statement
        .query_row([id], |row| Ok(Row::read(row)))
        .optional()?;
    row.unwrap_or_else(|| Err(Fault::Damaged(format!("entry {id} is missing"))))
}

fn collect(
    connection: &Connection,
    counts: &Counts,
    lot: Option<&str>,
    which: Which,
    n: usize,
) -> Result<(Vec<Entry>, u64), Fault> {
    let span = match lot {
        Some(lot) => counts.span(lot),
        None => Some((1, counts.last())),
    };
    let (mut entries, mut n_live, mut profiles) = (Vec::new(), 0, Profiles::default());
    if let Some(span) = span
        && n > 0
    {
        newest_first(connection, span, |row, voided| {
            if lot.is_none_or(|lot| row.lot == lot)
                && (which == Which::All || voided.is_none())
                && let Some(entry) = profiles.entry(connection, row, voided)?
            {
                n_live += u64::from(voided.is_none());
                entries.push(entry);
            }
            Ok(if entries.len() < n {
                ControlFlow::Continue(())
            } else {
                ControlFlow::Break(())
            })
        })?;
    }
    entries.reverse();
    Ok((entries, n_live))
}

/// The hashes of the profiles met so far.
#[derive(Debug, Default)]
pub(super) struct Profiles(HashMap<i64, String>);

impl Profiles {
    /// Makes an entry of the row, if it is one.
    pub(super) fn entry(
        &mut self,
        connection: &Connection,
        row: Row,
        voided: Option<DateTime<FixedOffset>>,
    ) -> Result<Option<Entry>, Fault> {
        let Deed::Entry { record, profile } = row.deed else {
            return Ok(None);
        };
        let hash = self.hash(connection, profile)?;
        Ok(Some(Entry {
            id: RecordId(row.id),
            time: row.time,
            voided,
            profile: hash,
            record: *record,
        }))
    }

    fn hash(&mut self, connection: &Connection, id: i64) -> Result<String, Fault> {
        if let Some(hash) = self.0.get(&id) {
            return Ok(hash.clone());
        }
        let mut statement =
            connection.prepare_cached("SELECT id, hash, text, sum FROM profile WHERE id = ?1")?;
        let found = statement
            .query_row([id], |row| Ok(profile(row)))
            .optional()?
            .transpose()?;
        let Some((_, hash, _)) = found else {
            return Err(Fault::Damaged(format!("profile {id} is missing")));
        };
        let hash = hash_words(hash);
        self.0.insert(id, hash.clone());
        Ok(hash)
    }
}

/// Reads number, hash and text of a profile, selected with its sum.
pub(super) fn profile(row: &rusqlite::Row<'_>) -> Result<(i64, u32, String), Fault> {
    let id: i64 = row.get(0)?;
    let text: String = row.get(2)?;
    let hash = crc32fast::hash(text.as_bytes());
    if row.get::<_, i64>(1)? != i64::from(hash)
        || row.get::<_, i64>(3)? != profile_sum(id, hash, &text)
    {
        return Err(Fault::Damaged(format!(
            "profile {id} is not as it was written (check sum)"
        )));
    }
    Ok((id, hash, text))
}

/// The check sum of a profile.
pub(super) fn profile_sum(id: i64, hash: u32, text: &str) -> i64 {
    row::sum(
        [
            ValueRef::Integer(id),
            ValueRef::Integer(i64::from(hash)),
            ValueRef::Text(text.as_bytes()),
        ]
        .into_iter(),
    )
}

/// The hash as it is shown: eight lower-case hexadecimal digits.
pub(super) fn hash_words(hash: u32) -> String {
    format!("{hash:08x}")
}
