//! `nulltray check`: every mistake in profiles and trays, with its place; whether a log is whole.

use std::io::{Read, Write};
use std::path::Path;

use super::Streams;
use super::args::CheckArgs;
use super::failure::{Failure, FailureKind, Finish};
use super::harmless::line;
use super::setup;
use crate::log::Log;
use crate::meter::Meter;
use crate::tables::document::Complaint;
use crate::tray::Tray;

/// What every database of the log's kind starts with.
const LOG_START: &[u8] = b"SQLite format 3\0";

/// What was found in one file.
enum Found {
    Whole(String),
    Mistakes(Vec<Complaint>),
    Damaged(Vec<String>),
}

/// Runs the command. A file that cannot be read does not keep the others from being checked.
pub(super) fn run(args: &CheckArgs, streams: &mut Streams<'_>) -> Result<Finish, Failure> {
    let mut n_wrong = 0;
    let mut unreadable: Option<Failure> = None;
    for path in &args.files {
        let mut warnings = Vec::new();
        match look(path, &mut warnings) {
            Ok(found) => {
                for warning in &warnings {
                    writeln!(streams.stdout, "{}", setup::warning(path, warning))?;
                }
                n_wrong += usize::from(!matches!(found, Found::Whole(_)));
                write(streams.stdout, path, &found)?;
            }
            Err(failure) if failure.kind == FailureKind::Input => {
                n_wrong += 1;
                writeln!(streams.stdout, "{}", failure.message)?;
            }
            Err(failure) => {
                if let Some(earlier) = unreadable.replace(failure) {
                    earlier.report(streams.stderr);
                }
            }
        }
    }
    unreadable.map_or(Ok(Finish::after(n_wrong)), Err)
}

fn write(out: &mut dyn Write, path: &Path, found: &Found) -> std::io::Result<()> {
    let name = path.display();
    match found {
        Found::Whole(what) => writeln!(out, "{name}: {what}"),
        Found::Mistakes(complaints) => complaints
            .iter()
            .try_for_each(|complaint| writeln!(out, "{name}:{complaint}")),
        Found::Damaged(damages) => damages
            .iter()
            .try_for_each(|damage| writeln!(out, "{name}: {damage}")),
    }
}

fn look(path: &Path, warnings: &mut Vec<Complaint>) -> Result<Found, Failure> {
    if starts_like_a_log(path)? {
        return Ok(log_found(path));
    }
    let text = setup::text_of(path)?;
    let read = if is_tray(&text) {
        Tray::read(&text).map(|(tray, found)| (tray_in_words(&tray), found))
    } else {
        Meter::read(&text).map(|(meter, found)| (meter_in_words(&meter), found))
    };
    Ok(match read {
        Ok((what, found)) => {
            warnings.extend(found);
            Found::Whole(what)
        }
        Err(complaints) => Found::Mistakes(complaints),
    })
}

fn starts_like_a_log(path: &Path) -> Result<bool, Failure> {
    let mut start = Vec::new();
    setup::regular_file(path)?
        .take(LOG_START.len() as u64)
        .read_to_end(&mut start)
        .map_err(|error| Failure::file("read", path, &error))?;
    Ok(start == LOG_START)
}

fn log_found(path: &Path) -> Found {
    let damages = match Log::open_read_only(path).and_then(|log| log.verify()) {
        Ok(damages) => damages,
        Err(failure) => return Found::Damaged(vec![failure.to_string()]),
    };
    if damages.is_empty() {
        Found::Whole("log, undamaged".to_owned())
    } else {
        Found::Damaged(damages.iter().map(ToString::to_string).collect())
    }
}

/// A tray has compartments; what has none is taken for a profile, which says what it misses.
fn is_tray(text: &str) -> bool {
    let mut rows = text
        .lines()
        .map(|row| row.split_whitespace().collect::<String>());
    rows.any(|row| {
        row.starts_with("[[compartment]]")
            || row.starts_with("[rules")
            || row.starts_with("compartment=")
    })
}

fn tray_in_words(tray: &Tray) -> String {
    let compartments = match tray.compartments.len() {
        1 => "1 compartment".to_owned(),
        n => format!("{n} compartments"),
    };
    format!("tray {}, {compartments}, no mistakes", line(&tray.name))
}

fn meter_in_words(meter: &Meter) -> String {
    let switches = match meter.switches.len() {
        1 => "1 switch".to_owned(),
        n => format!("{n} switches"),
    };
    let state = match &meter.calibration {
        Some(calibration) => format!("calibrated {}", line(&calibration.date)),
        None => "not calibrated".to_owned(),
    };
    format!(
        "profile {}, {switches}, {state}, no mistakes",
        line(&meter.name)
    )
}
