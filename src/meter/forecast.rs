//! From a known part to the numbers that a person reads: the inverse of `estimate.rs`, for calibrating.
//!
//! A middle is that of the *visible* arc, the mean of its two edge readings, wherever the dial bends and a stop cuts. Where
//! the lamp would not quite go dark both edges stand at the place that comes nearest to it, so that a fit may pass through;
//! where there is none either (a part so large that it is as good as a short), at that of the textbook law R1·Cx = R2·C2.

use super::Meter;
use super::balance::DialLaw;
use super::circuit::{Constants, Load};

/// What a number read stands for; low and high are printed numbers, whatever the wiring.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NumberRead {
    /// The middle of the dark arc that is seen.
    Middle,
    /// The end of the dark arc at the smaller number.
    LowEdge,
    /// The end of the dark arc at the larger number.
    HighEdge,
    /// The dimmest place of a lamp that never goes dark.
    Dimmest,
}

/// A part on one switch of a meter whose constants are these.
#[derive(Clone, Copy)]
pub(super) struct Forecast<'a> {
    meter: &'a Meter,
    constants: &'a Constants,
    law: DialLaw,
    /// Dial resistance of the textbook law, ohm.
    textbook: f64,
}

impl<'a> Forecast<'a> {
    pub(super) fn of(meter: &'a Meter, constants: &'a Constants, load: Load) -> Self {
        Self {
            meter,
            constants,
            law: DialLaw::of(meter.model().circuit(), constants, load),
            textbook: constants.r1 * load.c / constants.c2,
        }
    }

    /// The number.
    pub(super) fn number(&self, kind: NumberRead) -> f64 {
        let dial = &self.meter.dial;
        if kind == NumberRead::Dimmest {
            let balance = self.law.best_balance(dial.span(self.constants));
            return dial.reading(balance.r, self.constants);
        }
        let (low, high) = self.edges();
        match kind {
            NumberRead::LowEdge => low,
            NumberRead::HighEdge => high,
            NumberRead::Middle | NumberRead::Dimmest => {
                let (first, last) = (dial.low.get(), dial.high.get());
                if high <= first || last <= low {
                    // Wholly beyond a stop nothing is seen; the free middle leads a fit back.
                    return 0.5 * (low + high);
                }
                0.5 * (low.max(first) + high.min(last))
            }
        }
    }

    /// The edges as printed numbers, wherever the stops are, smaller first.
    fn edges(&self) -> (f64, f64) {
        let free = self.law.edges_or_nearest(self.constants.vth);
        let (r1, r2) = free.unwrap_or((self.textbook, self.textbook));
        let dial = &self.meter.dial;
        let (one, other) = (
            dial.reading(r1, self.constants),
            dial.reading(r2, self.constants),
        );
        (one.min(other), one.max(other))
    }
}
