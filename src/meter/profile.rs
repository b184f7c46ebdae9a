//! A meter as its owner described it.

use super::DialReading;
use super::model::{Fit, Model};
use crate::quantity::{Farad, Fraction, Hertz, Ohm, Volt};

/// A position of the range switch, counted from 0 in the order on the panel; made by a [`Meter`], so that it exists.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Switch(pub(super) usize);

impl Switch {
    /// Returns the position, counted from 0.
    pub fn position(self) -> usize {
        self.0
    }
}

/// A rotation in degrees, for drawing only; positive is clockwise.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Degrees(pub f64);

/// A balance meter, as its owner described it.
#[derive(Clone, Debug)]
pub struct Meter {
    /// Its name.
    pub name: String,
    /// Free text.
    pub note: Option<String>,
    /// Frequency of the oscillator.
    pub frequency: Hertz,
    /// Amplitude of the oscillator, peak.
    pub amplitude: Volt,
    /// The range switch, in the order on the panel.
    pub switches: Vec<RangeSwitch>,
    /// The known capacitor of the dial leg.
    pub reference: Reference,
    /// The dial.
    pub dial: Dial,
    /// Gain-bandwidth product of the follower; `None` for an ideal one.
    pub gain_bandwidth: Option<Hertz>,
    /// How the difference amplifier is driven.
    pub difference: Difference,
    /// Stray capacitance of the open terminals.
    pub stray: Farad,
    /// Half width of its tolerance.
    pub stray_tolerance: Farad,
    /// Peak difference at which the lamp just goes dark.
    pub threshold: Volt,
    /// Its tolerance.
    pub threshold_tolerance: Fraction,
    /// One standard deviation of a reading, in dial units.
    pub repeatability: f64,
    /// Known good parts kept beside the meter.
    pub checks: Vec<CheckPart>,
    /// The calibration in force.
    pub calibration: Option<Calibration>,
    /// What is worked out from all this.
    pub(super) model: Model,
}

/// One position of the range switch.
#[derive(Clone, Debug, PartialEq)]
pub struct RangeSwitch {
    /// What is printed beside it.
    pub label: String,
    /// The range resistor.
    pub resistance: Ohm,
    /// Its tolerance, the half width of a rectangular distribution.
    pub tolerance: Fraction,
}

/// The known capacitor of the dial leg.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reference {
    /// Its capacitance.
    pub capacitance: Farad,
    /// Its tolerance.
    pub tolerance: Fraction,
    /// Its loss, tan δ.
    pub loss: f64,
}

/// The dial.
#[derive(Clone, Debug, PartialEq)]
pub struct Dial {
    /// The smallest printed number.
    pub low: DialReading,
    /// The largest printed number.
    pub high: DialReading,
    /// The smallest printed division.
    pub division: f64,
    /// From reading to resistance.
    pub taper: Taper,
    /// Rotation from `low` to `high`.
    pub sweep: Degrees,
}

/// How the dial's resistance follows its reading.
#[derive(Clone, Debug, PartialEq)]
pub enum Taper {
    /// End resistance plus total resistance times travel.
    Linear {
        /// The total resistance.
        total: Ohm,
        /// The resistance at the low stop.
        end: Ohm,
        /// The tolerance of both, independently.
        tolerance: Fraction,
    },
    /// Measured points joined by straight lines, by rising reading.
    Points {
        /// Reading and resistance; at least two, resistances strictly rising or strictly falling.
        points: Vec<(DialReading, Ohm)>,
        /// Standard uncertainty of their common factor.
        uncertainty: Fraction,
    },
}

/// How the difference amplifier is driven.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Difference {
    /// No load on the dial leg.
    Buffered,
    /// The dial leg drives the divider of two such resistors.
    Divider(Ohm),
    /// The dial leg drives the inverting resistor.
    Inverting(Ohm),
}

/// A known good part kept beside the meter.
#[derive(Clone, Debug, PartialEq)]
pub struct CheckPart {
    /// What it is called.
    pub label: String,
    /// Its capacitance.
    pub capacitance: Farad,
    /// Its relative standard uncertainty.
    pub uncertainty: Fraction,
    /// Its loss, tan δ.
    pub loss: f64,
}

/// A calibration as stored in the profile.
#[derive(Clone, Debug, PartialEq)]
pub struct Calibration {
    /// When it was made, as written.
    pub date: String,
    /// How many readings it rests on.
    pub observations: u32,
    /// Reduced chi-square of the fit.
    pub reduced_chi_square: f64,
    pub(super) fit: Fit,
}

impl Meter {
    pub(super) fn model(&self) -> &Model {
        &self.model
    }

    /// Returns the switches in the order on the panel.
    pub fn switches(&self) -> impl Iterator<Item = Switch> + use<> {
        (0..self.switches.len()).map(Switch)
    }

    /// Returns the switch with this label; upper and lower case alike, if that is unambiguous.
    pub fn switch_named(&self, label: &str) -> Option<Switch> {
        let exact = self.switches.iter().position(|s| s.label == label);
        let loose = || {
            let mut alike = self
                .switches
                .iter()
                .enumerate()
                .filter(|(_, s)| s.label.eq_ignore_ascii_case(label));
            let first = alike.next()?;
            alike.next().is_none().then_some(first.0)
        };
        exact.or_else(loose).map(Switch)
    }

    /// Returns the label of a switch.
    pub fn label(&self, switch: Switch) -> &str {
        self.switches.get(switch.0).map_or("", |s| s.label.as_str())
    }
}

impl Dial {
    /// Returns whether the reading lies on the dial.
    pub fn admits(&self, reading: DialReading) -> bool {
        self.low <= reading && reading <= self.high
    }

    /// Returns the travel of a reading, 0 at `low` to 1 at `high`.
    pub fn travel(&self, reading: DialReading) -> f64 {
        (reading.get() - self.low.get()) / (self.high.get() - self.low.get())
    }
}
