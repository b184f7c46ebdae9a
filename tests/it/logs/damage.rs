//! Flipped, cut and zeroed files.

use std::fs;
use std::path::Path;
use std::sync::OnceLock;

use nulltray::app::Entry;
use nulltray::log::{Damage, Log, Which, salvage};
use proptest::prelude::*;

use super::{Folder, PROFILE, open, part, says, time};

/// Puts a log of some pages there, and tells what it holds: 120 entries in three lots, some replaced and taken back. Made once.
fn sample(path: &Path) -> Vec<Entry> {
    static SAMPLE: OnceLock<(Vec<u8>, Vec<Entry>)> = OnceLock::new();
    let (bytes, entries) = SAMPLE.get_or_init(|| {
        let folder = Folder::new();
        let mut log = open(&folder.log());
        fill(&mut log, 120);
        (
            fs::read(folder.log()).unwrap(),
            log.entries(None, Which::All).unwrap(),
        )
    });
    fs::write(path, bytes).unwrap();
    entries.clone()
}

/// Appends many entries of varied length.
fn fill(log: &mut Log, n: usize) {
    let mut last = None;
    for index in 0..n {
        let lot = ["cable hut", "valley station", "upper station"][index * 3 / n];
        let mut record = part(
            lot,
            &format!("marking {index}"),
            ["A1", "B2", "no place"].get(index % 4).copied(),
        );
        record.raw.note =
            (index % 5 == 0).then(|| "leads cut short, from the line amplifier ".repeat(index % 7));
        if index % 11 == 5 {
            record.replaces = last;
        }
        last = Some(
            log.append(
                &record,
                time(u32::try_from(index).unwrap()),
                &PROFILE.repeat(1 + index / 40),
            )
            .unwrap(),
        );
        if index % 10 == 3 {
            log.void_last(lot, time(1)).unwrap();
            last = None;
        }
        if index % 20 == 13 {
            last = log.redo(lot, time(2)).unwrap().map(|entry| entry.id);
        }
    }
}

/// Whatever was done to the file: what is read without an error is right, and what is salvaged is right.
#[track_caller]
fn never_silently_wrong(path: &Path, whole: &[Entry], what: &str) -> bool {
    let opened = Log::open_read_only(path);
    let read = opened.and_then(|log| {
        let counts = log.counts()?;
        let entries = log.entries(None, Which::All)?;
        let last = log.last("valley station", 20, Which::Live)?;
        Ok((counts, entries, last))
    });
    if let Ok((counts, entries, last)) = &read {
        assert!(entries == whole, "{what}: read otherwise than written");
        let live: u64 = counts.all().iter().map(|count| count.live).sum();
        assert_eq!(
            live,
            whole.iter().filter(|entry| entry.voided.is_none()).count() as u64,
            "{what}: counts"
        );
        assert!(
            last.iter().all(|entry| whole.contains(entry)),
            "{what}: last"
        );
    }
    if let Ok(salvaged) = salvage(path) {
        let missing = salvaged
            .damages
            .iter()
            .any(|damage| !matches!(damage, Damage::Profile(_)));
        for entry in &salvaged.entries {
            let written = whole
                .iter()
                .find(|written| written.id == entry.id)
                .unwrap_or_else(|| panic!("{what}: entry {} made up", entry.id));
            assert_eq!(
                entry.record, written.record,
                "{what}: salvaged otherwise than written"
            );
            assert_eq!(
                entry.time, written.time,
                "{what}: salvaged otherwise than written"
            );
            assert!(
                entry.voided == written.voided || missing,
                "{what}: {} stands otherwise, and nothing is said",
                entry.id
            );
        }
        assert!(
            salvaged.entries.len() == whole.len() || missing,
            "{what}: entries are missing, and nothing is said"
        );
    }
    read.is_ok()
}

#[test]
fn a_flipped_byte_is_never_silently_wrong() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let bytes = fs::read(folder.log()).unwrap();
    let flipped = folder.0.join("flipped.db");
    let pages = bytes.len() / 4096;
    let mut positions: Vec<usize> = (0..pages)
        .flat_map(|page| [0, 1, 3, 4, 5, 8, 9, 11].map(|offset| page * 4096 + offset))
        .collect();
    positions.extend([
        16, 18, 19, 20, 24, 28, 31, 40, 47, 56, 59, 60, 63, 68, 71, 92, 95, 100, 103,
    ]);
    positions.extend((0..bytes.len()).step_by(1499));
    let mut n_noticed = 0;
    for position in &positions {
        let mut bytes = bytes.clone();
        bytes[*position] ^= 0x5a;
        fs::write(&flipped, &bytes).unwrap();
        n_noticed += usize::from(!never_silently_wrong(
            &flipped,
            &whole,
            &format!("byte {position} flipped"),
        ));
    }
    assert!(
        n_noticed > positions.len() / 3,
        "only {n_noticed} of {} noticed: the flips miss the data",
        positions.len()
    );
}

#[test]
fn a_cut_log_is_said_and_salvaged() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let bytes = fs::read(folder.log()).unwrap();
    let cut = folder.0.join("cut.db");
    let mut n_salvaged = 0;
    for length in (1..bytes.len()).step_by(bytes.len() / 40) {
        fs::write(&cut, &bytes[..length]).unwrap();
        assert!(
            !never_silently_wrong(&cut, &whole, &format!("cut at {length}")),
            "a cut at {length} is said"
        );
        n_salvaged = salvage(&cut).map_or(n_salvaged, |salvaged| {
            n_salvaged.max(salvaged.entries.len())
        });
    }
    assert!(
        n_salvaged > whole.len() * 9 / 10,
        "only {n_salvaged} of {} salvaged",
        whole.len()
    );
}

#[test]
fn a_zeroed_page_costs_its_entries_only() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let bytes = fs::read(folder.log()).unwrap();
    let zeroed = folder.0.join("zeroed.db");
    let mut best = 0;
    for page in 0..bytes.len() / 4096 {
        let mut bytes = bytes.clone();
        bytes[page * 4096..(page + 1) * 4096].fill(0);
        fs::write(&zeroed, &bytes).unwrap();
        never_silently_wrong(&zeroed, &whole, &format!("page {} zeroed", page + 1));
        if let Ok(salvaged) = salvage(&zeroed) {
            best = best.max(if salvaged.damages.is_empty() {
                0
            } else {
                salvaged.entries.len()
            });
        }
    }
    assert!(
        best > whole.len() * 3 / 4,
        "at most {best} of {} salvaged",
        whole.len()
    );
}

#[test]
fn salvage_of_a_sound_log_is_the_log() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let before = fs::read(folder.log()).unwrap();
    let salvaged = salvage(&folder.log()).unwrap();
    assert_eq!(salvaged.entries, whole);
    assert_eq!(salvaged.damages, []);
    assert_eq!(
        salvaged
            .profiles
            .iter()
            .map(|(_, text)| text.len())
            .collect::<Vec<_>>(),
        [1, 2, 3].map(|n| n * PROFILE.len())
    );
    assert_eq!(fs::read(folder.log()).unwrap(), before);
}

#[test]
fn verify_tells_what_is_wrong() {
    let folder = Folder::new();
    sample(&folder.log());
    let log = open(&folder.log());
    assert_eq!(log.verify().unwrap(), []);
    let mut bytes = fs::read(folder.log()).unwrap();
    let at = bytes
        .windows(10)
        .position(|window| window == b"marking 77")
        .unwrap();
    bytes[at] = b'M';
    let path = folder.0.join("wrong.db");
    fs::write(&path, &bytes).unwrap();
    let log = Log::open_read_only(&path).unwrap();
    let damages = log.verify().unwrap();
    assert!(
        damages.iter().any(|damage| damage
            .to_string()
            .contains("is not as it was written (check sum)")),
        "{damages:?}"
    );
    says(
        log.entries(None, Which::All),
        "is not as it was written (check sum)",
    );
    says(log.entries(None, Which::All), "cannot read");
}

/// Leaves a copy of the log as a program leaves it that is stopped while it changes pages: half written, with its journal.
fn stop_in_the_middle(from: &Path, to: &Path) {
    let journal = |path: &Path| path.with_extension("db-journal");
    let other = rusqlite::Connection::open(from).unwrap();
    other
        .execute_batch(
            "PRAGMA cache_size = 1; BEGIN IMMEDIATE; UPDATE tally SET live = 0, sum = 0;",
        )
        .unwrap();
    for _ in 0..200 {
        other
            .execute(
                "INSERT INTO entry (kind, lot, time, voids, marking, sum) VALUES ('void', 'x', 'never', 1, ?1, 0)",
                ["x".repeat(900)],
            )
            .unwrap();
    }
    fs::copy(from, to).unwrap();
    fs::copy(journal(from), journal(to)).unwrap();
    other.execute_batch("ROLLBACK").unwrap();
}

#[test]
fn a_log_left_in_the_middle_of_a_write_is_set_right() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let half = folder.0.join("half.db");
    stop_in_the_middle(&folder.log(), &half);
    assert_ne!(
        fs::metadata(&half).unwrap().len(),
        fs::metadata(folder.log()).unwrap().len(),
        "it was half written"
    );
    says(Log::open_read_only(&half), "left in the middle of a write");
    assert_eq!(salvage(&half).unwrap().entries, whole);
    says(Log::open_read_only(&half), "left in the middle of a write");
    let log = open(&half);
    assert_eq!(log.entries(None, Which::All).unwrap(), whole);
    assert_eq!(log.verify().unwrap(), []);
}

#[test]
fn a_backup_of_a_damaged_log_says_which_is_damaged() {
    let folder = Folder::new();
    sample(&folder.log());
    let log = open(&folder.log());
    let mut bytes = fs::read(folder.log()).unwrap();
    let page = bytes.len() - 4096;
    bytes[page..page + 200].fill(0xff);
    let path = folder.0.join("wrong.db");
    fs::write(&path, bytes).unwrap();
    drop(log);
    match Log::open_read_only(&path).and_then(|log| log.backup(&folder.0.join("copy.db"))) {
        Err(failure) => assert!(
            failure.message.contains("wrong.db: it is damaged"),
            "{failure}"
        ),
        Ok(()) => panic!("the damage is not noticed"),
    }
    assert!(!folder.0.join("copy.db").exists());
}

#[test]
fn a_log_without_its_beginning_is_salvaged() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let mut bytes = fs::read(folder.log()).unwrap();
    bytes[..4096].fill(0);
    fs::write(folder.log(), bytes).unwrap();
    says(Log::open(&folder.log()), "it is not a log of nulltray");
    let salvaged = salvage(&folder.log()).unwrap();
    assert_eq!(salvaged.entries, whole);
    let damages: Vec<_> = salvaged.damages.iter().map(Damage::to_string).collect();
    assert_eq!(
        damages,
        ["its end cannot be read; later entries than these may be lost"]
    );
}

#[test]
fn long_texts_are_salvaged() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    for length in (3_000..6_000).step_by(100).chain([8_000, 12_288, 100_000]) {
        let mut record = part("long", "224J", None);
        record.raw.note = Some("µ".repeat(length / 2));
        log.append(&record, time(0), &PROFILE.repeat(200)).unwrap();
    }
    assert_eq!(
        salvage(&folder.log()).unwrap().entries,
        log.entries(None, Which::All).unwrap()
    );
    assert_eq!(salvage(&folder.log()).unwrap().damages, []);
}

#[test]
fn many_flipped_bytes_are_never_silently_wrong() {
    let folder = Folder::new();
    let whole = sample(&folder.log());
    let bytes = fs::read(folder.log()).unwrap();
    let path = folder.0.join("flipped.db");
    let whole_length = bytes.len();
    let flips = proptest::collection::vec((any::<proptest::sample::Index>(), any::<u8>()), 1..40);
    let config = ProptestConfig {
        cases: 32,
        failure_persistence: None,
        ..ProptestConfig::default()
    };
    proptest::test_runner::TestRunner::new(config)
        .run(&flips, |flips| {
            let mut bytes = bytes.clone();
            for (index, value) in flips {
                bytes[index.index(whole_length)] = value;
            }
            fs::write(&path, &bytes).unwrap();
            never_silently_wrong(&path, &whole, "many bytes changed");
            Ok(())
        })
        .unwrap();
}
