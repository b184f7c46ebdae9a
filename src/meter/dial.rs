//! From a dial reading to a resistance and back.

use super::balance::{ResistanceSpan, Side};
use super::circuit::Constants;
use super::{Dial, DialReading, Stop, Taper};
use crate::quantity::Ohm;

impl Dial {
    /// Returns the resistance at a reading, for the constants given. Readings beyond the ends go on in a straight line.
    pub(super) fn resistance(&self, reading: f64, constants: &Constants) -> f64 {
        match &self.taper {
            Taper::Linear { .. } => {
                let travel = self.travel(DialReading::new(reading));
                constants.dial_end + constants.dial_total * travel
            }
            Taper::Points { points, .. } => {
                let (from, to) = piece(points, |p| p.0.get(), reading);
                constants.dial_total
                    * interpolate(
                        (from.0.get(), from.1.get()),
                        (to.0.get(), to.1.get()),
                        reading,
                    )
            }
        }
    }

    /// Returns the reading at a resistance, for the constants given; the inverse of [`Self::resistance`].
    pub(super) fn reading(&self, resistance: f64, constants: &Constants) -> f64 {
        match &self.taper {
            Taper::Linear { .. } => {
                let travel = (resistance - constants.dial_end) / constants.dial_total;
                self.low.get() + travel * (self.high.get() - self.low.get())
            }
            Taper::Points { points, .. } => {
                let resistance = resistance / constants.dial_total;
                let (from, to) = if self.is_falling() {
                    piece(points, |p| -p.1.get(), -resistance)
                } else {
                    piece(points, |p| p.1.get(), resistance)
                };
                interpolate(
                    (from.1.get(), from.0.get()),
                    (to.1.get(), to.0.get()),
                    resistance,
                )
            }
        }
    }

    /// Returns whether the dial is straight between two readings, so that middles in reading and in resistance agree.
    pub(super) fn is_straight_between(&self, one: f64, other: f64) -> bool {
        match &self.taper {
            Taper::Linear { .. } => true,
            Taper::Points { points, .. } => {
                let (low, high) = (one.min(other), one.max(other));
                let inner = points
                    .get(1..points.len().saturating_sub(1))
                    .unwrap_or_default();
                !inner.iter().any(|p| low < p.0.get() && p.0.get() < high)
            }
        }
    }

    /// Returns whether the resistance falls as the reading rises.
    pub fn is_falling(&self) -> bool {
        match &self.taper {
            Taper::Linear { .. } => false,
            Taper::Points { points, .. } => match (points.first(), points.last()) {
                (Some(first), Some(last)) => first.1 > last.1,
                _ => false,
            },
        }
    }

    /// Returns the resistances at the two stops, smaller first.
    pub(super) fn span(&self, constants: &Constants) -> ResistanceSpan {
        let (one, other) = (
            self.resistance(self.low.get(), constants),
            self.resistance(self.high.get(), constants),
        );
        ResistanceSpan {
            low: one.min(other),
            high: one.max(other),
        }
    }

    /// Returns the stop at a side of the resistance span.
    pub(super) fn stop_at(&self, side: Side) -> Stop {
        match (side, self.is_falling()) {
            (Side::Lower, false) | (Side::Upper, true) => Stop::Low,
            (Side::Upper, false) | (Side::Lower, true) => Stop::High,
        }
    }

    /// Returns the side of the resistance span at a stop.
    pub(super) fn side_of(&self, stop: Stop) -> Side {
        match (stop, self.is_falling()) {
            (Stop::Low, false) | (Stop::High, true) => Side::Lower,
            (Stop::High, false) | (Stop::Low, true) => Side::Upper,
        }
    }

    /// Returns the printed number at a stop.
    pub fn number_at(&self, stop: Stop) -> DialReading {
        match stop {
            Stop::Low => self.low,
            Stop::High => self.high,
        }
    }

    /// Returns the stop nearer to a reading; the middle counts as near the low one.
    pub fn nearer_stop(&self, reading: DialReading) -> Stop {
        if self.travel(reading) <= 0.5 {
            Stop::Low
        } else {
            Stop::High
        }
    }

    /// Returns how many decimals a reading is written with: one more than the printed divisions have.
    pub fn decimals(&self) -> usize {
        let division = format!("{}", self.division);
        let printed = division
            .split_once('.')
            .map_or(0, |(_, decimals)| decimals.len());
        (printed + 1).min(6)
    }

    /// Writes a reading with as many decimals as the dial supports: one more than its divisions have.
    pub fn show(&self, reading: DialReading) -> String {
        let shown = format!("{:.*}", self.decimals(), reading.get());
        // No minus on zero.
        if shown.bytes().all(|b| matches!(b, b'-' | b'0' | b'.')) {
            shown.replace('-', "")
        } else {
            shown
        }
    }
}

/// The two neighbours between which a key lies; the outermost pair beyond the ends. `points` has at least two rows with
/// rising keys (checked where the profile is read).
fn piece(
    points: &[(DialReading, Ohm)],
    key: impl Fn(&(DialReading, Ohm)) -> f64,
    at: f64,
) -> (&(DialReading, Ohm), &(DialReading, Ohm)) {
    let upper = points
        .partition_point(|p| key(p) <= at)
        .clamp(1, points.len() - 1);
    (&points[upper - 1], &points[upper])
}

fn interpolate(from: (f64, f64), to: (f64, f64), at: f64) -> f64 {
    from.1 + (to.1 - from.1) * ((at - from.0) / (to.0 - from.0))
}
