//! What the meter needs to know of a part, and what it gives back.

use std::fmt;

use super::{DialReading, Lamp, Switch};
use crate::quantity::{Farad, Fraction, Uncertain, Volt};
use crate::tables::Family;

/// A part as the meter is to expect it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Part {
    /// Nominal capacitance (series form).
    pub capacitance: Farad,
    /// Lower limit in force.
    pub low: Option<Farad>,
    /// Upper limit in force; `None` too for a guaranteed minimum.
    pub high: Option<Farad>,
    /// Loss (tan δ) taken for granted where it is not measured.
    pub loss: AssumedLoss,
    /// The family, for the voltage a polarised part may see.
    pub family: Option<Family>,
}

impl Part {
    /// Makes a part of which nothing but the capacitance is known, and that it has no loss.
    pub fn without_loss(capacitance: Farad) -> Self {
        Self {
            capacitance,
            low: None,
            high: None,
            loss: AssumedLoss {
                value: 0.0,
                standard_uncertainty: 0.0,
            },
            family: None,
        }
    }
}

/// A loss (tan δ, series form) that is assumed, and how far it is to be trusted.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AssumedLoss {
    /// The loss.
    pub value: f64,
    /// Its standard uncertainty.
    pub standard_uncertainty: f64,
}

/// An end of the dial's travel, by its printed number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stop {
    /// The smallest printed number.
    Low,
    /// The largest printed number.
    High,
}

impl fmt::Display for Stop {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Low => "low",
            Self::High => "high",
        })
    }
}

/// Which ends of a dark arc are cut off by the stops.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Cut {
    /// Both edges can be seen.
    Neither,
    /// One edge lies beyond this stop.
    At(Stop),
    /// The arc covers the whole travel.
    Both,
}

/// The part of the dial over which the lamp is dark, clipped to the travel; `from` ≤ `to` as printed numbers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DarkArc {
    /// The smaller printed number.
    pub from: DialReading,
    /// The larger printed number.
    pub to: DialReading,
    /// Which ends are stops, not edges.
    pub cut: Cut,
}

/// Where the middle of the dark arc falls for parts at their limits; `from` ≤ `to` as printed numbers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// The smaller printed number.
    pub from: DialReading,
    /// The larger printed number.
    pub to: DialReading,
    /// Which ends are stops because the limit lies beyond them.
    pub cut: Cut,
}

/// What to expect of a part on a switch.
#[derive(Clone, Debug, PartialEq)]
pub struct Prediction {
    /// The switch.
    pub switch: Switch,
    /// Where the difference is least within the travel.
    pub balance: DialReading,
    /// The stop beyond which the free optimum lies, if it does.
    pub beyond: Option<Stop>,
    /// The least difference, peak.
    pub residual: Volt,
    /// The dark arc; `None` if the lamp never goes dark.
    pub dark: Option<DarkArc>,
    /// The middle of the dark arc that can be seen.
    pub expected: Option<DialReading>,
    /// Where good parts fall; `None` if no limits are known.
    pub band: Option<Band>,
    /// The voltage the part will see at balance, peak.
    pub part_voltage: Volt,
    /// The relative standard uncertainty of a single reading there; `None` if it gives no value.
    pub uncertainty: Option<Fraction>,
    /// What the person should know first.
    pub cautions: Vec<Caution>,
}

/// Something to know before the part is connected or the dial is turned.
#[derive(Clone, Debug, PartialEq)]
pub enum Caution {
    /// More alternating voltage than a polarised part should see without bias.
    DoNotConnect {
        /// The peak voltage on the part.
        peak: Volt,
        /// The limit for its family, peak.
        limit: Volt,
        /// The label of a switch that keeps to the limit.
        better: Option<String>,
    },
    /// The part nulls beyond a stop.
    OutOfSpan {
        /// The stop.
        stop: Stop,
        /// The label of a switch whose span holds the part.
        better: Option<String>,
    },
    /// The lamp cannot go dark on this part.
    NeverDark {
        /// The least difference, peak.
        residual: Volt,
    },
    /// A stop cuts the dark arc: read the free edge.
    ArcCut {
        /// The stop that cuts it.
        stop: Stop,
    },
}

impl Caution {
    /// Returns whether the caution must be seen before the part is connected.
    pub fn is_urgent(&self) -> bool {
        matches!(self, Self::DoNotConnect { .. })
    }
}

impl fmt::Display for Caution {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::DoNotConnect {
                peak,
                limit,
                better,
            } => {
                write!(
                    f,
                    "do not connect: {peak} peak on a polarised part, at most {limit}"
                )?;
                match better {
                    Some(label) => write!(f, "; switch {label} keeps to it"),
                    None => f.write_str("; no switch of this meter keeps to it"),
                }
            }
            Self::OutOfSpan { stop, better } => {
                write!(f, "nulls beyond the {stop} stop")?;
                match better {
                    Some(label) => write!(f, "; take switch {label}"),
                    None => f.write_str("; no switch of this meter reaches it"),
                }
            }
            Self::NeverDark { residual } => {
                write!(
                    f,
                    "the lamp stays lit: {residual} remain at the dimmest place"
                )
            }
            Self::ArcCut { stop } => {
                write!(f, "the {stop} stop cuts the dark arc: read the other edge")
            }
        }
    }
}

/// What a reading says about a part.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// The switch it was read on.
    pub switch: Switch,
    /// The capacitance, as far as the reading tells it.
    pub value: Value,
    /// The loss, as far as the reading tells it.
    pub loss: LossSeen,
    /// Where the uncertainty comes from, largest first; empty without a value.
    pub contributions: Vec<Contribution>,
}

/// What a reading says about the capacitance.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Value {
    /// A value with its uncertainty.
    Estimate(Estimate),
    /// A parked lamp: a dark one proves that the part lies between the two, a lit one that it does not.
    Window {
        /// What the lamp did.
        lamp: Lamp,
        /// The lower end, uncertain.
        low: Uncertain<Farad>,
        /// The upper end, uncertain; `None` when there is none.
        high: Option<Uncertain<Farad>>,
    },
    /// Less than the open terminals alone: nothing is connected.
    Open,
    /// No value: the lamp was dark everywhere, or never dark without a dimmest place.
    Unknown,
}

/// A measured capacitance (series form).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Estimate {
    /// The capacitance.
    pub capacitance: Farad,
    /// Standard uncertainty common to all parts of the session: the meter's.
    pub common: Farad,
    /// Standard uncertainty of this reading alone.
    pub own: Farad,
}

impl Estimate {
    /// Returns the value with common and own standard uncertainty combined.
    pub fn combined(self) -> Uncertain<Farad> {
        let u = self.common.get().hypot(self.own.get());
        Uncertain {
            value: self.capacitance,
            standard_uncertainty: Farad::new(u),
        }
    }
}

/// What the dark arc says about the loss (tan δ, series form).
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct LossSeen {
    /// The loss, only where it is proven to differ from none.
    pub proven: Option<f64>,
    /// The other candidate: the arc fixes only the distance from the loss that balances best.
    pub other: Option<f64>,
    /// 95 % lower limit, with a proven loss or a lamp that never goes dark.
    pub at_least: Option<f64>,
    /// 95 % upper limit, where no loss is proven.
    pub below: Option<f64>,
}

/// One part of the standard uncertainty of a capacitance.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Contribution {
    /// Where it comes from.
    pub source: Source,
    /// The standard uncertainty it contributes.
    pub share: Farad,
}

/// Where uncertainty comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Source {
    /// The resistor of the switch.
    RangeResistor,
    /// The reference capacitor.
    Reference,
    /// The dial's resistance: total, or the common factor of measured points.
    DialTotal,
    /// The dial's end resistance.
    DialEnd,
    /// The stray capacitance of the terminals.
    Stray,
    /// The lamp's threshold.
    Threshold,
    /// All constants of the meter together, as calibrated.
    Calibration,
    /// The dial reading.
    Reading,
    /// The loss of the part, which was assumed.
    Loss,
}

impl fmt::Display for Source {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::RangeResistor => "the resistor of the switch",
            Self::Reference => "the reference capacitor",
            Self::DialTotal => "the dial's resistance",
            Self::DialEnd => "the dial's end resistance",
            Self::Stray => "the stray capacitance",
            Self::Threshold => "the lamp's threshold",
            Self::Calibration => "the calibration",
            Self::Reading => "the dial reading",
            Self::Loss => "the loss of the part",
        })
    }
}

impl Measured {
    /// Returns the estimate, where there is one.
    pub fn estimate(&self) -> Option<Estimate> {
        match self.value {
            Value::Estimate(estimate) => Some(estimate),
            _ => None,
        }
    }
}
