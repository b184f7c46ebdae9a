//! `nulltray log`: what the log holds, for people and for other programs; taking back, bringing back, copying.

use std::borrow::Cow;
use std::io::{BufWriter, Write};
use std::path::Path;

use chrono::{DateTime, FixedOffset, Local, SecondsFormat, SubsecRound};

use super::Streams;
use super::aligned::write_aligned;
use super::args::{ExportFormat, LogArgs, LogCommand, Places};
use super::columns::INPUTS;
use super::failure::{Failure, FailureKind, Finish};
use super::harmless::line;
use super::sheet::{Cell, Form, OUTPUTS, Sheet, output_cells, text_cell, typed_cell};
use super::{rejudge, setup};
use crate::app::{Entry, LogFailure, Outcome, Raw, RecordKind, search};
use crate::log::{Log, Salvage, Which, salvage};
use crate::quantity::{Farad, Uncertain};

/// The columns of the export before judge's own.
const KEPT: [&str; 5] = ["id", "time", "lot", "voided", "profile"];

/// Runs the command.
pub(super) fn run(
    args: &LogArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let path = setup::log_path(places)?;
    let lot = places.lot.as_deref();
    match &args.command {
        LogCommand::Show => {
            let entries = Log::open_read_only(&path)?.entries(lot, Which::Live)?;
            write_table(streams.stdout, &entries.iter().collect::<Vec<_>>())?;
            Ok(Finish::Done)
        }
        LogCommand::Find { text } => {
            let entries = Log::open_read_only(&path)?.entries(lot, Which::Live)?;
            find(&entries, &text.join(" "), streams.stdout)
        }
        LogCommand::Export { format } => export(&path, lot, *format, streams),
        LogCommand::Undo => {
            let lot = setup::lot(places);
            let entry = existing(&path)?.void_last(&lot, now())?;
            tell("taken back", entry.as_ref(), &lot, streams.stdout)
        }
        LogCommand::Redo => {
            let lot = setup::lot(places);
            let entry = existing(&path)?.redo(&lot, now())?;
            tell("brought back", entry.as_ref(), &lot, streams.stdout)
        }
        LogCommand::Rejudge(args) => rejudge::run(args, places, streams),
        LogCommand::Backup { file } => {
            Log::open_read_only(&path)?.backup(file)?;
            writeln!(
                streams.stdout,
                "{} copied to {}",
                path.display(),
                file.display()
            )?;
            Ok(Finish::Done)
        }
    }
}

/// Opens a log to change it, but makes none.
pub(super) fn existing(path: &Path) -> Result<Log, Failure> {
    drop(Log::open_read_only(path)?);
    let (log, _) = Log::open(path)?;
    Ok(log)
}

/// The time, in milliseconds.
pub(super) fn now() -> DateTime<FixedOffset> {
    Local::now().fixed_offset().trunc_subsecs(3)
}

fn tell(
    done: &str,
    entry: Option<&Entry>,
    lot: &str,
    out: &mut dyn Write,
) -> Result<Finish, Failure> {
    let Some(entry) = entry else {
        return Err(
            Failure::input(format!("nothing of lot {} can be {done}", line(lot)))
                .hint("another lot is named with --lot NAME; `nulltray log show` has their names"),
        );
    };
    let finding = &entry.record.outcome.finding;
    writeln!(out, "{done}: {} {}, {finding}", entry.id, subject(entry))?;
    Ok(Finish::Done)
}

fn find(entries: &[Entry], text: &str, out: &mut dyn Write) -> Result<Finish, Failure> {
    let texts: Vec<String> = entries.iter().map(everything_said).collect();
    let found: Vec<&Entry> = search::find(&texts, text)
        .into_iter()
        .filter_map(|index| entries.get(index))
        .collect();
    if found.is_empty() {
        return Err(Failure::input(format!("no entry resembles {}", line(text))));
    }
    write_table(out, &found)?;
    Ok(Finish::Done)
}

/// The texts of an entry by which it may be remembered.
fn everything_said(entry: &Entry) -> String {
    let record = &entry.record;
    let raw = &record.raw;
    let texts = [
        Some(raw.marking.as_str()),
        raw.family.as_deref(),
        raw.looks.as_deref(),
        raw.note.as_deref(),
        Some(record.lot.as_str()),
        Some(record.outcome.finding.as_str()),
        record.outcome.compartment.as_deref(),
    ];
    let texts: Vec<&str> = texts.into_iter().flatten().collect();
    texts.join(" ")
}

fn export(
    path: &Path,
    lot: Option<&str>,
    format: ExportFormat,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let form = match format {
        ExportFormat::Csv => Form::Csv,
        ExportFormat::Json => Form::Json,
    };
    let read = Log::open_read_only(path).and_then(|log| log.entries(lot, Which::All));
    match read {
        Ok(entries) => {
            write_export(form, &entries, streams.stdout)?;
            Ok(Finish::Done)
        }
        Err(failure) => export_remains(path, lot, form, failure, streams),
    }
}

/// Writes what can still be read of a damaged log, and says on the error stream what cannot.
fn export_remains(
    path: &Path,
    lot: Option<&str>,
    form: Form,
    failure: LogFailure,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let Ok(Salvage {
        mut entries,
        damages,
        ..
    }) = salvage(path)
    else {
        return Err(failure.into());
    };
    entries.retain(|entry| lot.is_none_or(|lot| entry.record.lot == lot));
    write_export(form, &entries, streams.stdout)?;
    let mut said = vec![failure.message];
    said.extend(damages.iter().map(ToString::to_string));
    let n_entries = match entries.len() {
        1 => "1 entry".to_owned(),
        n => format!("{n} entries"),
    };
    Err(Failure {
        kind: FailureKind::Io,
        message: said.join("\n"),
        hints: vec![format!(
            "{n_entries} could still be read and exported; a backup may hold the others"
        )],
    })
}

fn write_export(form: Form, entries: &[Entry], stdout: &mut dyn Write) -> std::io::Result<()> {
    let names = KEPT
        .into_iter()
        .chain(INPUTS.map(|row| row.0))
        .chain(OUTPUTS);
    let mut sheet = Sheet::start(form, stdout, names)?;
    for entry in entries {
        let time = words(entry.time);
        let voided = entry.voided.map(words);
        let kept = [
            Cell::Count(entry.id.0),
            Cell::Text(&time),
            Cell::Text(&entry.record.lot),
            text_cell(voided.as_deref()),
            Cell::Text(&entry.profile),
        ];
        let inputs = raw_cells(&entry.record.raw);
        let outputs = output_cells(&entry.record.outcome);
        sheet.row(kept.into_iter().chain(inputs).chain(outputs))?;
    }
    sheet.finish()
}

/// RFC 3339 with the offset.
fn words(time: DateTime<FixedOffset>) -> String {
    time.to_rfc3339_opts(SecondsFormat::AutoSi, false)
}

/// The cells of [`INPUTS`].
fn raw_cells(raw: &Raw) -> [Cell<'_>; INPUTS.len()] {
    [
        Cell::Text(&raw.marking),
        text_cell(raw.family.as_deref()),
        Cell::Text(&raw.switch),
        typed_cell(raw.dial.as_deref()),
        typed_cell(raw.dark_from.as_deref()),
        typed_cell(raw.dark_to.as_deref()),
        text_cell(raw.lamp.as_deref()),
        typed_cell(raw.temperature.as_deref()),
        typed_cell(raw.heated_hours.as_deref()),
        text_cell(raw.leakage.as_deref()),
        text_cell(raw.leakage_voltage.as_deref()),
        text_cell(raw.looks.as_deref()),
        text_cell(raw.note.as_deref()),
    ]
}

/// Returns what was measured.
pub(super) fn subject(entry: &Entry) -> Cow<'_, str> {
    let marking = line(&entry.record.raw.marking);
    match entry.record.kind {
        RecordKind::Part => marking,
        RecordKind::Check => Cow::Owned(format!("check part {marking}")),
        RecordKind::Zero => Cow::Borrowed("open terminals"),
    }
}

/// What was seen, in few words.
fn reading(raw: &Raw) -> String {
    let dial = raw.dial.as_deref().unwrap_or_default();
    match (&raw.dark_from, &raw.dark_to, raw.lamp.as_deref()) {
        (None, None, None) => dial.to_owned(),
        (None, None, Some(lamp)) if dial.is_empty() => lamp.to_owned(),
        (None, None, Some(lamp)) => format!("{lamp} {dial}"),
        (from, to, _) => format!(
            "{} .. {}",
            from.as_deref().unwrap_or_default(),
            to.as_deref().unwrap_or_default()
        ),
    }
}

/// Value and expanded uncertainty, as far as there are any.
pub(super) fn value(outcome: &Outcome) -> String {
    match (outcome.capacitance_pf, outcome.uncertainty_pf) {
        (Some(value), Some(uncertainty)) => Uncertain {
            value: Farad::from_picofarads(value),
            standard_uncertainty: Farad::from_picofarads(uncertainty),
        }
        .to_string(),
        (Some(value), None) => Farad::from_picofarads(value).to_string(),
        (None, _) => "-".to_owned(),
    }
}

const HEADINGS: [&str; 9] = [
    "id",
    "time",
    "lot",
    "marking",
    "switch",
    "reading",
    "value (k = 2)",
    "finding",
    "place",
];

/// Writes entries as a table for people, as wide as they need.
fn write_table(stdout: &mut dyn Write, entries: &[&Entry]) -> std::io::Result<()> {
    let mut rows = vec![HEADINGS.map(str::to_owned)];
    rows.extend(entries.iter().map(|entry| {
        let record = &entry.record;
        [
            entry.id.to_string(),
            entry.time.format("%Y-%m-%d %H:%M").to_string(),
            line(&record.lot).into_owned(),
            subject(entry).into_owned(),
            line(&record.raw.switch).into_owned(),
            line(&reading(&record.raw)).into_owned(),
            value(&record.outcome),
            line(&record.outcome.finding).into_owned(),
            line(record.outcome.compartment.as_deref().unwrap_or("-")).into_owned(),
        ]
    }));
    let mut out = BufWriter::new(stdout);
    write_aligned(&mut out, &rows)?;
    out.flush()
}
