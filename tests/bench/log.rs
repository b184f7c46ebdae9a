//! The log: what an entry costs beside the least a disk allows, and how soon the bench is there with many entries.

use std::fs::{self, File};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

use chrono::{DateTime, FixedOffset};
use divan::{Bencher, black_box};
use nulltray::app::{Look, MeterFrom, Outcome, Raw, Record, RecordKind, Setup, Size};
use nulltray::log::{Log, Which, salvage};
use nulltray::meter::Meter;
use nulltray::screen;
use nulltray::terminal::{Bell, Options};
use nulltray::tray::Tray;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

const PROFILE: &str = include_str!("../../Cargo.toml");
const SIZES: [usize; 3] = [1_000, 10_000, 100_000];
/// Entries of a lot: an afternoon at the bench.
const LOT_SIZE: usize = 200;

fn main() {
    divan::main();
    let _ = fs::remove_dir_all(folder());
}

fn folder() -> PathBuf {
    let folder =
        Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("bench-log-{}", std::process::id()));
    fs::create_dir_all(&folder).expect("the folder can be made");
    folder
}

fn time() -> DateTime<FixedOffset> {
    DateTime::parse_from_rfc3339("2026-05-03T10:00:00+02:00").expect("a time")
}

fn record(index: usize) -> Record {
    let finding = ["inside", "inside", "outside", "undecided"][index % 4];
    Record {
        lot: format!("Line amplifier {}", index / LOT_SIZE),
        kind: RecordKind::Part,
        raw: Raw {
            marking: "224J 2A".to_owned(),
            switch: "B".to_owned(),
            dial: Some("46.7/46.5/46.8".to_owned()),
            typed: "46,7/46,5/46,8".to_owned(),
            ..Raw::default()
        },
        outcome: Outcome {
            nominal_pf: Some(220_000.0),
            low_pf: Some(209_000.0),
            high_pf: Some(231_000.0),
            limits_from: Some("marked".to_owned()),
            capacitance_pf: Some(218_431.517 + index as f64),
            uncertainty_pf: Some(1_204.833),
            own_uncertainty_pf: Some(633.271),
            loss_below: Some(0.0312),
            deviation_percent: Some(-0.713),
            probability_inside: Some(0.999_31),
            probability_flat: Some(0.999_02),
            reading_probability: Some(0.971),
            finding: finding.to_owned(),
            compartment: Some(format!(
                "{}{}",
                ["A", "B", "C", "D"][index % 4],
                index % 6 + 1
            )),
            remark: "within its limits; loss and leakage were not tested".to_owned(),
            ..Outcome::default()
        },
        replaces: None,
    }
}

/// The path of a log with so many entries, made once; written without waiting for the disk.
fn filled(n: usize) -> &'static Path {
    static PATHS: [OnceLock<PathBuf>; 3] = [const { OnceLock::new() }; 3];
    let index = SIZES
        .iter()
        .position(|size| *size == n)
        .expect("one of the sizes");
    PATHS[index].get_or_init(|| {
        let path = folder().join(format!("{n}.db"));
        let (mut log, _) = Log::open(&path).expect("a new log");
        log.append_all((0..n).map(record), time(), PROFILE)
            .expect("written");
        path
    })
}

fn line(index: usize) -> String {
    format!("{:?}\n", record(index)).chars().take(514).collect()
}

#[divan::bench(sample_count = 300)]
fn append_bare_and_sync(bencher: Bencher) {
    let path = folder().join("bare");
    let mut file = File::options()
        .create(true)
        .append(true)
        .open(&path)
        .expect("a file");
    let mut index = 0;
    bencher.bench_local(|| {
        file.write_all(line(index).as_bytes()).expect("written");
        file.sync_data().expect("synced");
        index += 1;
    });
    assert_eq!(
        fs::metadata(&path).expect("there").len() % line(0).len() as u64,
        0
    );
}

#[divan::bench(sample_count = 300)]
fn append_to_log(bencher: Bencher) {
    let (mut log, _) = Log::open(&folder().join("append.db")).expect("a log");
    let mut index = log.entries(None, Which::All).expect("readable").len();
    bencher.bench_local(|| {
        let id = log
            .append(&record(index), time(), PROFILE)
            .expect("appended");
        index += 1;
        assert_eq!(usize::try_from(id.0).ok(), Some(index));
    });
    assert_eq!(
        log.entries(None, Which::Live).expect("readable").len(),
        index
    );
}

/// What the bench does before its first frame: open, the last 20 entries of a lot, the counts of all compartments and of the lot.
#[divan::bench(args = SIZES, sample_count = 50)]
fn start(bencher: Bencher, n: usize) {
    let path = filled(n);
    let lot = record(n - 1).lot;
    let run = || {
        let (log, _) = Log::open(path).expect("a log");
        let last = log.last(&lot, 20, Which::Live).expect("readable");
        let counts = log.counts().expect("readable");
        let in_compartments: u64 = counts.by_compartment().values().sum();
        let in_lot: u64 = counts.of_lot(&lot).map(|count| count.live).sum();
        (last.len(), in_compartments, in_lot)
    };
    assert_eq!(run(), (20, n as u64, LOT_SIZE as u64));
    bencher.bench_local(|| black_box(run()));
}

/// All that happens between the start and the first frame: profile and tray read, log opened, lot and counts read, the
/// frame drawn at 120 by 40. (The tables of `data/` are parsed once a process, before the timing starts.)
#[divan::bench(args = SIZES, sample_count = 50)]
fn start_to_first_frame(bencher: Bencher, n: usize) {
    let path = filled(n);
    let lot = record(n - 1).lot;
    let run = || {
        let profile_text = include_str!("../../data/example-meter.toml");
        let (meter, _) = Meter::read(profile_text).expect("the example profile");
        let (tray, _) =
            Tray::read(include_str!("../../data/example-tray.toml")).expect("the example tray");
        let setup = Setup {
            meter,
            profile_text: profile_text.to_owned(),
            tray: Some(tray),
        };
        let (log, _) = Log::open(path).expect("a log");
        let options = Options {
            setup,
            meter_from: MeterFrom::Example,
            profile_place: None,
            log,
            lot: lot.clone(),
            look: Look::default(),
            bell: Bell::Silent,
        };
        let (state, _) = options
            .begin(Size {
                width: 120,
                height: 40,
            })
            .expect("readable");
        let mut buffer = Buffer::empty(Rect::new(0, 0, 120, 40));
        screen::draw(&state, buffer.area, &mut buffer);
        (state.lot.entries.len(), buffer.content.len())
    };
    assert_eq!(run(), (LOT_SIZE, 120 * 40));
    bencher.bench_local(|| black_box(run()));
}

/// The list of a whole log in memory, to find something in it.
#[divan::bench(args = SIZES, sample_count = 5)]
fn all_live_entries(bencher: Bencher, n: usize) {
    let (log, _) = Log::open(filled(n)).expect("a log");
    let run = || log.entries(None, Which::Live).expect("readable").len();
    assert_eq!(run(), n);
    bencher.bench_local(|| black_box(run()));
}

/// What Ctrl-Z and Ctrl-Y cost together; two entries on disk.
#[divan::bench(args = SIZES, sample_count = 50)]
fn undo_and_redo(bencher: Bencher, n: usize) {
    let (mut log, _) = Log::open(filled(n)).expect("a log");
    let lot = record(n - 1).lot;
    bencher.bench_local(|| {
        let undone = log
            .void_last(&lot, time())
            .expect("undone")
            .expect("one stands");
        let redone = log
            .redo(&lot, time())
            .expect("redone")
            .expect("one was undone");
        assert_eq!(undone.id, redone.id);
    });
}

/// The check of a whole log.
#[divan::bench(args = SIZES, sample_count = 3)]
fn verify(bencher: Bencher, n: usize) {
    let (log, _) = Log::open(filled(n)).expect("a log");
    bencher.bench_local(|| assert_eq!(log.verify().expect("readable"), []));
}

/// Reading what is left of the first half of a log.
#[divan::bench(args = SIZES, sample_count = 2)]
fn salvage_half(bencher: Bencher, n: usize) {
    let path = folder().join(format!("half of {n}.db"));
    let whole = fs::read(filled(n)).expect("readable");
    fs::write(&path, whole.get(..whole.len() / 2).expect("half")).expect("written");
    let run = || salvage(&path).expect("salvaged").entries.len();
    assert!(
        (n * 2 / 5..n * 3 / 5).contains(&run()),
        "about half of them"
    );
    bencher.bench_local(|| black_box(run()));
}
