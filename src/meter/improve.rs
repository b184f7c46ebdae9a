//! Which single change would better a meter most, found by changing it in the model.

use std::fmt;

use super::coverage::{along, covered, span};
use super::{Difference, Meter};
use crate::quantity::Fraction;

/// Values looked at for each change of a component.
const N_COMPARED: usize = 25;

/// A change that betters one thing about the meter by half.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Change {
    /// Range resistors known twice as well.
    RangeResistors,
    /// The reference capacitor known twice as well.
    Reference,
    /// The dial's resistance known twice as well.
    Dial,
    /// The stray capacitance known twice as well.
    Stray,
    /// The threshold of the lamp known twice as well.
    Threshold,
    /// All constants known twice as well, for a meter that is calibrated.
    Calibration,
    /// Divisions half as wide, set and read twice as finely.
    Scale,
    /// A lamp that goes dark at half the difference.
    Lamp,
    /// Difference resistors of twice the value.
    DifferenceResistors,
}

/// What a change would bring.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Improvement {
    /// The change.
    pub change: Change,
    /// By how much uncertainties shrink along all spans, in the geometric mean.
    pub narrower: Fraction,
}

impl fmt::Display for Change {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::RangeResistors => "range resistors known twice as well",
            Self::Reference => "a reference capacitor known twice as well",
            Self::Dial => {
                "a dial whose resistance is known twice as well: measure it with an ohmmeter"
            }
            Self::Stray => "a stray capacitance known twice as well: read the open terminals",
            Self::Threshold => "a lamp threshold known twice as well",
            Self::Calibration => "a calibration with parts known twice as well",
            Self::Scale => "a larger dial, set and read twice as finely",
            Self::Lamp => "a lamp that goes dark at half the difference",
            Self::DifferenceResistors => "difference resistors of twice the value",
        })
    }
}

/// What each change would bring, the best first.
pub(super) fn improvements(meter: &Meter) -> Vec<Improvement> {
    let now = typical_uncertainty(meter);
    let of_constants: &[Change] = if meter.calibration.is_some() {
        &[Change::Calibration]
    } else {
        &[
            Change::RangeResistors,
            Change::Reference,
            Change::Dial,
            Change::Stray,
            Change::Threshold,
        ]
    };
    let of_load = match meter.difference {
        Difference::Buffered => None,
        Difference::Divider(_) | Difference::Inverting(_) => Some(Change::DifferenceResistors),
    };
    let mut found: Vec<Improvement> = of_constants
        .iter()
        .copied()
        .chain([Change::Scale, Change::Lamp])
        .chain(of_load)
        .map(|change| {
            let mut bettered = meter.clone();
            bettered.model = meter.model().bettered(change);
            Improvement {
                change,
                narrower: Fraction::new(1.0 - typical_uncertainty(&bettered) / now),
            }
        })
        .filter(|improvement| 0.01 <= improvement.narrower.get())
        .collect();
    found.sort_by(|x, y| y.narrower.get().total_cmp(&x.narrower.get()));
    found
}

/// The geometric mean of the relative uncertainties along all spans; what cannot be measured counts as 100 %.
fn typical_uncertainty(meter: &Meter) -> f64 {
    let mut sum = 0.0;
    let mut n_values = 0;
    for switch in meter.switches() {
        for c in along(span(meter, switch), N_COMPARED) {
            let u = covered(meter, switch, c).best().map_or(1.0, Fraction::get);
            sum += u.clamp(1e-9, 1.0).ln();
            n_values += 1;
        }
    }
    (sum / f64::from(n_values)).exp()
}
