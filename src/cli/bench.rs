//! The bench and `nulltray line`: everything they need is made ready here, then each is one call.

use std::io::{BufReader, Write};
use std::path::{Path, PathBuf};
use std::{env, fs, process};

use chrono::{Local, SubsecRound};

use super::Streams;
use super::args::{self, BenchOptions, Places};
use super::failure::{Failure, Finish};
use super::line::run_line;
use super::setup;
use crate::app::{
    Glyphs, LogFailure, MeterFrom, Raw, Record, RecordKind, Setup, Size, Units, Work,
};
use crate::log::{Log, Start};
use crate::terminal::{self, Bell, Options, look_of_terminal};

/// `line` has no size; what is laid out for one takes this.
const LINES: Size = Size {
    width: 80,
    height: 24,
};

/// Opens the bench on the terminal.
pub(super) fn open(
    places: &Places,
    options: &BenchOptions,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let (options, _folder) = make_ready(places, options, streams)?;
    terminal::run(options).map_err(|failure| Failure::io(failure.message).hint(failure.hint))?;
    Ok(Finish::Done)
}

/// Runs the bench as lines.
pub(super) fn lines(
    places: &Places,
    options: &BenchOptions,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let (options, _folder) = make_ready(places, options, streams)?;
    let (state, keeper) = options.begin(LINES).map_err(of_log)?;
    let mut input = BufReader::new(&mut *streams.stdin);
    run_line(
        state,
        keeper,
        &mut input,
        &mut *streams.stdout,
        &mut *streams.stderr,
    )?;
    Ok(Finish::Done)
}

/// A folder that goes when the program does.
struct ThrowAway(PathBuf);

impl Drop for ThrowAway {
    fn drop(&mut self) {
        // Whether it goes or stays: it is in the folder for temporary files, and nobody is left to be told.
        let _ = fs::remove_dir_all(&self.0);
    }
}

impl ThrowAway {
    fn make() -> Result<Self, Failure> {
        let now = Local::now().timestamp_nanos_opt().unwrap_or_default();
        let folder = env::temp_dir().join(format!("nulltray-demo-{}-{now:x}", process::id()));
        // `create_dir` refuses a folder that someone else made ready.
        fs::create_dir(&folder).map_err(|error| {
            Failure::file("make the folder for the demonstration", &folder, &error)
        })?;
        Ok(Self(folder))
    }
}

fn make_ready(
    places: &Places,
    options: &BenchOptions,
    streams: &mut Streams<'_>,
) -> Result<(Options, Option<ThrowAway>), Failure> {
    let (setup, from, lot, folder) = if options.demo {
        let (setup, from) = setup::for_demo(places, streams.stderr)?;
        let lot = places
            .lot
            .clone()
            .unwrap_or_else(|| setup::DEMO_LOT_NAME.to_owned());
        (setup, from, lot, Some(ThrowAway::make()?))
    } else {
        let (meter, profile_text, from) = setup::meter(places, streams.stderr)?;
        let tray = setup::tray(places, streams.stderr)?;
        (
            Setup {
                meter,
                profile_text,
                tray,
            },
            from,
            setup::lot(places),
            None,
        )
    };
    let log = match &folder {
        Some(folder) => demonstration(&folder.0.join("parts.db"), &setup, &lot)?,
        None => open_log(&setup::log_path(places)?, streams.stderr)?,
    };
    let asked = if options.ascii {
        Glyphs::Ascii
    } else {
        Glyphs::Unicode
    };
    let ready = Options {
        setup,
        meter_from: match from {
            setup::MeterFrom::BuiltIn => MeterFrom::Example,
            setup::MeterFrom::File(_) => MeterFrom::Profile,
        },
        profile_place: setup::own_place("meter.toml"),
        log,
        lot,
        look: look_of_terminal(asked, units(options.units.unwrap_or_default())),
        bell: if options.bell {
            Bell::Rings
        } else {
            Bell::Silent
        },
    };
    Ok((ready, folder))
}

fn open_log(path: &Path, stderr: &mut dyn Write) -> Result<Log, Failure> {
    let (log, start) = Log::open(path).map_err(of_log)?;
    if start == Start::Empty {
        let _ = writeln!(stderr, "{}: {start}", path.display());
    }
    Ok(log)
}

/// A log with the built-in lot in it, measured and judged like any other.
fn demonstration(path: &Path, setup: &Setup, lot: &str) -> Result<Log, Failure> {
    let (mut log, _) = Log::open(path).map_err(of_log)?;
    let now = Local::now().fixed_offset().trunc_subsecs(3);
    log.append_all(demo_records(setup, lot), now, &setup.profile_text)
        .map_err(of_log)?;
    Ok(log)
}

/// The records of the built-in lot; rows that the meter in force cannot take (another `--meter`) are left out.
fn demo_records(setup: &Setup, lot: &str) -> Vec<Record> {
    let mut reader = csv::Reader::from_reader(setup::DEMO_LOT.as_bytes());
    let header = reader.headers().cloned().unwrap_or_default();
    reader
        .records()
        .flatten()
        .filter_map(|row| {
            let cell = |name: &str| {
                let index = header.iter().position(|column| column == name)?;
                row.get(index)
                    .filter(|text| !text.is_empty())
                    .map(str::to_owned)
            };
            let raw = Raw {
                marking: cell("marking")?,
                family: cell("family"),
                switch: cell("switch")?,
                dial: cell("dial"),
                dark_from: cell("dark_from"),
                dark_to: cell("dark_to"),
                lamp: cell("lamp"),
                temperature: cell("temperature"),
                heated_hours: cell("heated_hours"),
                leakage: cell("leakage"),
                leakage_voltage: cell("leakage_voltage"),
                looks: cell("looks"),
                note: cell("note"),
                chosen_reading: None,
                typed: String::new(),
            };
            Some(Work::of_columns(RecordKind::Part, &raw, setup)?.record(setup, lot))
        })
        .collect()
}

fn units(asked: args::Units) -> Units {
    match asked {
        args::Units::Auto => Units::Auto,
        args::Units::Pf => Units::Pf,
        args::Units::Nf => Units::Nf,
        args::Units::Uf => Units::Uf,
    }
}

fn of_log(failure: LogFailure) -> Failure {
    Failure::io(failure.message).hint(failure.hint)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_row_of_the_built_in_lot_is_measured() {
        let places = Places {
            meter: None,
            tray: None,
            log: None,
            lot: None,
        };
        let mut talk = Vec::new();
        let (setup, _) = setup::for_demo(&places, &mut talk).expect("the built-in meter and tray");
        let n_rows = setup::DEMO_LOT.lines().count() - 1;
        assert!(n_rows >= 60, "{n_rows}");
        assert_eq!(demo_records(&setup, "test").len(), n_rows);
    }
}
