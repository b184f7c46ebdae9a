//! One measurement as it was typed, and what follows from it; the same from the prompt and from the log.

use super::checks::Checks;
use super::entry::Addition;
use super::sighting::{Sighting, read_sighting};
use super::{Assessment, Marked, Outcome, Raw, Record, RecordKind, Setup, assess, outcome};
use crate::finding::Circumstances;
use crate::marking::decode;
use crate::meter::{AssumedLoss, CheckPart, DialReading, Edge, Part, Seen, Switch};
use crate::quantity::{Farad, Ohm, Volt, parse};
use crate::tables::Family;
use crate::tray::Placement;

/// What is between the terminals.
#[derive(Clone, Debug, PartialEq)]
pub enum Subject {
    /// A part of the lot.
    Part(Marked),
    /// A known good part kept beside the meter.
    Check(CheckPart),
    /// Nothing: the open terminals.
    Zero,
}

/// One measurement.
#[derive(Clone, Debug)]
pub struct Work {
    /// What was measured.
    pub subject: Subject,
    /// On which switch.
    pub switch: Switch,
    /// What was seen.
    pub sighting: Sighting,
    /// What else is known.
    pub circumstances: Circumstances,
    /// Free text.
    pub note: Option<String>,
}

/// What follows from a measurement.
#[derive(Clone, Debug)]
pub struct Judgement {
    /// The columns of `judge`.
    pub outcome: Outcome,
    /// What the line said of a part; `None` for check parts and open terminals.
    pub assessment: Option<Assessment>,
    /// Why no compartment takes the part.
    pub unplaced: Option<String>,
}

impl Subject {
    /// Returns the kind of record it makes.
    pub fn kind(&self) -> RecordKind {
        match self {
            Self::Part(_) => RecordKind::Part,
            Self::Check(_) => RecordKind::Check,
            Self::Zero => RecordKind::Zero,
        }
    }

    /// Returns what stands in the marking column.
    pub fn marking(&self) -> &str {
        match self {
            Self::Part(marked) => &marked.decoding.marking,
            Self::Check(check) => &check.label,
            Self::Zero => "open terminals",
        }
    }
}

impl Work {
    /// Returns what follows from the measurement with the meter and tray in force; `checks` are the readings of check parts
    /// and open terminals so far, for another one of them.
    pub fn judged(&self, setup: &Setup, checks: &Checks) -> Judgement {
        match &self.subject {
            Subject::Part(marked) => {
                let assessment = assess(
                    setup,
                    marked,
                    self.switch,
                    self.sighting.seen,
                    &self.circumstances,
                );
                Judgement {
                    outcome: outcome(setup, marked, &assessment),
                    unplaced: match &assessment.placement {
                        Some(Placement::Unplaced { why }) => Some(why.clone()),
                        _ => None,
                    },
                    assessment: Some(assessment),
                }
            }
            Subject::Check(_) | Subject::Zero => Judgement {
                outcome: checks.outcome(self, setup),
                assessment: None,
                unplaced: None,
            },
        }
    }

    /// Returns the raw columns.
    pub fn raw(&self, setup: &Setup) -> Raw {
        let (family, chosen) = match &self.subject {
            Subject::Part(marked) => (marked.family, marked.chosen),
            _ => (None, None),
        };
        let (dark_from, dark_to) = self.sighting.edges.clone().unzip();
        let known = &self.circumstances;
        Raw {
            marking: self.subject.marking().to_owned(),
            family: family.map(|f| f.name().to_owned()),
            switch: setup.meter.label(self.switch).to_owned(),
            dial: self.sighting.dial.clone(),
            dark_from,
            dark_to,
            lamp: self.sighting.lamp.map(str::to_owned),
            temperature: known.temperature.map(|t| t.to_string()),
            heated_hours: known.heated_hours.map(|h| h.to_string()),
            leakage: known.leakage.map(|r| r.to_string()),
            leakage_voltage: known.leakage_voltage.map(|v| v.to_string()),
            looks: known.looks.clone(),
            note: self.note.clone(),
            chosen_reading: chosen.and_then(|index| u32::try_from(index + 1).ok()),
            typed: self.sighting.typed.clone(),
        }
    }

    /// Makes the measurement again from an entry of the log; `None` if this meter lacks its switch, its check part or
    /// the place on the dial.
    pub fn of(record: &Record, setup: &Setup) -> Option<Self> {
        Self::of_columns(record.kind, &record.raw, setup)
    }

    /// Makes the measurement from raw columns, `typed` or not; `None` as for [`Work::of`].
    pub fn of_columns(kind: RecordKind, raw: &Raw, setup: &Setup) -> Option<Self> {
        let number = |cell: &Option<String>| cell.as_ref().and_then(|text| text.parse().ok());
        let subject = match kind {
            RecordKind::Part => {
                let family = raw.family.as_deref().and_then(Family::named);
                Subject::Part(Marked {
                    decoding: decode(&raw.marking, family),
                    family,
                    chosen: raw.chosen_reading.map(|n| (n as usize).saturating_sub(1)),
                })
            }
            RecordKind::Check => {
                let known = setup.meter.checks.iter().find(|c| c.label == raw.marking);
                Subject::Check(known?.clone())
            }
            RecordKind::Zero => Subject::Zero,
        };
        let parked = number(&raw.dial).map(DialReading::new);
        Some(Self {
            subject,
            switch: setup.meter.switch_named(&raw.switch)?,
            sighting: read_sighting(&typed_again(raw), &setup.meter.dial, parked).ok()?,
            circumstances: Circumstances {
                temperature: number(&raw.temperature),
                heated_hours: number(&raw.heated_hours),
                leakage: raw.leakage.as_ref().and_then(|t| parse::<Ohm>(t).ok()),
                leakage_voltage: raw
                    .leakage_voltage
                    .as_ref()
                    .and_then(|t| parse::<Volt>(t).ok()),
                looks: raw.looks.clone(),
                ..Circumstances::default()
            },
            note: raw.note.clone(),
        })
    }

    /// Returns the record of the measurement, with what follows from it, for a lot.
    pub fn record(&self, setup: &Setup, lot: &str) -> Record {
        Record {
            lot: lot.to_owned(),
            kind: self.subject.kind(),
            raw: self.raw(setup),
            outcome: self.judged(setup, &Checks::default()).outcome,
            replaces: None,
        }
    }

    /// Adds what was said about the part later.
    pub fn add(&mut self, addition: Addition) {
        match addition {
            Addition::Leak(resistance, voltage) => {
                self.circumstances.leakage = Some(resistance);
                self.circumstances.leakage_voltage = voltage;
            }
            Addition::Looks(looks) => self.circumstances.looks = Some(looks),
            Addition::Heated(hours) => self.circumstances.heated_hours = Some(hours),
            Addition::Temperature(celsius) => self.circumstances.temperature = Some(celsius),
            Addition::Note(text) => {
                self.note = Some(match self.note.take() {
                    Some(before) => format!("{before}; {text}"),
                    None => text,
                });
            }
        }
    }
}

/// Returns the line as it was typed, or one that says the same where the entry came from a file.
pub(super) fn typed_again(raw: &Raw) -> String {
    let dial = raw.dial.as_deref().unwrap_or_default();
    match (raw.typed.as_str(), raw.lamp.as_deref()) {
        ("", Some("never")) => format!("n {dial}"),
        ("", Some("always")) => "a".to_owned(),
        ("", Some("dark")) => "d".to_owned(),
        ("", Some("lit")) => "l".to_owned(),
        ("", _) => match (&raw.dark_from, &raw.dark_to) {
            (Some(from), Some(to)) => format!("{from} {to}"),
            _ => dial.to_owned(),
        },
        (typed, _) => typed.to_owned(),
    }
}

/// Returns the place on the dial that an observation marks, for drawing.
pub fn place_of(seen: Seen) -> Option<DialReading> {
    match seen {
        Seen::Middle(repeats) => Some(repeats.mean()),
        Seen::Edges { from, to } => match (from, to) {
            (Edge::At(from), Edge::At(to)) => {
                let middle = f64::midpoint(from.mean().get(), to.mean().get());
                Some(DialReading::new(middle))
            }
            (Edge::At(free), Edge::Stop) | (Edge::Stop, Edge::At(free)) => Some(free.mean()),
            (Edge::Stop, Edge::Stop) => None,
        },
        Seen::NeverDark { dimmest } => dimmest,
        Seen::AlwaysDark => None,
        Seen::Parked { at, .. } => Some(at),
    }
}

/// Returns a part whose value is known and which has no limits.
pub(super) fn known_part(capacitance: Farad, loss: f64) -> Part {
    Part {
        capacitance,
        low: None,
        high: None,
        loss: AssumedLoss {
            value: loss,
            standard_uncertainty: 0.0,
        },
        family: None,
    }
}
