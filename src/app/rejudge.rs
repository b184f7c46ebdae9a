//! Stored entries judged again with the meter and tray in force, from what was typed. Nothing is written here, and what was
//! typed stays as it is.

use std::collections::HashMap;

use chrono::{DateTime, FixedOffset};

use super::checks::{Checked, Checks};
use super::lot::{Firsts, in_order};
use super::sighting::read_sighting;
use super::work::{Subject, Work, typed_again};
use super::{Entry, Outcome, Record, RecordId, RecordKind, Setup};
use crate::finding::{ReadingCertainty, Word};
use crate::meter::DialReading;

/// What judging again comes to.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Rejudgement {
    /// What would change, in the order of measuring.
    pub changes: Vec<Change>,
    /// What this meter cannot take.
    pub left: Vec<Left>,
    /// How many entries stay as they are.
    pub n_unchanged: usize,
}

/// An entry that is judged otherwise now.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    /// As it stands.
    pub before: Entry,
    /// What would take its place.
    pub after: Record,
}

/// An entry that this meter cannot take.
#[derive(Clone, Debug, PartialEq)]
pub struct Left {
    /// As it stands, and will stand.
    pub entry: Entry,
    /// Why.
    pub why: String,
}

/// Judges entries again; voided ones are needed too, since they tell when a corrected one was measured.
///
/// Only words and figures count as a change, not the wording of a remark. Without a tray the compartments stay as they are.
/// A reading that was called outside or dead was asked about at the time, if it looked like a slip, and confirmed; any other
/// was not, so that now a slip is a question and no finding.
pub fn rejudge(entries: Vec<Entry>, setup: &Setup) -> Rejudgement {
    let firsts = Firsts::of(&entries);
    let times: HashMap<RecordId, DateTime<FixedOffset>> =
        entries.iter().map(|e| (e.id, e.time)).collect();
    let mut checks = Checks::default();
    let mut all = Rejudgement::default();
    for entry in in_order(entries) {
        let outcome = match judged(&entry, setup, &checks) {
            Ok(outcome) => outcome,
            Err(why) => {
                all.left.push(Left { entry, why });
                continue;
            }
        };
        if entry.record.kind != RecordKind::Part {
            let first = firsts.first(entry.id);
            let mut again = entry.clone();
            again.record.outcome = outcome.clone();
            again.profile = setup.profile_hash();
            checks.add(Checked {
                first,
                taken: times.get(&first).copied().unwrap_or(entry.time),
                entry: again,
            });
        }
        if is_same(&entry.record.outcome, &outcome) {
            all.n_unchanged += 1;
            continue;
        }
        all.changes.push(Change {
            after: Record {
                outcome,
                replaces: Some(entry.id),
                ..entry.record.clone()
            },
            before: entry,
        });
    }
    all
}

fn judged(entry: &Entry, setup: &Setup, checks: &Checks) -> Result<Outcome, String> {
    let Some(mut work) = Work::of(&entry.record, setup) else {
        return Err(why_not(&entry.record, setup));
    };
    let before = &entry.record.outcome;
    if [Word::Outside, Word::Dead]
        .iter()
        .any(|word| word.word() == before.finding)
    {
        work.circumstances.reading = ReadingCertainty::Confirmed;
    }
    let mut outcome = work.judged(setup, checks).outcome;
    if setup.tray.is_none() && matches!(work.subject, Subject::Part(_)) {
        outcome.compartment.clone_from(&before.compartment);
    }
    Ok(outcome)
}

/// Returns why [`Work::of`] gives nothing.
fn why_not(record: &Record, setup: &Setup) -> String {
    let (raw, meter) = (&record.raw, &setup.meter);
    if meter.switch_named(&raw.switch).is_none() {
        return format!("this meter has no switch {}", raw.switch);
    }
    let is_known = |label: &str| meter.checks.iter().any(|check| check.label == label);
    if record.kind == RecordKind::Check && !is_known(&raw.marking) {
        return format!("this meter has no check part {}", raw.marking);
    }
    let place = raw.dial.as_deref().and_then(|text| text.parse().ok());
    let typed = typed_again(raw);
    match read_sighting(&typed, &meter.dial, place.map(DialReading::new)) {
        Err(refusal) => refusal.to_string(),
        Ok(_) => format!("this meter cannot take `{typed}`"),
    }
}

/// Returns whether two outcomes say the same; figures may differ by what rounding does.
fn is_same(before: &Outcome, after: &Outcome) -> bool {
    let words = |o: &Outcome| {
        (
            o.finding.clone(),
            o.compartment.clone(),
            o.limits_from.clone(),
        )
    };
    let figures = |o: &Outcome| {
        [
            o.nominal_pf,
            o.low_pf,
            o.high_pf,
            o.capacitance_pf,
            o.uncertainty_pf,
            o.own_uncertainty_pf,
            o.loss,
            o.loss_below,
            o.deviation_percent,
            o.probability_inside,
            o.probability_flat,
            o.reading_probability,
        ]
    };
    words(before) == words(after)
        && figures(before)
            .into_iter()
            .zip(figures(after))
            .all(is_same_figure)
}

fn is_same_figure((before, after): (Option<f64>, Option<f64>)) -> bool {
    const ROUNDING: f64 = 1e-9;
    match (before, after) {
        (Some(before), Some(after)) => {
            let scale = before.abs().max(after.abs()).max(ROUNDING);
            (before - after).abs() <= ROUNDING * scale
        }
        (None, None) => true,
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::Table;
    use super::*;
    use crate::meter::Meter;

    /// The example meter as it is without a calibration, with something replaced.
    fn other_meter(setup: &Setup, from: &str, to: &str) -> Setup {
        let text = setup.profile_text.replace(from, to);
        let text = text.split("[calibration]").next().unwrap_or_default();
        Setup {
            meter: Meter::read(text).expect("a profile").0,
            profile_text: text.to_owned(),
            tray: setup.tray.clone(),
        }
    }

    fn in_words(all: &Rejudgement) -> Vec<String> {
        let changes = all.changes.iter().map(|change| {
            let of = |o: &Outcome| {
                format!(
                    "{} {} {:.0}",
                    o.finding,
                    o.compartment.as_deref().unwrap_or("-"),
                    o.capacitance_pf.unwrap_or(0.0)
                )
            };
            format!(
                "{}: {} to {}",
                change.before.id,
                of(&change.before.record.outcome),
                of(&change.after.outcome)
            )
        });
        let left = all
            .left
            .iter()
            .map(|left| format!("{} left: {}", left.entry.id, left.why));
        changes.chain(left).collect()
    }

    #[test]
    fn the_same_meter_says_the_same() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵104K↵20.3↵20.3↵224J↵n 20↵472J↵93.0↵");
        table.line("check blue 10 nF");
        table.line("34");
        let entries = table.state.lot.entries.clone();
        let all = rejudge(entries.clone(), &table.state.setup);
        assert_eq!((in_words(&all), all.n_unchanged), (vec![], entries.len()));
    }

    #[test]
    fn another_meter_changes_what_it_reads_otherwise_and_keeps_what_was_typed() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵224J↵40.3↵472J↵93.0↵");
        table.line("check blue 10 nF");
        table.line("34");
        let entries = table.state.lot.entries.clone();
        let other = other_meter(&table.state.setup, "300 Ω", "360 Ω");
        let all = rejudge(entries, &other);
        assert_eq!(
            in_words(&all),
            [
                "1: inside A1 222179 to undecided no place 183153",
                "2: outside B2 439046 to outside B2 361932",
                "3: undecided no place 4427 to undecided no place 4380",
                "4: inside - 10027 to inside - 9984"
            ]
        );
        let change = all.changes.first().expect("a change");
        assert_eq!(change.after.replaces, Some(change.before.id));
        assert_eq!(change.after.raw, change.before.record.raw);
    }

    #[test]
    fn what_the_meter_cannot_take_is_left() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵472J↵93.0↵");
        table.line("check blue 10 nF");
        table.line("34");
        let entries = table.state.lot.entries.clone();
        let setup = &table.state.setup;
        let renamed = other_meter(setup, "label = \"D\"", "label = \"fine\"");
        let left = |setup: &Setup| {
            let all = rejudge(entries.clone(), setup);
            let left = all.left.iter();
            left.map(|l| format!("{}: {}", l.entry.id, l.why))
                .collect::<Vec<_>>()
        };
        assert_eq!(left(&renamed), ["2: this meter has no switch D"]);
        let relabelled = other_meter(setup, "blue 10 nF", "blue");
        assert_eq!(
            left(&relabelled),
            ["3: this meter has no check part blue 10 nF"]
        );
        let short = other_meter(setup, "high = 100", "high = 90");
        let short = other_meter(&short, ", [100, \"4.716 kΩ\"]", "");
        assert_eq!(
            left(&short),
            [
                "2: the dial reading 93.0 is out of range; accepted here: 0 to 90, the numbers of this dial"
            ]
        );
    }

    #[test]
    fn without_a_tray_places_stay() {
        let mut table = Table::new();
        table.keys("224J↵20.3↵");
        let mut setup = table.state.setup.clone();
        setup.tray = None;
        let all = rejudge(table.state.lot.entries.clone(), &setup);
        assert_eq!(all.n_unchanged, 1, "{:?}", all.changes);
    }
}
