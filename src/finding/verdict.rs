//! What is said about a part.

use std::fmt;

use crate::meter::{DialReading, Measured, Meter, Seen, Switch};
use crate::quantity::{Farad, Fraction, Ohm, Tolerance, Volt};
use crate::tables::Family;

/// The word.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Word {
    /// Inside the limits in force.
    Inside,
    /// Outside the limits in force.
    Outside,
    /// Cannot be told from this reading.
    Undecided,
    /// Open, short, or far too lossy.
    Dead,
}

impl Word {
    /// Returns the word of the contract.
    pub fn word(self) -> &'static str {
        match self {
            Self::Inside => "inside",
            Self::Outside => "outside",
            Self::Undecided => "undecided",
            Self::Dead => "dead",
        }
    }
}

impl fmt::Display for Word {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.word())
    }
}

/// Whether something was tested, and how it came out; "good" is never said of what was not tested.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Tested {
    /// Tested and within its limit.
    Ok,
    /// Tested and beyond its limit.
    Bad,
    /// Not tested.
    NotTested,
}

/// Where the limits in force come from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LimitsFrom {
    /// From the tolerance marked on the part.
    Marked,
    /// A house rule gives or moves a limit.
    House,
    /// Nothing is marked: the usual tolerance of the family.
    Family,
    /// Nothing is marked and the family is not known: ±20 %.
    Assumed,
}

impl LimitsFrom {
    /// Returns the word of the contract.
    pub fn word(self) -> &'static str {
        match self {
            Self::Marked => "marked",
            Self::House => "house",
            Self::Family => "family",
            Self::Assumed => "assumed",
        }
    }
}

/// The limits in force for one reading of the marking.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits {
    /// The lowest capacitance inside.
    pub low: Farad,
    /// The highest capacitance inside; `None` for a guaranteed minimum.
    pub high: Option<Farad>,
    /// Where they come from.
    pub from: LimitsFrom,
    /// The tolerance the part was made to: marked, else usual. The prior belongs to it, not to a house rule.
    pub made_to: Tolerance,
}

/// House rules: what the tray file says about deciding.
#[derive(Clone, Debug, PartialEq)]
pub struct HouseRules {
    /// How sure a word must be, 0.5 to 1.
    pub confidence: f64,
    /// The prior.
    pub prior: PriorKind,
    /// Share of salvaged parts taken to have drifted.
    pub drifted_share: f64,
    /// Stricter limits by family, and limits for parts without a mark.
    pub tolerances: Vec<(Family, Tolerance)>,
    /// The same for families not named.
    pub any_tolerance: Option<Tolerance>,
    /// Remind of the check part after so many parts.
    pub check_every: Option<u32>,
}

/// What is known of a part before it is measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PriorKind {
    /// Made to its tolerance, a share of it drifted.
    Salvage,
    /// Nothing.
    Flat,
}

impl Default for HouseRules {
    fn default() -> Self {
        Self {
            confidence: 0.95,
            prior: PriorKind::Salvage,
            drifted_share: 0.2,
            tolerances: Vec::new(),
            any_tolerance: None,
            check_every: None,
        }
    }
}

/// What was observed, and on what.
#[derive(Clone, Copy, Debug)]
pub struct Observation<'a> {
    /// The meter.
    pub meter: &'a Meter,
    /// The switch.
    pub switch: Switch,
    /// What was seen.
    pub seen: Seen,
    /// What it means.
    pub measured: &'a Measured,
}

/// What else is known about the moment of measuring.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Circumstances {
    /// In degrees Celsius.
    pub temperature: Option<f64>,
    /// Hours since the part was last heated.
    pub heated_hours: Option<f64>,
    /// Insulation resistance.
    pub leakage: Option<Ohm>,
    /// The voltage it was measured at.
    pub leakage_voltage: Option<Volt>,
    /// What the part looks like; "ok" and "good" are the words for nothing wrong.
    pub looks: Option<String>,
    /// Whether the person was asked about a slip and stays with the reading.
    pub reading: ReadingCertainty,
}

/// Whether a reading was looked at twice.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum ReadingCertainty {
    /// Typed once.
    #[default]
    Once,
    /// The person was asked about a slip and typed the same again.
    Confirmed,
}

/// A mistake of the hand that would explain a reading outside its limits.
#[derive(Clone, Debug, PartialEq)]
pub enum Slip {
    /// The part was read on another switch.
    OtherSwitch {
        /// The switch.
        switch: Switch,
        /// Its label.
        label: String,
    },
    /// The number was typed wrong: two neighbouring digits exchanged, or the point misplaced.
    Digits {
        /// What was meant.
        meant: DialReading,
    },
}

impl fmt::Display for Slip {
    /// Writes the question: "switch B?", "46.2?".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::OtherSwitch { label, .. } => write!(f, "switch {label}?"),
            Self::Digits { meant } => write!(f, "{meant}?"),
        }
    }
}

/// How one reading of the marking stands after the measurement.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Standing {
    /// The index of the reading in the decoding; `None` is "none of these".
    pub reading: Option<usize>,
    /// Its posterior probability.
    pub posterior: f64,
}

/// The finding about one part.
#[derive(Clone, Debug, PartialEq)]
pub struct Verdict {
    /// The word.
    pub word: Word,
    /// The index of the reading of the marking that was judged.
    pub chosen: Option<usize>,
    /// The limits in force for it.
    pub limits: Option<Limits>,
    /// Measured value from nominal.
    pub deviation: Option<Fraction>,
    /// Posterior probability of being inside, with the house prior.
    pub probability_inside: Option<f64>,
    /// The same with the flat prior.
    pub probability_flat: Option<f64>,
    /// Posterior probability of the chosen reading.
    pub reading_probability: Option<f64>,
    /// All readings after the measurement, most probable first.
    pub ranking: Vec<Standing>,
    /// The slip that was found, if one would explain the reading: to be asked about.
    pub slip: Option<Slip>,
    /// Whether the value is inside, outside or not known.
    pub value: Tested,
    /// The loss against the family's limit.
    pub loss: Tested,
    /// The leakage against its limit.
    pub leakage: Tested,
    /// What the part looks like.
    pub looks: Tested,
    /// Why, and what to do next: short sentences, most important first.
    pub remarks: Vec<String>,
}
