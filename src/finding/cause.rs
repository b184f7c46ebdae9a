//! Causes of a misbehaving lamp and the steps that tell them apart, in words.

use std::fmt;

use crate::quantity::Volt;

/// A possible cause of what was seen, and what to do about it.
#[derive(Clone, Debug, PartialEq)]
pub struct Hypothesis {
    /// The cause.
    pub cause: Cause,
    /// The next step, which confirms it or rules it out.
    pub next: Next,
}

/// Why a lamp misbehaves.
#[derive(Clone, Debug, PartialEq)]
pub enum Cause {
    /// Nothing is connected inside the part, or it is not connected.
    Open,
    /// The part is a short.
    Short,
    /// The capacitance is larger than this switch reaches.
    AboveSpan,
    /// The capacitance is smaller than this switch reaches.
    BelowSpan,
    /// The loss keeps the lamp lit.
    TooLossy {
        /// It is at least this, where a dimmest place was given.
        at_least: Option<f64>,
    },
    /// The load on the dial leg, or the loss of the reference, keeps the lamp lit on any good part here.
    LoadResidual {
        /// The least difference that is left.
        residual: Volt,
    },
    /// The oscillator's sine is distorted.
    Distortion,
    /// The threshold is too high for this switch: the lamp is dark on any part.
    DullLamp,
    /// Lamp, oscillator or wiring.
    Meter,
}

/// What to do next.
#[derive(Clone, Debug, PartialEq)]
pub enum Next {
    /// Note the dimmest place.
    FindDimmest,
    /// Take the switch of this label.
    TakeSwitch(String),
    /// Look whether the lamp lights with open terminals.
    OpenTerminals,
    /// Measure the part's resistance with an ohmmeter.
    Ohmmeter,
    /// Measure the leakage.
    Leakage,
    /// Look at the sine, or put in a good part of this value.
    GoodPart,
}

impl fmt::Display for Cause {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Open => f.write_str("an open part or no contact"),
            Self::Short => f.write_str("a short"),
            Self::AboveSpan => f.write_str("more than this switch reaches"),
            Self::BelowSpan => f.write_str("less than this switch reaches"),
            Self::TooLossy { .. } => f.write_str("too much loss (leaky, dried out, burnt)"),
            Self::LoadResidual { residual } => {
                write!(
                    f,
                    "the load on the dial leg leaves {residual} on any part here"
                )
            }
            Self::Distortion => f.write_str("a distorted sine"),
            Self::DullLamp => f.write_str("the lamp is too dull for this switch"),
            Self::Meter => f.write_str("lamp, oscillator or wiring"),
        }
    }
}

impl fmt::Display for Next {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::FindDimmest => f.write_str("find the dimmest place"),
            Self::TakeSwitch(label) => write!(f, "take switch {label}"),
            Self::OpenTerminals => f.write_str("check that the lamp lights with open terminals"),
            Self::Ohmmeter => f.write_str("measure it with an ohmmeter"),
            Self::Leakage => f.write_str("measure its leakage"),
            Self::GoodPart => f.write_str("try a good part of this value"),
        }
    }
}
