//! Several handles and programs at once, and programs that are killed.

use std::io::{BufRead, BufReader, Write};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::time::Duration;

use nulltray::app::RecordId;
use nulltray::log::{Log, Start, Which};

use super::{Folder, LOT, PROFILE, append, open, part, says, stands, time};

/// A handle that waits longer than a busy disk can make it wait; who is next is left to chance.
fn patient(path: &Path) -> Log {
    let log = open(path);
    log.wait_at_most(Duration::from_secs(60)).unwrap();
    log
}

fn many_writers(n_writers: usize, n_each: usize) {
    let folder = Folder::new();
    let path = folder.log();
    let ids = std::thread::scope(|scope| {
        let writers: Vec<_> = (0..n_writers)
            .map(|writer| {
                let path = &path;
                scope.spawn(move || {
                    let mut log = patient(path);
                    let lot = format!("writer {}", writer / 2);
                    (0..n_each)
                        .map(|n| {
                            let marking = format!("{writer}/{n}");
                            let id = log
                                .append(
                                    &part(&lot, &marking, Some("A1")),
                                    time(0),
                                    &format!("profile {writer}"),
                                )
                                .unwrap();
                            if n % 10 == 9 {
                                log.void_last(&lot, time(1)).unwrap().unwrap();
                                log.redo(&lot, time(2)).unwrap();
                            }
                            (id, marking)
                        })
                        .collect::<Vec<_>>()
                })
            })
            .collect();
        writers
            .into_iter()
            .flat_map(|writer| writer.join().unwrap())
            .collect::<Vec<_>>()
    });
    let log = open(&path);
    let mut found: Vec<_> = log
        .entries(None, Which::All)
        .unwrap()
        .into_iter()
        .map(|entry| (entry.id, entry.record.raw.marking))
        .collect();
    let mut ids = ids;
    ids.sort();
    found.sort();
    assert_eq!(
        found, ids,
        "each confirmed entry is there once, under its number"
    );
    assert_eq!(log.verify().unwrap(), []);
}

#[test]
fn two_writers_at_once_lose_nothing() {
    many_writers(2, 40);
}

#[test]
fn four_writers_at_once_lose_nothing() {
    many_writers(4, 20);
}

#[test]
fn eight_first_openers_share_one_log() {
    let folder = Folder::new();
    for round in 0..25 {
        let path = folder.0.join(format!("round {round}/parts.db"));
        let barrier = std::sync::Barrier::new(8);
        let created = std::thread::scope(|scope| {
            let opener = || {
                barrier.wait();
                Log::open(&path).unwrap().1
            };
            let openers: Vec<_> = (0..8).map(|_| scope.spawn(opener)).collect();
            openers
                .into_iter()
                .map(|opener| opener.join().unwrap())
                .filter(|start| *start != Start::Existing)
                .count()
        });
        assert_eq!(created, 1, "one of them made it");
    }
}

#[test]
fn a_log_held_by_another_program_is_said() {
    let folder = Folder::new();
    let mut log = open(&folder.log());
    append(&mut log, LOT, &["a"]);
    log.wait_at_most(Duration::ZERO).unwrap();
    let other = rusqlite::Connection::open(folder.log()).unwrap();
    other.execute_batch("BEGIN IMMEDIATE").unwrap();
    says(
        log.append(&part(LOT, "b", None), time(0), PROFILE),
        "another program holds the log",
    );
    assert_eq!(
        log.entries(None, Which::All).unwrap().len(),
        1,
        "reading goes on"
    );
    other.execute_batch("ROLLBACK; BEGIN EXCLUSIVE").unwrap();
    says(
        log.entries(None, Which::All),
        "another program holds the log",
    );
    other.execute_batch("ROLLBACK").unwrap();
    append(&mut log, LOT, &["b"]);
    assert_eq!(stands(&log, LOT), "a b");
}

/// Not a test of its own: the program that the tests below start, which is this test binary once more. It appends to the log named in its
/// environment and says each number that was confirmed, until it is told to stop or killed.
#[test]
fn writing_program() {
    let (Ok(path), Ok(n)) = (
        std::env::var("NULLTRAY_TEST_LOG"),
        std::env::var("NULLTRAY_TEST_ENTRIES"),
    ) else {
        return;
    };
    let mut log = patient(Path::new(&path));
    let mut out = std::io::stdout();
    for index in 0..n.parse().unwrap() {
        let marking = format!("{}/{index}", std::process::id());
        let id = log
            .append(&part(LOT, &marking, Some("A1")), time(0), PROFILE)
            .unwrap();
        out.write_all(format!("saved {id} {marking}\n").as_bytes())
            .unwrap();
        out.flush().unwrap();
    }
}

fn start_writing(path: &Path, n: usize) -> Child {
    Command::new(std::env::current_exe().unwrap())
        .args(["--exact", "logs::writers::writing_program", "--nocapture"])
        .env("NULLTRAY_TEST_LOG", path)
        .env("NULLTRAY_TEST_ENTRIES", n.to_string())
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .unwrap()
}

/// What the program confirmed, read to the end of what it wrote; after `stop_after` confirmations it is killed.
fn confirmed(child: &mut Child, stop_after: usize) -> Vec<(RecordId, String)> {
    let lines = BufReader::new(child.stdout.take().unwrap()).lines();
    let mut found = Vec::new();
    for line in lines.map_while(Result::ok) {
        // The first one may stand behind the name of the test.
        let Some((_, saved)) = line.split_once("saved ") else {
            continue;
        };
        let Some((id, marking)) = saved.split_once(' ') else {
            continue;
        };
        found.push((RecordId(id.parse().unwrap()), marking.to_owned()));
        if found.len() == stop_after {
            child.kill().unwrap();
        }
    }
    child.wait().unwrap();
    found
}

fn in_log(path: &Path) -> Vec<(RecordId, String)> {
    let log = open(path);
    assert_eq!(log.verify().unwrap(), []);
    log.entries(None, Which::Live)
        .unwrap()
        .into_iter()
        .map(|entry| (entry.id, entry.record.raw.marking))
        .collect()
}

#[test]
fn a_killed_program_loses_nothing_it_confirmed() {
    let folder = Folder::new();
    let mut all = Vec::new();
    for round in 1..=8 {
        let found = confirmed(&mut start_writing(&folder.log(), 10_000), round * 5);
        assert!(found.len() >= round * 5, "it wrote");
        all.extend(found);
        let there = in_log(&folder.log());
        assert!(
            all.iter().all(|entry| there.contains(entry)),
            "a confirmed entry is missing after kill {round}"
        );
        assert!(
            there.len() <= all.len() + round,
            "at most one a kill is there and was not confirmed"
        );
    }
}

#[test]
fn two_programs_at_once_lose_nothing() {
    let folder = Folder::new();
    let mut programs = [
        start_writing(&folder.log(), 40),
        start_writing(&folder.log(), 40),
    ];
    let mut all: Vec<_> = programs
        .iter_mut()
        .flat_map(|program| confirmed(program, usize::MAX))
        .collect();
    all.sort();
    assert_eq!(all.len(), 80);
    assert_eq!(in_log(&folder.log()), all);
}
