//! The log: every field comes back, nothing confirmed is lost, and whatever is wrong with a file is said.

mod damage;
mod fields;
mod files;
mod undo;
mod writers;

use std::fs;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicU32, Ordering};

use chrono::{DateTime, FixedOffset};
use nulltray::app::{Entry, LogFailure, Outcome, Raw, Record, RecordId, RecordKind};
use nulltray::log::{Log, Start, Which, salvage};

const PROFILE: &str = "name = \"Valley station meter\"\n";

const LOT: &str = "Amplifier 3, upper station";

/// A new folder for one test, removed at its end.
struct Folder(PathBuf);

impl Folder {
    fn new() -> Self {
        static NEXT: AtomicU32 = AtomicU32::new(0);
        let name = format!(
            "logs-{}-{}",
            std::process::id(),
            NEXT.fetch_add(1, Ordering::Relaxed)
        );
        let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
        fs::create_dir_all(&folder).unwrap();
        Self(folder)
    }

    fn log(&self) -> PathBuf {
        self.0.join("parts.db")
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

fn time(minute: u32) -> DateTime<FixedOffset> {
    DateTime::parse_from_rfc3339(&format!(
        "2026-05-03T{:02}:{:02}:00+02:00",
        8 + minute / 60,
        minute % 60
    ))
    .unwrap()
}

fn part(lot: &str, marking: &str, compartment: Option<&str>) -> Record {
    Record {
        lot: lot.to_owned(),
        kind: RecordKind::Part,
        raw: Raw {
            marking: marking.to_owned(),
            switch: "B".to_owned(),
            dial: Some("46.7".to_owned()),
            typed: "46,7".to_owned(),
            ..Raw::default()
        },
        outcome: Outcome {
            nominal_pf: Some(220_000.0),
            capacitance_pf: Some(218_431.5),
            finding: "inside".to_owned(),
            compartment: compartment.map(str::to_owned),
            remark: "within its limits".to_owned(),
            ..Outcome::default()
        },
        replaces: None,
    }
}

fn replacing(id: RecordId, record: Record) -> Record {
    Record {
        replaces: Some(id),
        ..record
    }
}

fn open(path: &Path) -> Log {
    Log::open(path).unwrap().0
}

/// Appends parts of these markings to the lot.
fn append(log: &mut Log, lot: &str, markings: &[&str]) -> Vec<RecordId> {
    markings
        .iter()
        .map(|marking| {
            log.append(&part(lot, marking, Some("A1")), time(0), PROFILE)
                .unwrap()
        })
        .collect()
}

/// The markings that stand in the lot, in the order of writing; all reading functions and the counts must agree on them.
#[track_caller]
fn stands(log: &Log, lot: &str) -> String {
    let live = log.entries(Some(lot), Which::Live).unwrap();
    let all = log.entries(Some(lot), Which::All).unwrap();
    assert_eq!(
        all.iter()
            .filter(|entry| entry.voided.is_none())
            .cloned()
            .collect::<Vec<_>>(),
        live,
        "all and live differ"
    );
    assert_eq!(
        log.last(lot, 1000, Which::All).unwrap(),
        all,
        "last and entries differ"
    );
    let counted: u64 = log
        .counts()
        .unwrap()
        .of_lot(lot)
        .map(|count| count.live)
        .sum();
    assert_eq!(counted, live.len() as u64, "counts and entries differ");
    assert_eq!(log.verify().unwrap(), []);
    live.iter()
        .map(|entry| entry.record.raw.marking.as_str())
        .collect::<Vec<_>>()
        .join(" ")
}

fn marking(entry: Option<Entry>) -> Option<String> {
    entry.map(|entry| entry.record.raw.marking)
}

/// The message must hold the words, and hint and message must both be there.
#[track_caller]
fn says<T: std::fmt::Debug>(result: Result<T, LogFailure>, words: &str) {
    let failure = result.expect_err("should have failed");
    assert!(
        failure.message.contains(words),
        "{failure} does not say {words:?}"
    );
    assert!(!failure.hint.is_empty(), "no hint: {failure}");
    assert!(
        !failure.to_string().contains('\n'),
        "more than a line: {failure:?}"
    );
}

#[test]
fn a_new_log_is_made_with_its_folder() {
    let folder = Folder::new();
    let path = folder.0.join("salvage/2026/parts.db");
    let (log, start) = Log::open(&path).unwrap();
    assert_eq!(start, Start::Created);
    assert_eq!(log.entries(None, Which::All).unwrap(), []);
    assert_eq!(log.verify().unwrap(), []);
    assert_eq!(log.path(), path);
    drop(log);
    let (mut log, start) = Log::open(&path).unwrap();
    assert_eq!(start, Start::Existing);
    assert_eq!(log.void_last(LOT, time(0)).unwrap(), None);
    assert_eq!(log.redo(LOT, time(0)).unwrap(), None);
    assert_eq!(
        fs::read_dir(path.parent().unwrap()).unwrap().count(),
        1,
        "nothing but the log remains"
    );
    assert_eq!(salvage(&path).unwrap().damages, []);
}

#[test]
fn an_entry_comes_back_with_time_and_profile() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    let record = part(LOT, "224J", Some("no place"));
    let id = log.append(&record, time(5), PROFILE).unwrap();
    log.append(
        &Record {
            kind: RecordKind::Zero,
            ..record.clone()
        },
        time(6),
        "name = \"other\"\n",
    )
    .unwrap();
    log.append(
        &Record {
            kind: RecordKind::Check,
            ..record.clone()
        },
        time(7),
        PROFILE,
    )
    .unwrap();
    let entries = Log::open_read_only(&folder.log())
        .unwrap()
        .entries(None, Which::All)
        .unwrap();
    let hash = format!("{:08x}", crc32fast::hash(PROFILE.as_bytes()));
    assert_eq!(
        entries.first().unwrap(),
        &Entry {
            id,
            time: time(5),
            voided: None,
            profile: hash.clone(),
            record
        }
    );
    assert_eq!(
        entries.first().unwrap().time.to_rfc3339(),
        "2026-05-03T08:05:00+02:00"
    );
    assert_eq!(
        entries
            .iter()
            .map(|entry| entry.record.kind)
            .collect::<Vec<_>>(),
        [RecordKind::Part, RecordKind::Zero, RecordKind::Check]
    );
    assert_eq!(log.profile_text(&hash).unwrap().as_deref(), Some(PROFILE));
    assert_eq!(log.profile_text("00000000").unwrap(), None);
    assert_eq!(log.profile_text("µ").unwrap(), None);
    assert_eq!(
        log.entry(RecordId(2)).unwrap().unwrap().record.kind,
        RecordKind::Zero
    );
    assert_eq!(log.entry(RecordId(4)).unwrap(), None);
    assert_eq!(log.entry(RecordId(-4)).unwrap(), None);
}

#[test]
fn the_last_entries_and_the_counts_are_of_the_lot() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    for round in 0..10 {
        append(&mut log, ["one", "two"][round % 2], &[&round.to_string()]);
    }
    log.append(
        &Record {
            kind: RecordKind::Zero,
            ..part("one", "", None)
        },
        time(0),
        PROFILE,
    )
    .unwrap();
    log.append(&part("three", "", Some("no place")), time(0), PROFILE)
        .unwrap();
    log.void_last("two", time(1)).unwrap();
    let markings = |lot, n, which| {
        log.last(lot, n, which)
            .unwrap()
            .into_iter()
            .map(|entry| entry.record.raw.marking)
            .collect::<Vec<_>>()
            .join(" ")
    };
    assert_eq!(markings("two", 3, Which::All), "5 7 9");
    assert_eq!(markings("two", 3, Which::Live), "3 5 7");
    assert_eq!(markings("two", 0, Which::All), "");
    assert_eq!(markings("no such lot", 3, Which::All), "");
    let counts = log.counts().unwrap();
    assert_eq!(
        counts.by_compartment().into_iter().collect::<Vec<_>>(),
        [(Some("A1"), 9), (Some("no place"), 1)]
    );
    assert_eq!(
        counts
            .lots()
            .iter()
            .map(|lot| format!("{} {}", lot.name, lot.n_parts))
            .collect::<Vec<_>>(),
        ["one 5", "three 1", "two 4"]
    );
    assert_eq!(
        counts
            .of_lot("one")
            .map(|count| (count.kind, count.live))
            .collect::<Vec<_>>(),
        [(RecordKind::Part, 5), (RecordKind::Zero, 1)]
    );
}

#[test]
fn entries_are_never_changed_or_erased() {
    let folder = Folder::new();
    append(&mut open(&folder.log()), LOT, &["a", "b"]);
    let before = fs::read(folder.log()).unwrap();
    let other = rusqlite::Connection::open(folder.log()).unwrap();
    for statement in [
        "UPDATE entry SET finding = 'dead'",
        "DELETE FROM entry",
        "UPDATE profile SET text = ''",
        "DELETE FROM profile",
    ] {
        assert!(other.execute(statement, []).is_err(), "{statement}");
    }
    assert_eq!(fs::read(folder.log()).unwrap(), before);
}

#[test]
fn a_backup_is_whole_and_replaces_nothing() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    append(&mut log, LOT, &["a", "b", "c"]);
    log.void_last(LOT, time(1)).unwrap();
    let copy = folder.0.join("copy 'of' it.db");
    log.backup(&copy).unwrap();
    append(&mut log, LOT, &["d"]);
    assert_eq!(stands(&open(&copy), LOT), "a b");
    says(log.backup(&copy), "a file of that name is there already");
    says(
        log.backup(&folder.log()),
        "a file of that name is there already",
    );
    says(
        log.backup(&folder.0.join("no such folder/copy.db")),
        "cannot back up to",
    );
    Log::open_read_only(&folder.log())
        .unwrap()
        .backup(&folder.0.join("second.db"))
        .unwrap();
    assert_eq!(
        fs::read_dir(&folder.0).unwrap().count(),
        3,
        "nothing unfinished is left"
    );
}

#[test]
fn a_log_of_version_1_can_be_read() {
    let folder = Folder::new();
    let stored = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/log-v1.db");
    fs::copy(&stored, folder.log()).unwrap();
    let mut log = open(&folder.log());
    assert_eq!(log.verify().unwrap(), []);
    let lines: Vec<_> = log
        .entries(None, Which::All)
        .unwrap()
        .iter()
        .map(|entry| {
            let Record {
                lot,
                kind,
                raw,
                outcome,
                ..
            } = &entry.record;
            let voided = entry
                .voided
                .map_or("stands".to_owned(), |time| time.to_rfc3339());
            format!(
                "{} {} {voided} {} {lot} {kind:?} {} {} {:?}",
                entry.id,
                entry.time.to_rfc3339(),
                entry.profile,
                raw.marking,
                outcome.finding,
                outcome.compartment
            )
        })
        .collect();
    expect_test::expect_file![Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/log-v1.txt")]
        .assert_eq(&(lines.join("\n") + "\n"));
    append(&mut log, "upper station", &["goes on"]);
    assert_eq!(log.verify().unwrap(), []);
}
