//! Readings of reference parts as rows of numbers, each mistake told with its row.

use std::fmt;

use super::ReferenceReading;
use crate::meter::balance::DialLaw;
use crate::meter::circuit::Load;
use crate::meter::plain::Plain;
use crate::meter::{DialReading, Meter, NumberRead, Repeats, Stop, Switch};

/// What is wrong with a row.
#[derive(Clone, Debug, PartialEq)]
pub struct RowFault {
    /// The row, counted from 0.
    pub row: usize,
    /// What is wrong.
    pub kind: RowFaultKind,
}

/// The kinds of mistakes.
#[derive(Clone, Debug, PartialEq)]
pub enum RowFaultKind {
    /// A capacitance below 0, or no number.
    Capacitance,
    /// A standard uncertainty of a part that is not above 0 and below the capacitance.
    Uncertainty,
    /// A loss outside 0 to 1.
    Loss,
    /// The meter has no such switch.
    Switch,
    /// A reading that is not on the dial.
    OffDial(DialReading),
    /// What was seen holds no reading.
    NoReading,
    /// Another row gives the part of this label another value, uncertainty or loss.
    AnotherValue {
        /// That row, counted from 0.
        row: usize,
    },
}

impl fmt::Display for RowFaultKind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Capacitance => f.write_str("a reference part has a capacitance above 0, or 0 F for open terminals"),
            Self::Uncertainty => f.write_str("the standard uncertainty of a reference part lies above 0 and below its capacitance"),
            Self::Loss => f.write_str("a loss (tan δ) lies from 0 to 1"),
            Self::Switch => f.write_str("the meter has no such switch"),
            Self::OffDial(reading) => write!(f, "{reading} is not on the dial"),
            Self::NoReading => f.write_str("a reading of the dial is needed: the middle of the dark arc, its edges, or the dimmest place"),
            Self::AnotherValue { row } => write!(f, "row {} gives this part other data; one label is one part", row + 1),
        }
    }
}

/// A number read.
#[derive(Clone, Copy, Debug)]
pub(super) struct Number {
    pub(super) kind: NumberRead,
    pub(super) reading: f64,
    /// Standard uncertainty in dial units.
    pub(super) u: f64,
}

/// A part, or the open terminals, read on a switch.
#[derive(Clone, Debug)]
pub(super) struct Row {
    pub(super) switch: Switch,
    /// `None`: open terminals.
    pub(super) part: Option<usize>,
    pub(super) loss: f64,
    pub(super) numbers: Vec<Number>,
}

/// A reference part.
#[derive(Clone, Debug)]
pub(super) struct KnownPart {
    pub(super) label: String,
    pub(super) capacitance: f64,
    /// Relative standard uncertainty.
    pub(super) u: f64,
    /// The first row that names it.
    row: usize,
}

/// Everything that was read.
#[derive(Clone, Debug)]
pub(super) struct Rows {
    pub(super) rows: Vec<Row>,
    pub(super) parts: Vec<KnownPart>,
}

impl Rows {
    pub(super) fn of(meter: &Meter, readings: &[ReferenceReading]) -> Result<Self, Vec<RowFault>> {
        let mut found = Self {
            rows: Vec::new(),
            parts: Vec::new(),
        };
        let mut faults = Vec::new();
        for (row, reading) in readings.iter().enumerate() {
            let mut complain = |kind| faults.push(RowFault { row, kind });
            if let Err(kind) = check_reading(meter, reading) {
                complain(kind);
                continue;
            }
            match numbers(meter, reading) {
                Ok(numbers) => {
                    let part = match found.part(readings, row) {
                        Ok(part) => part,
                        Err(kind) => {
                            complain(kind);
                            continue;
                        }
                    };
                    found.rows.push(Row {
                        switch: reading.switch,
                        part,
                        loss: reading.loss,
                        numbers,
                    });
                }
                Err(kind) => complain(kind),
            }
        }
        if faults.is_empty() {
            Ok(found)
        } else {
            Err(faults)
        }
    }

    /// The part of a row. Without a label, parts with the same data are taken for one: counting one part as two would
    /// claim a certainty that is not there.
    fn part(
        &mut self,
        readings: &[ReferenceReading],
        row: usize,
    ) -> Result<Option<usize>, RowFaultKind> {
        let reading = &readings[row];
        if reading.capacitance.get() == 0.0 {
            return Ok(None);
        }
        let is_same = |other: &ReferenceReading| {
            other.capacitance == reading.capacitance
                && other.standard_uncertainty == reading.standard_uncertainty
                && other.loss.total_cmp(&reading.loss).is_eq()
        };
        let label = reading.label.trim();
        let known = self.parts.iter().position(|part| {
            let other = &readings[part.row];
            other.label.trim() == label && (!label.is_empty() || is_same(other))
        });
        if let Some(known) = known {
            let first = self.parts[known].row;
            return if is_same(&readings[first]) {
                Ok(Some(known))
            } else {
                Err(RowFaultKind::AnotherValue { row: first })
            };
        }
        self.parts.push(KnownPart {
            label: label.to_owned(),
            capacitance: reading.capacitance.get(),
            u: reading.standard_uncertainty / reading.capacitance,
            row,
        });
        Ok(Some(self.parts.len() - 1))
    }
}

/// Returns what is wrong with a row taken alone.
///
/// # Errors
/// The mistake: a value, uncertainty or loss out of range, a switch the meter lacks.
pub fn check_reading(meter: &Meter, reading: &ReferenceReading) -> Result<(), RowFaultKind> {
    let (c, u) = (
        reading.capacitance.get(),
        reading.standard_uncertainty.get(),
    );
    if !(c.is_finite() && 0.0 <= c) {
        return Err(RowFaultKind::Capacitance);
    }
    if c > 0.0 && !(0.0 < u && u < c) {
        return Err(RowFaultKind::Uncertainty);
    }
    if !(0.0..1.0).contains(&reading.loss) {
        return Err(RowFaultKind::Loss);
    }
    if reading.switch.position() >= meter.switches.len() {
        return Err(RowFaultKind::Switch);
    }
    Ok(())
}

fn numbers(meter: &Meter, reading: &ReferenceReading) -> Result<Vec<Number>, RowFaultKind> {
    let number = |kind: NumberRead, repeats: Repeats| -> Result<Number, RowFaultKind> {
        if !meter.dial.admits(repeats.mean()) {
            return Err(RowFaultKind::OffDial(repeats.mean()));
        }
        Ok(Number {
            kind,
            reading: repeats.mean().get(),
            u: meter.model().reading_uncertainty(repeats.count()),
        })
    };
    match Plain::of(reading.seen, meter) {
        Plain::Middle(repeats) => Ok(vec![number(NumberRead::Middle, repeats)?]),
        Plain::BothEdges(one, other) => {
            let (low, high) = if one.mean() <= other.mean() {
                (one, other)
            } else {
                (other, one)
            };
            Ok(vec![
                number(NumberRead::LowEdge, low)?,
                number(NumberRead::HighEdge, high)?,
            ])
        }
        Plain::CutArc { free, stop } => {
            let kind = match stop {
                Stop::Low => NumberRead::HighEdge,
                Stop::High => NumberRead::LowEdge,
            };
            Ok(vec![number(kind, free)?])
        }
        Plain::NeverDark(place) => {
            let mut dimmest = number(NumberRead::Dimmest, Repeats::once(place))?;
            dimmest.u = meter
                .model()
                .rounding()
                .hypot(0.5 * shallow(meter, reading));
            Ok(vec![dimmest])
        }
        Plain::Parked(..) | Plain::Nothing => Err(RowFaultKind::NoReading),
    }
}

/// The part of the dial, in its units, over which the lamp is within a tenth of its dimmest.
fn shallow(meter: &Meter, reading: &ReferenceReading) -> f64 {
    let constants = meter.model().constants(reading.switch);
    let load = Load {
        c: reading.capacitance.get(),
        d: reading.loss,
    };
    let dial = &meter.dial;
    DialLaw::of(meter.model().circuit(), constants, load)
        .shallow_span(1.1, dial.span(constants))
        .map_or(dial.high.get() - dial.low.get(), |s| {
            (dial.reading(s.to, constants) - dial.reading(s.from, constants)).abs()
        })
}
