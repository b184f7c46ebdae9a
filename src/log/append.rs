//! Writing: each change is one transaction, on disk before it is confirmed.

use chrono::{DateTime, FixedOffset};
use rusqlite::{Connection, Transaction, TransactionBehavior, params, params_from_iter};

use super::Log;
use super::failure::{Act, Fault};
use super::row::{COLUMNS, Deed, N_COLUMNS, Row, writable};
use super::tally::{self, Change};
use super::{read, undo};
use crate::app::{LogFailure, Record, RecordId};

impl Log {
    /// Writes an entry and returns its number once it is on disk.
    ///
    /// `profile_text` is the whole text of the profile in force; it is stored once. An entry that replaces another must be of the same lot,
    /// and that other must stand. A NaN is stored as empty, an offset in whole minutes.
    ///
    /// # Errors
    /// If the entry is not certain to be on disk: disk full, log moved or removed, another program in the way, file or folder not to be
    /// written, disk error, damage.
    pub fn append(
        &mut self,
        record: &Record,
        time: DateTime<FixedOffset>,
        profile_text: &str,
    ) -> Result<RecordId, LogFailure> {
        self.change(Act::Append, |transaction| {
            let profile = profile_id(transaction, profile_text)?;
            append(transaction, record, writable(time)?, profile)
        })
    }

    /// Writes entries in one go, all or none, and returns their numbers once they are on disk: for a lot that is judged again.
    ///
    /// # Errors
    /// As for [`Log::append`]; then none was written.
    pub fn append_all(
        &mut self,
        records: impl IntoIterator<Item = Record>,
        time: DateTime<FixedOffset>,
        profile_text: &str,
    ) -> Result<Vec<RecordId>, LogFailure> {
        self.change(Act::Append, |transaction| {
            let (time, profile) = (writable(time)?, profile_id(transaction, profile_text)?);
            records
                .into_iter()
                .map(|record| append(transaction, &record, time, profile))
                .collect()
        })
    }

    /// Does the work in one transaction and returns when it is on disk and the log is still where it was.
    pub(super) fn change<T>(
        &mut self,
        act: Act,
        work: impl FnOnce(&Transaction<'_>) -> Result<T, Fault>,
    ) -> Result<T, LogFailure> {
        let Self {
            connection,
            path,
            identity,
            ..
        } = self;
        let run = || {
            if !identity.still_at(path) {
                return Err(Fault::Moved { written: false });
            }
            let transaction =
                connection.transaction_with_behavior(TransactionBehavior::Immediate)?;
            let done = work(&transaction)?;
            transaction.commit()?;
            if identity.still_at(path) {
                Ok(done)
            } else {
                Err(Fault::Moved { written: true })
            }
        };
        let result = match run() {
            Err(Fault::Engine(_)) if !identity.still_at(path) => {
                Err(Fault::Moved { written: false })
            }
            result => result,
        };
        result.map_err(|fault| fault.said(act, path))
    }
}

fn append(
    connection: &Connection,
    record: &Record,
    time: DateTime<FixedOffset>,
    profile: i64,
) -> Result<RecordId, Fault> {
    let replaced = record
        .replaces
        .map(|id| undo::replaceable(connection, id.0, record))
        .transpose()?;
    let id = next_id(connection)?;
    let deed = Deed::Entry {
        record: Box::new(record.clone()),
        profile,
    };
    insert(
        connection,
        &Row {
            id,
            lot: record.lot.clone(),
            time,
            deed,
        },
    )?;
    tally::change(connection, record, Change::Stands(id))?;
    if let Some(replaced) = replaced {
        tally::change(connection, &replaced, Change::Yields)?;
    }
    Ok(RecordId(id))
}

/// Returns the number of the next row.
pub(super) fn next_id(connection: &Connection) -> Result<i64, Fault> {
    let last = tally::last_row(connection)?;
    last.checked_add(1)
        .filter(|id| *id > 0)
        .ok_or_else(|| Fault::Damaged(format!("the number {last} cannot be right")))
}

/// Writes a row.
pub(super) fn insert(connection: &Connection, row: &Row) -> Result<(), Fault> {
    let places = vec!["?"; N_COLUMNS].join(", ");
    let mut statement =
        connection.prepare_cached(&format!("INSERT INTO entry ({COLUMNS}) VALUES ({places})"))?;
    statement.execute(params_from_iter(row.values()))?;
    Ok(())
}

/// Returns the number of the profile with that text, storing it if it is new.
fn profile_id(connection: &Connection, text: &str) -> Result<i64, Fault> {
    let hash = crc32fast::hash(text.as_bytes());
    let mut statement =
        connection.prepare_cached("SELECT id, hash, text, sum FROM profile WHERE hash = ?1")?;
    let mut rows = statement.query([i64::from(hash)])?;
    while let Some(row) = rows.next()? {
        let (id, _, found) = read::profile(row)?;
        if found == text {
            return Ok(id);
        }
    }
    let id: i64 =
        connection.query_row("SELECT coalesce(max(id), 0) + 1 FROM profile", [], |row| {
            row.get(0)
        })?;
    connection.execute(
        "INSERT INTO profile (id, hash, text, sum) VALUES (?1, ?2, ?3, ?4)",
        params![id, hash, text, read::profile_sum(id, hash, text)],
    )?;
    Ok(id)
}

#[cfg(test)]
mod tests {
    use std::path::PathBuf;

    use super::*;
    use crate::app::{Outcome, Raw, RecordKind};
    use crate::log::Which;

    struct Folder(PathBuf);

    impl Drop for Folder {
        fn drop(&mut self) {
            let _ = std::fs::remove_dir_all(&self.0);
        }
    }

    fn record(length: usize) -> Record {
        Record {
            lot: "Line amplifier 3".to_owned(),
            kind: RecordKind::Part,
            raw: Raw {
                note: Some("x".repeat(length)),
                ..Raw::default()
            },
            outcome: Outcome::default(),
            replaces: None,
        }
    }

    /// The engine treats its own limit of pages as it treats a full disk.
    #[test]
    fn a_full_disk_costs_only_what_was_not_confirmed() {
        let folder =
            Folder(std::env::temp_dir().join(format!("nulltray-full-{}", std::process::id())));
        let time = DateTime::parse_from_rfc3339("2026-05-03T10:00:00+02:00").unwrap();
        let (mut log, _) = Log::open(&folder.0.join("parts.db")).unwrap();
        let limit = |log: &Log, pages: i64| {
            log.connection
                .pragma_update_and_check(None, "max_page_count", pages, |row| row.get::<_, i64>(0))
                .unwrap();
        };
        limit(&log, 20);
        let mut n = 0;
        let failure = loop {
            match log.append(&record(900), time, "") {
                Ok(_) => n += 1,
                Err(failure) => break failure,
            }
        };
        assert!(n > 10, "only {n} fitted");
        assert!(
            failure.message.ends_with("parts.db: disk is full"),
            "{failure}"
        );
        assert_eq!(
            failure.hint,
            "free some space, then try again; the reading is still in the prompt"
        );
        assert!(
            log.append_all([record(10), record(90_000)], time, "")
                .is_err()
        );
        assert_eq!(
            log.entries(None, Which::All).unwrap().len(),
            n,
            "all that was confirmed, and no more"
        );
        assert_eq!(log.verify().unwrap(), []);
        limit(&log, 1000);
        log.append(&record(90_000), time, "").unwrap();
        assert_eq!(
            log.entries(None, Which::All).unwrap().len(),
            n + 1,
            "the same handle goes on"
        );
    }
}
