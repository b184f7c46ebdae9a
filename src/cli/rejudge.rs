//! `nulltray log rejudge`: the stored entries judged again with the meter and tray in force. First what would change; written
//! only when asked for, all or nothing, each as an entry that takes the place of the first one, which stays in the log.

use std::io::Write;

use serde::Serialize;

use super::Streams;
use super::aligned::write_aligned;
use super::args::{Places, RejudgeArgs};
use super::failure::{Failure, Finish};
use super::harmless::{line, write_json};
use super::log::{existing, now, subject, value};
use super::number::rounded;
use super::setup;
use crate::app::{Change, Entry, Outcome, RecordId, RecordKind, Rejudgement, Setup, rejudge};
use crate::log::{Log, Which};

/// Runs the command.
pub(super) fn run(
    args: &RejudgeArgs,
    places: &Places,
    streams: &mut Streams<'_>,
) -> Result<Finish, Failure> {
    let path = setup::log_path(places)?;
    let lot = places.lot.as_deref();
    let mut log = if args.write {
        existing(&path)?
    } else {
        Log::open_read_only(&path)?
    };
    let setup = setup::for_command(places, streams.stderr)?;
    let entries = log.entries(lot, Which::All)?;
    if let (Some(lot), true) = (lot, entries.is_empty()) {
        return Err(Failure::input(format!("no entry of a lot {}", line(lot)))
            .hint("`nulltray log show` has the names of the lots"));
    }
    let all = rejudge(entries, &setup);
    if !args.json {
        tell_changes(&all, &setup, streams.stdout)?;
    }
    let mut written = Vec::new();
    if args.write && !all.changes.is_empty() {
        let records = all.changes.iter().map(|change| change.after.clone());
        written = log.append_all(records, now(), &setup.profile_text)?;
    }
    if args.json {
        let shape = RejudgementShape::of(&all, &written);
        write_json(&mut *streams.stdout, &shape)?;
        writeln!(streams.stdout)?;
    } else if !all.changes.is_empty() {
        tell_written(&all, &written, streams.stdout)?;
    }
    Ok(Finish::after(all.left.len()))
}

const HEADINGS: [&str; 6] = ["id", "lot", "marking", "finding", "value (k = 2)", "place"];

fn tell_changes(all: &Rejudgement, setup: &Setup, out: &mut dyn Write) -> std::io::Result<()> {
    if !all.changes.is_empty() {
        let mut rows = vec![HEADINGS.map(str::to_owned)];
        rows.extend(all.changes.iter().map(row));
        write_aligned(out, &rows)?;
    }
    for left in &all.left {
        let (id, marking) = (left.entry.id, subject(&left.entry));
        writeln!(out, "{id} {marking} is left as it is: {}", line(&left.why))?;
    }
    let n_entries = all.n_unchanged + all.changes.len() + all.left.len();
    if all.changes.is_empty() {
        writeln!(out, "nothing would change, of {}", entries(n_entries))?;
    } else {
        let count = |differs: fn(&Outcome, &Outcome) -> bool| {
            let differing = |c: &&Change| differs(&c.before.record.outcome, &c.after.outcome);
            all.changes.iter().filter(differing).count()
        };
        writeln!(
            out,
            "{} of {} would change: {} by finding, {} by value, {} by place",
            all.changes.len(),
            entries(n_entries),
            count(|before, after| before.finding != after.finding),
            count(|before, after| before.capacitance_pf != after.capacitance_pf),
            count(|before, after| before.compartment != after.compartment),
        )?;
    }
    if setup.tray.is_none() {
        writeln!(out, "no tray is in force: places stay as they are")?;
    }
    Ok(())
}

fn tell_written(
    all: &Rejudgement,
    written: &[RecordId],
    out: &mut dyn Write,
) -> std::io::Result<()> {
    let (Some(first), Some(last)) = (written.first(), written.last()) else {
        return writeln!(
            out,
            "nothing is written; with --write each becomes a new entry, and the first one stays in the log"
        );
    };
    writeln!(
        out,
        "written: {first} to {last}, in place of the first ones, which stay in the log"
    )?;
    let moves = |c: &&Change| {
        c.before.record.kind == RecordKind::Part
            && c.before.record.outcome.compartment != c.after.outcome.compartment
    };
    match all.changes.iter().filter(moves).count() {
        0 => Ok(()),
        1 => writeln!(out, "1 part lies in another place than it should: move it"),
        n => writeln!(
            out,
            "{n} parts lie in other places than they should: move them"
        ),
    }
}

fn entries(n_entries: usize) -> String {
    match n_entries {
        1 => "1 entry".to_owned(),
        n => format!("{n} entries"),
    }
}

fn row(change: &Change) -> [String; HEADINGS.len()] {
    let Change { before, after } = change;
    let place = |outcome: &Outcome| {
        let place = outcome.compartment.as_deref().unwrap_or("-");
        line(place).into_owned()
    };
    let (old, new) = (&before.record.outcome, &after.outcome);
    [
        before.id.to_string(),
        line(&before.record.lot).into_owned(),
        subject(before).into_owned(),
        from_to(&line(&old.finding), &line(&new.finding)),
        from_to(&value(old), &value(new)),
        from_to(&place(old), &place(new)),
    ]
}

fn from_to(before: &str, after: &str) -> String {
    if before == after {
        before.to_owned()
    } else {
        format!("{before} -> {after}")
    }
}

#[derive(Debug, Serialize)]
struct RejudgementShape<'a> {
    entries: usize,
    unchanged: usize,
    written: bool,
    changes: Vec<ChangeShape<'a>>,
    left: Vec<LeftShape<'a>>,
}

#[derive(Debug, Serialize)]
#[expect(non_snake_case, reason = "units are written as they are")]
struct ChangeShape<'a> {
    id: i64,
    new_id: Option<i64>,
    lot: &'a str,
    marking: &'a str,
    finding_before: &'a str,
    finding_after: &'a str,
    capacitance_before_pF: Option<f64>,
    capacitance_after_pF: Option<f64>,
    compartment_before: Option<&'a str>,
    compartment_after: Option<&'a str>,
}

#[derive(Debug, Serialize)]
struct LeftShape<'a> {
    id: i64,
    lot: &'a str,
    marking: &'a str,
    reason: &'a str,
}

impl<'a> RejudgementShape<'a> {
    fn of(all: &'a Rejudgement, written: &[RecordId]) -> Self {
        let changes = all.changes.iter().enumerate().map(|(index, change)| {
            let (old, new) = (&change.before.record.outcome, &change.after.outcome);
            ChangeShape {
                id: change.before.id.0,
                new_id: written.get(index).map(|id| id.0),
                lot: &change.before.record.lot,
                marking: marking(&change.before),
                finding_before: &old.finding,
                finding_after: &new.finding,
                capacitance_before_pF: old.capacitance_pf.map(rounded),
                capacitance_after_pF: new.capacitance_pf.map(rounded),
                compartment_before: old.compartment.as_deref(),
                compartment_after: new.compartment.as_deref(),
            }
        });
        let left = all.left.iter().map(|left| LeftShape {
            id: left.entry.id.0,
            lot: &left.entry.record.lot,
            marking: marking(&left.entry),
            reason: &left.why,
        });
        Self {
            entries: all.n_unchanged + all.changes.len() + all.left.len(),
            unchanged: all.n_unchanged,
            written: !written.is_empty(),
            changes: changes.collect(),
            left: left.collect(),
        }
    }
}

fn marking(entry: &Entry) -> &str {
    &entry.record.raw.marking
}
