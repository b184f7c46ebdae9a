//! The readings of check parts and open terminals over time.
//!
//! Readings form a series if they are of the same thing on the same switch with the same profile: another profile is another
//! meter. A corrected reading, or one judged again, counts as of the time it was taken.

use std::collections::HashMap;

use chrono::{DateTime, Datelike, FixedOffset};

use super::lot::{Firsts, in_order};
use super::work::Work;
use super::{Entry, Outcome, RecordId, RecordKind, Setup};
use crate::finding::{CheckReading, Control, ControlChart, Word, control};

/// The readings of check parts and open terminals that stand, of all lots, in the order of measuring.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Checks {
    readings: Vec<Checked>,
}

/// One of them.
#[derive(Clone, Debug, PartialEq)]
pub struct Checked {
    /// The entry as it stands.
    pub entry: Entry,
    /// The number under which it was measured first.
    pub first: RecordId,
    /// When it was measured.
    pub taken: DateTime<FixedOffset>,
}

/// What the readings of a series have in common.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct SeriesKey {
    kind: RecordKind,
    marking: String,
    switch: String,
    profile: String,
}

/// The readings of one thing on one switch that have a value, oldest first, and their chart.
#[derive(Clone, Debug)]
pub struct Series<'a> {
    /// The readings.
    pub readings: Vec<&'a Checked>,
    /// The chart, a point for each of them.
    pub chart: ControlChart,
}

impl SeriesKey {
    /// Returns the series an entry belongs to.
    pub fn of(entry: &Entry) -> Self {
        let record = &entry.record;
        Self {
            kind: record.kind,
            marking: record.raw.marking.clone(),
            switch: record.raw.switch.clone(),
            profile: entry.profile.clone(),
        }
    }

    /// Returns the series that a measurement will belong to.
    pub(super) fn of_work(work: &Work, setup: &Setup) -> Self {
        Self {
            kind: work.subject.kind(),
            marking: work.subject.marking().to_owned(),
            switch: setup.meter.label(work.switch).to_owned(),
            profile: setup.profile_hash(),
        }
    }

    /// Returns what was measured, in words: "blue 10 nF on C".
    pub fn in_words(&self) -> String {
        format!("{} on {}", self.marking, self.switch)
    }
}

impl Checks {
    /// Makes them of entries, voided ones too; parts are left out.
    pub fn new(entries: Vec<Entry>) -> Self {
        let firsts = Firsts::of(&entries);
        let times: HashMap<RecordId, DateTime<FixedOffset>> =
            entries.iter().map(|e| (e.id, e.time)).collect();
        let checked = in_order(entries)
            .into_iter()
            .filter(|entry| entry.record.kind != RecordKind::Part)
            .map(|entry| {
                let first = firsts.first(entry.id);
                Checked {
                    taken: times.get(&first).copied().unwrap_or(entry.time),
                    first,
                    entry,
                }
            });
        Self {
            readings: checked.collect(),
        }
    }

    /// Takes in an entry that was just written, or judged again.
    pub(super) fn accept(&mut self, entry: Entry) {
        if entry.record.kind == RecordKind::Part {
            return;
        }
        let (first, taken) = (entry.id, entry.time);
        let place = self
            .readings
            .iter()
            .position(|checked| Some(checked.entry.id) == entry.record.replaces);
        match place.and_then(|index| self.readings.get_mut(index)) {
            Some(checked) => checked.entry = entry,
            None => self.readings.push(Checked {
                entry,
                first,
                taken,
            }),
        }
    }

    /// Adds a reading; it is the latest.
    pub(super) fn add(&mut self, checked: Checked) {
        self.readings.push(checked);
    }

    /// Returns all readings, oldest first.
    pub fn readings(&self) -> &[Checked] {
        &self.readings
    }

    /// Returns the readings of a series that have a value, and their chart.
    pub fn series(&self, key: &SeriesKey) -> Series<'_> {
        let of_it = self
            .readings
            .iter()
            .filter(|checked| SeriesKey::of(&checked.entry) == *key)
            .filter_map(|checked| Some((checked, reading_of(checked)?)));
        let (readings, values): (Vec<&Checked>, Vec<CheckReading>) = of_it.unzip();
        Series {
            readings,
            chart: control(&values),
        }
    }

    /// Returns after which entry parts are in doubt, if this reading says that the meter has moved: `Some(None)` if no
    /// check ever spoke for it.
    #[expect(clippy::option_option, reason = "moved or not; a good check or none")]
    pub(super) fn doubt_since(&self, id: RecordId) -> Option<Option<RecordId>> {
        let checked = self
            .readings
            .iter()
            .find(|checked| checked.entry.id == id)?;
        let series = self.series(&SeriesKey::of(&checked.entry));
        let moved = series.chart.moved?;
        let good = moved.last_good.and_then(|index| series.readings.get(index));
        Some(good.map(|good| good.first))
    }
}

/// Returns the word in the log for what the charts say.
pub(super) fn word_of(control: Control) -> Word {
    match control {
        Control::Inside => Word::Inside,
        Control::Warning => Word::Undecided,
        Control::Jumped | Control::Drifted => Word::Outside,
    }
}

/// Writes a time as the screens do.
pub fn day_and_time(time: DateTime<FixedOffset>) -> String {
    time.format("%-d %b %H:%M").to_string()
}

/// Returns how a reading compares with what is known; `None` without a value.
pub(super) fn reading_of(checked: &Checked) -> Option<CheckReading> {
    compared(
        &checked.entry.record.outcome,
        i64::from(checked.taken.num_days_from_ce()),
    )
}

/// Returns how the outcome of a check compares with what is known, in picofarad; `None` without a value.
pub(super) fn compared(outcome: &Outcome, day: i64) -> Option<CheckReading> {
    let known = outcome.nominal_pf?;
    let own = outcome.own_uncertainty_pf?;
    let all = 0.5 * (outcome.high_pf? - known);
    Some(CheckReading {
        deviation: outcome.capacitance_pf? - known,
        own,
        shared: (all * all - own * own).max(0.0).sqrt(),
        day,
    })
}
