//! Taking back and bringing back: rows that void rows.

use std::ops::ControlFlow;

use chrono::{DateTime, FixedOffset};
use rusqlite::Connection;

use super::Log;
use super::append::{insert, next_id};
use super::failure::{Act, Fault};
use super::read::{Profiles, find, newest_first, read_row};
use super::row::{Deed, Row, writable};
use super::tally::{self, Change};
use crate::app::{Entry, LogFailure, Record, RecordId};

impl Log {
    /// Takes back the last entry of the lot that stands and returns it; `None` if none does.
    ///
    /// If it had replaced another, that one stands again.
    ///
    /// # Errors
    /// As for [`Log::append`].
    pub fn void_last(
        &mut self,
        lot: &str,
        time: DateTime<FixedOffset>,
    ) -> Result<Option<Entry>, LogFailure> {
        self.change(Act::TakeBack, |transaction| {
            let Some(span) = tally::read(transaction)?.span(lot) else {
                return Ok(None);
            };
            let mut last = None;
            newest_first(transaction, span, |row, voided| {
                if row.lot == lot && voided.is_none() && matches!(row.deed, Deed::Entry { .. }) {
                    last = Some(row);
                    return Ok(ControlFlow::Break(()));
                }
                Ok(ControlFlow::Continue(()))
            })?;
            last.map_or(Ok(None), |row| take_back(transaction, row, time))
        })
    }

    /// Takes back one entry, the last or an earlier one, and returns it.
    ///
    /// # Errors
    /// As for [`Log::append`]; also if there is no such entry, or it does not stand any more.
    pub fn void(
        &mut self,
        id: RecordId,
        time: DateTime<FixedOffset>,
    ) -> Result<Option<Entry>, LogFailure> {
        self.change(Act::TakeBack, |transaction| {
            take_back(transaction, standing(transaction, id.0)?, time)
        })
    }

    /// Brings back the entry of the lot that was taken back last and returns it; `None` if there is none, or if a new entry was made in the
    /// lot since.
    ///
    /// Used again it brings back the one taken back before that, and so on.
    ///
    /// # Errors
    /// As for [`Log::append`].
    pub fn redo(
        &mut self,
        lot: &str,
        time: DateTime<FixedOffset>,
    ) -> Result<Option<Entry>, LogFailure> {
        self.change(Act::BringBack, |transaction| {
            let Some(span) = tally::read(transaction)?.span(lot) else {
                return Ok(None);
            };
            let mut undone = None;
            newest_first(transaction, span, |row, taken_back| {
                Ok(match row.deed {
                    _ if row.lot != lot => ControlFlow::Continue(()),
                    Deed::Entry { .. } => ControlFlow::Break(()),
                    Deed::Void(target) if taken_back.is_none() => {
                        undone = Some((row.id, target));
                        ControlFlow::Break(())
                    }
                    Deed::Void(_) | Deed::Redo(_) => ControlFlow::Continue(()),
                })
            })?;
            undone.map_or(Ok(None), |(void, target)| {
                bring_back(transaction, void, target, time)
            })
        })
    }
}

/// Returns the entry that the record replaces, if it may.
pub(super) fn replaceable(
    connection: &Connection,
    id: i64,
    record: &Record,
) -> Result<Record, Fault> {
    let row = standing(connection, id)?;
    match row.deed {
        Deed::Entry { record: old, .. } if old.lot == record.lot => Ok(*old),
        _ => Err(Fault::Refused {
            what: format!("entry {id} is of the lot {}, not {}", row.lot, record.lot),
            hint: "open that lot to replace it",
        }),
    }
}

/// Returns the row of an entry that stands.
fn standing(connection: &Connection, id: i64) -> Result<Row, Fault> {
    match find(connection, id)? {
        Some((
            row @ Row {
                deed: Deed::Entry { .. },
                ..
            },
            None,
        )) => Ok(row),
        Some((
            Row {
                deed: Deed::Entry { .. },
                ..
            },
            Some(voided),
        )) => Err(Fault::Refused {
            what: format!(
                "entry {id} was already taken back or replaced at {}",
                voided.to_rfc3339()
            ),
            hint: "look at the lot again; nothing was written",
        }),
        _ => Err(Fault::Refused {
            what: format!("there is no entry {id}"),
            hint: "look at the lot again; nothing was written",
        }),
    }
}

fn take_back(
    connection: &Connection,
    row: Row,
    time: DateTime<FixedOffset>,
) -> Result<Option<Entry>, Fault> {
    let time = writable(time)?;
    let id = next_id(connection)?;
    insert(
        connection,
        &Row {
            id,
            lot: row.lot.clone(),
            time,
            deed: Deed::Void(row.id),
        },
    )?;
    follow(connection, &row, Change::Falls(id), Change::Returns)?;
    Profiles::default().entry(connection, row, Some(time))
}

fn bring_back(
    connection: &Connection,
    void: i64,
    target: i64,
    time: DateTime<FixedOffset>,
) -> Result<Option<Entry>, Fault> {
    let time = writable(time)?;
    let id = next_id(connection)?;
    let row = read_row(connection, target)?;
    insert(
        connection,
        &Row {
            id,
            lot: row.lot.clone(),
            time,
            deed: Deed::Redo(void),
        },
    )?;
    follow(connection, &row, Change::Stands(id), Change::Yields)?;
    Profiles::default().entry(connection, row, None)
}

/// Changes the counts of an entry and of the one it replaces.
fn follow(connection: &Connection, row: &Row, own: Change, older: Change) -> Result<(), Fault> {
    if let Deed::Entry { record, .. } = &row.deed {
        tally::change(connection, record, own)?;
    }
    if let Some(target) = row.voids() {
        match read_row(connection, target)?.deed {
            Deed::Entry { record, .. } => tally::change(connection, &record, older)?,
            _ => {
                return Err(Fault::Damaged(format!(
                    "{target}, which {} replaces, is no entry",
                    row.id
                )));
            }
        }
    }
    Ok(())
}
