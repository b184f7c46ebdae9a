//! The tables of a log, as they are written into the file. A change here is a new version.

use rusqlite::Connection;

use super::failure::Fault;

/// Marks a database file as a log of this program: "null" in ASCII.
pub(super) const APPLICATION_ID: i32 = 0x6e75_6c6c;

/// The version written and read here.
pub(super) const VERSION: i32 = 1;

/// Name and definition of everything in the file, in the order of making. The file keeps these texts to the letter.
const PARTS: [(&str, &str); 7] = [
    (
        "profile",
        "CREATE TABLE profile (
    id INTEGER PRIMARY KEY,
    hash INTEGER NOT NULL,
    text TEXT NOT NULL,
    sum INTEGER NOT NULL
) STRICT",
    ),
    (
        "entry",
        "CREATE TABLE entry (
    id INTEGER PRIMARY KEY,
    kind TEXT NOT NULL CHECK (kind IN ('part', 'check', 'zero', 'void', 'redo')),
    voids INTEGER REFERENCES entry (id),
    profile INTEGER REFERENCES profile (id),
    lot TEXT NOT NULL,
    time TEXT NOT NULL,
    marking TEXT,
    family TEXT,
    switch TEXT,
    dial TEXT,
    dark_from TEXT,
    dark_to TEXT,
    lamp TEXT,
    temperature TEXT,
    heated_hours TEXT,
    leakage TEXT,
    leakage_voltage TEXT,
    looks TEXT,
    note TEXT,
    chosen_reading INTEGER,
    typed TEXT,
    nominal_pf REAL,
    low_pf REAL,
    high_pf REAL,
    limits_from TEXT,
    capacitance_pf REAL,
    uncertainty_pf REAL,
    own_uncertainty_pf REAL,
    loss REAL,
    loss_below REAL,
    deviation_percent REAL,
    probability_inside REAL,
    probability_flat REAL,
    reading_probability REAL,
    finding TEXT,
    compartment TEXT,
    remark TEXT,
    sum INTEGER NOT NULL,
    CHECK (voids < id),
    CHECK (CASE WHEN kind IN ('void', 'redo') THEN voids IS NOT NULL AND profile IS NULL
        ELSE profile IS NOT NULL AND marking IS NOT NULL AND switch IS NOT NULL AND typed IS NOT NULL
            AND finding IS NOT NULL AND remark IS NOT NULL END)
) STRICT",
    ),
    (
        // `place` is empty where no tray was in force, else a colon and the compartment: a key of such a table cannot be null.
        "tally",
        "CREATE TABLE tally (
    lot TEXT NOT NULL,
    kind TEXT NOT NULL,
    finding TEXT NOT NULL,
    place TEXT NOT NULL,
    live INTEGER NOT NULL,
    rows INTEGER NOT NULL,
    first INTEGER NOT NULL,
    last INTEGER NOT NULL,
    sum INTEGER NOT NULL,
    PRIMARY KEY (lot, kind, finding, place)
) STRICT, WITHOUT ROWID",
    ),
    (
        "entry_kept",
        "CREATE TRIGGER entry_kept BEFORE UPDATE ON entry BEGIN SELECT RAISE(ABORT, 'entries are never changed'); END",
    ),
    (
        "entry_stays",
        "CREATE TRIGGER entry_stays BEFORE DELETE ON entry BEGIN SELECT RAISE(ABORT, 'entries are never erased'); END",
    ),
    (
        "profile_kept",
        "CREATE TRIGGER profile_kept BEFORE UPDATE ON profile BEGIN SELECT RAISE(ABORT, 'profiles are never changed'); END",
    ),
    (
        "profile_stays",
        "CREATE TRIGGER profile_stays BEFORE DELETE ON profile BEGIN SELECT RAISE(ABORT, 'profiles are never erased'); END",
    ),
];

/// What the head of a database file says.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Head {
    pub(super) application_id: i32,
    pub(super) version: i32,
    pub(super) n_parts: i64,
}

impl Head {
    pub(super) fn read(connection: &Connection) -> rusqlite::Result<Self> {
        Ok(Self {
            application_id: connection
                .pragma_query_value(None, "application_id", |row| row.get(0))?,
            version: connection.pragma_query_value(None, "user_version", |row| row.get(0))?,
            n_parts: connection
                .query_row("SELECT count(*) FROM sqlite_schema", [], |row| row.get(0))?,
        })
    }

    /// Whether this is a database with nothing in it, or no database yet.
    pub(super) fn is_blank(self) -> bool {
        self == Self {
            application_id: 0,
            version: 0,
            n_parts: 0,
        }
    }
}

/// Writes the tables and the head into a blank file; inside a transaction of the caller.
pub(super) fn create(connection: &Connection) -> rusqlite::Result<()> {
    for (_, definition) in PARTS {
        connection.execute_batch(definition)?;
    }
    connection.pragma_update(None, "application_id", APPLICATION_ID)?;
    connection.pragma_update(None, "user_version", VERSION)
}

/// Checks that the tables and triggers are those that were written: the rest of the program relies on each of them.
pub(super) fn check(connection: &Connection) -> Result<(), Fault> {
    let mut statement = connection
        .prepare("SELECT name, sql FROM sqlite_schema WHERE sql IS NOT NULL ORDER BY rowid")?;
    let found = statement
        .query_map([], |row| {
            Ok((row.get::<_, String>(0)?, row.get::<_, String>(1)?))
        })?
        .collect::<rusqlite::Result<Vec<_>>>()?;
    for (name, definition) in PARTS {
        if !found
            .iter()
            .any(|(found_name, sql)| found_name == name && sql == definition)
        {
            return Err(Fault::Damaged(format!(
                "the definition of `{name}` in it is not the one that was written"
            )));
        }
    }
    match found
        .iter()
        .find(|(name, _)| PARTS.iter().all(|(known, _)| known != name))
    {
        Some((name, _)) => Err(Fault::Damaged(format!(
            "it holds `{name}`, which no log has"
        ))),
        None => Ok(()),
    }
}
