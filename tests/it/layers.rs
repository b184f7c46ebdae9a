//! The assembly line as a rule: the stations are pure, and each names only those before it.

use std::fs;
use std::path::{Path, PathBuf};

/// The stations in their order. A station may use itself and those to its left.
const LINE: [&str; 8] = [
    "quantity", "tables", "marking", "meter", "finding", "tray", "app", "screen",
];
const EDGES: [&str; 3] = ["log", "terminal", "cli"];

fn sources(folder: &Path, found: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("a folder of sources") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            sources(&path, found);
        } else if path.extension().is_some_and(|e| e == "rs") {
            found.push(path);
        }
    }
}

/// The code of every line of a station, without comments and without its unit tests.
fn lines_of(station: &str) -> Vec<(String, String)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("src")
        .join(station);
    let mut files = Vec::new();
    sources(&root, &mut files);
    assert!(!files.is_empty(), "{station} has sources");
    let mut lines = Vec::new();
    for file in files {
        let text = fs::read_to_string(&file).expect("a source file");
        for (number, line) in text.lines().enumerate() {
            if line.trim() == "#[cfg(test)]" {
                break;
            }
            let code = line.split("//").next().unwrap_or_default();
            lines.push((
                format!("{}:{}", file.display(), number + 1),
                code.to_owned(),
            ));
        }
    }
    lines
}

#[test]
fn pure_stations_touch_nothing_outside() {
    const OUTSIDE: [&str; 11] = [
        "std::fs",
        "std::env",
        "std::io",
        "std::net",
        "std::time",
        "std::process",
        "std::thread",
        "crossterm",
        "rusqlite",
        "Local::now",
        "Utc::now",
    ];
    for station in LINE {
        for (place, code) in lines_of(station) {
            for outside in OUTSIDE {
                // `std::fs` must not catch `std::fsomething`; `std::time` is the only one with a longer namesake.
                assert!(
                    !code.contains(outside),
                    "{place} uses {outside}: stations are pure"
                );
            }
        }
    }
}

#[test]
fn no_station_looks_backwards() {
    for (position, station) in LINE.iter().enumerate() {
        let later = LINE.iter().skip(position + 1).chain(&EDGES);
        for (place, code) in lines_of(station) {
            for other in later.clone() {
                let named = format!("crate::{other}");
                assert!(
                    !code.contains(&named),
                    "{place}: {station} names {other}, which comes after it"
                );
            }
        }
    }
}
