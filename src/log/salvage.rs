//! Reading what is left of a damaged log, from a copy.
//!
//! The engine reads nothing of a file that is shorter than its head says, and nothing behind a lost page of the tree: half a file may give no
//! entry at all. So the rows are gathered page by page, whatever leads to them, put into a log in memory, and read from there as ever.

use std::collections::BTreeMap;
use std::fs::{self, DirBuilder, File};
use std::io;
use std::os::unix::fs::DirBuilderExt;
use std::path::{Path, PathBuf};

use rusqlite::types::Value;
use rusqlite::{Connection, OpenFlags, params_from_iter};

use super::failure::{Act, Fault};
use super::open::look_at;
use super::pages::Pages;
use super::read::{hash_words, profile, read_row};
use super::row::{COLUMNS, Deed, N_COLUMNS, Row};
use super::schema;
use super::standing::Standing;
use super::verify::{Damage, said_shortly};
use crate::app::{Entry, LogFailure, RecordId};

/// What stands in [`Entry::profile`] where the profile cannot be read.
const LOST: &str = "--------";

/// What could be read of a log.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Salvage {
    /// The entries whose check sum is right, in the order of writing. Their profile is `--------` where it could not be read.
    pub entries: Vec<Entry>,
    /// The texts of the profiles, each with its hash.
    pub profiles: Vec<(String, String)>,
    /// What could not be read. Where rows are missing, an entry may seem to stand that was taken back.
    pub damages: Vec<Damage>,
}

/// Reads what can be read of a log that may be damaged, cut or left in the middle of a write. Works on a copy in the folder for temporary
/// files; the log itself is only read.
///
/// # Errors
/// If the file cannot be read or copied, or nothing of a log is found in it.
pub fn salvage(path: &Path) -> Result<Salvage, LogFailure> {
    attempt(path).map_err(|fault| fault.said(Act::Salvage, path))
}

fn attempt(path: &Path) -> Result<Salvage, Fault> {
    match look_at(path)? {
        None => return Err(io::Error::from(io::ErrorKind::NotFound).into()),
        Some(0) => {
            return Err(Fault::Refused {
                what: "the file is empty".to_owned(),
                hint: "use a backup",
            });
        }
        Some(_) => {}
    }
    let copy = Copy::of(path)?;
    let last = last_of(&copy.file());
    let (memory, rows_found) = gather(&fs::read(copy.file())?)?;
    if rows_found == 0 && last != Some(0) {
        return Err(Fault::Refused {
            what: "no entry in it can be read".to_owned(),
            hint: "use a backup",
        });
    }
    let mut damages = Vec::new();
    let profiles = read_profiles(&memory, &mut damages)?;
    let rows = read_rows(&memory, last, &mut damages)?;
    let mut standing = Standing::default();
    let mut entries = Vec::new();
    for row in rows.into_values().rev() {
        let voided = standing.pass(&row);
        if let Deed::Entry { record, profile } = row.deed {
            let profile = profiles
                .get(&profile)
                .map_or_else(|| LOST.to_owned(), |(hash, _)| hash.clone());
            entries.push(Entry {
                id: RecordId(row.id),
                time: row.time,
                voided,
                profile,
                record: *record,
            });
        }
    }
    entries.reverse();
    if entries.iter().any(|entry| entry.profile == LOST) {
        damages.push(Damage::Profile(
            "the profile of some entries is missing".to_owned(),
        ));
    }
    Ok(Salvage {
        entries,
        profiles: profiles.into_values().collect(),
        damages,
    })
}

/// The number of the last row, if the engine can still tell it.
fn last_of(path: &Path) -> Option<i64> {
    let connection = Connection::open_with_flags(path, OpenFlags::SQLITE_OPEN_READ_ONLY).ok()?;
    let last = ["SELECT max(id) FROM entry", "SELECT max(last) FROM tally"].map(|query| {
        connection
            .query_row(query, [], |row| row.get::<_, Option<i64>>(0))
            .ok()
            .map(Option::unwrap_or_default)
    });
    match last {
        [Some(id), Some(counted)] if id == counted => Some(id),
        _ => None,
    }
}

/// Puts every row that looks like one of ours into a log in memory, a sound one before a damaged one of the same number; tells how many.
fn gather(bytes: &[u8]) -> Result<(Connection, usize), Fault> {
    let memory = Connection::open_in_memory()?;
    memory.pragma_update(None, "foreign_keys", "OFF")?;
    schema::create(&memory)?;
    let places = vec!["?"; N_COLUMNS].join(", ");
    let mut n_rows = 0;
    {
        let transaction = memory.unchecked_transaction()?;
        let mut entry = transaction.prepare(&format!(
            "INSERT OR REPLACE INTO entry ({COLUMNS}) VALUES ({places})"
        ))?;
        let mut profile = transaction
            .prepare("INSERT OR IGNORE INTO profile (id, hash, text, sum) VALUES (?, ?, ?, ?)")?;
        Pages::new(bytes).rows(|id, mut values| {
            // The number of a row stands beside its columns; the first one, which is the same, is left empty.
            if let Some(first) = values.first_mut() {
                *first = Value::Integer(id);
            }
            // What the tables do not take is damaged, and missed by its number.
            if values.len() == N_COLUMNS && read_row(&transaction, id).is_err() {
                n_rows += usize::from(entry.execute(params_from_iter(values)).is_ok());
            } else if values.len() == 4 {
                let _ = profile.execute(params_from_iter(values));
            }
        });
        drop((entry, profile));
        transaction.commit()?;
    }
    Ok((memory, n_rows))
}

fn read_profiles(
    connection: &Connection,
    damages: &mut Vec<Damage>,
) -> Result<BTreeMap<i64, (String, String)>, Fault> {
    let mut found = BTreeMap::new();
    let mut statement =
        connection.prepare("SELECT id, hash, text, sum FROM profile ORDER BY id")?;
    let mut rows = statement.query([])?;
    while let Some(row) = rows.next()? {
        match profile(row) {
            Ok((id, hash, text)) => drop(found.insert(id, (hash_words(hash), text))),
            Err(fault) => damages.push(Damage::Profile(said_shortly(fault))),
        }
    }
    Ok(found)
}

/// Reads the sound rows and lists the others: numbers have no gap.
fn read_rows(
    connection: &Connection,
    last: Option<i64>,
    damages: &mut Vec<Damage>,
) -> Result<BTreeMap<i64, Row>, Fault> {
    let (mut found, mut expected) = (BTreeMap::new(), 1);
    let mut statement = connection.prepare(&format!(
        "SELECT {COLUMNS} FROM entry WHERE id > 0 ORDER BY id"
    ))?;
    let mut rows = statement.query([])?;
    while let Some(row) = rows.next()? {
        let id: i64 = row.get(0)?;
        match Row::read(row) {
            Ok(row) => {
                note_gap(expected, id - 1, damages);
                found.insert(id, row);
                expected = id.saturating_add(1);
            }
            // Its number may be what is damaged, so it stays in the gap.
            Err(fault) => damages.push(Damage::Entry(RecordId(id), said_shortly(fault))),
        }
    }
    match last {
        Some(last) => note_gap(expected, last, damages),
        None => damages.push(Damage::File(
            "its end cannot be read; later entries than these may be lost".to_owned(),
        )),
    }
    Ok(found)
}

fn note_gap(first: i64, last: i64, damages: &mut Vec<Damage>) {
    if first <= last {
        damages.push(Damage::Missing(RecordId(first), RecordId(last)));
    }
}

/// A copy of a log and of the journal beside it, in a folder of its own that goes away with it.
#[derive(Debug)]
struct Copy {
    folder: PathBuf,
}

impl Copy {
    fn of(path: &Path) -> Result<Self, Fault> {
        let copy = Self {
            folder: new_folder()?,
        };
        io::copy(&mut File::open(path)?, &mut File::create_new(copy.file())?)?;
        let mut name = path.file_name().unwrap_or_default().to_owned();
        name.push("-journal");
        let journal = copy.folder.join("log.db-journal");
        match fs::copy(path.with_file_name(name), &journal) {
            Ok(_) => copy.settle(&journal),
            Err(error) if error.kind() == io::ErrorKind::NotFound => {}
            Err(error) => return Err(error.into()),
        }
        Ok(copy)
    }

    /// Lets the engine undo what was left half written, before anything else is done to the file; what it cannot use goes.
    fn settle(&self, journal: &Path) {
        let read = Connection::open_with_flags(self.file(), OpenFlags::SQLITE_OPEN_READ_WRITE)
            .and_then(|connection| {
                connection.query_row("SELECT count(*) FROM sqlite_schema", [], |row| {
                    row.get::<_, i64>(0)
                })
            });
        // A file damaged so far that this fails is read as it is; the journal is gone already if it was used.
        drop(read);
        let _ = fs::remove_file(journal);
    }

    fn file(&self) -> PathBuf {
        self.folder.join("log.db")
    }
}

impl Drop for Copy {
    fn drop(&mut self) {
        // What cannot be removed stays in the folder for temporary files.
        let _ = fs::remove_dir_all(&self.folder);
    }
}

fn new_folder() -> io::Result<PathBuf> {
    for number in 0.. {
        let folder =
            std::env::temp_dir().join(format!("nulltray-salvage-{}-{number}", std::process::id()));
        match DirBuilder::new().mode(0o700).create(&folder) {
            Err(error) if error.kind() == io::ErrorKind::AlreadyExists => {}
            Err(error) => return Err(error),
            Ok(()) => return Ok(folder),
        }
    }
    Err(io::ErrorKind::AlreadyExists.into())
}
