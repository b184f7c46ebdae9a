//! What a marking may mean.

use crate::quantity::{Farad, Tolerance, Volt};
use crate::tables::Family;

/// All that a marking may mean, most plausible reading first.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Decoding {
    /// The marking as given.
    pub marking: String,
    /// At most 50 readings, most plausible first; the plausibilities sum to at most 1, what is missing being
    /// "none of these".
    pub readings: Vec<Reading>,
    /// The tokens that no reading accounts for.
    pub unexplained: Vec<String>,
    /// How many further readings were left out.
    pub omitted: usize,
    /// What the marking says if it says nothing of the value, where that is plausible at all.
    pub without_value: Option<WithoutValue>,
}

/// What a marking says if it says nothing of the value: a date, a voltage, a family, other text.
#[derive(Clone, Debug, PartialEq)]
pub struct WithoutValue {
    /// How probable it is that no reading is right, 0 to 1.
    pub plausibility: f64,
    /// What each piece of the marking was used for.
    pub used: Vec<Used>,
    /// The reasons.
    pub why: Vec<String>,
}

/// One reading of a marking.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The nominal capacitance.
    pub capacitance: Farad,
    /// The tolerance marked, if any.
    pub tolerance: Option<Tolerance>,
    /// The rated voltage marked, if any.
    pub voltage: Option<RatedVoltage>,
    /// The family given or found in the marking, if any.
    pub family: Option<Family>,
    /// The temperature characteristic marked: "X7R", "NP0".
    pub characteristic: Option<String>,
    /// The interference-suppression class marked: "X2", "X1/Y2".
    pub safety_class: Option<String>,
    /// The date marked, in words.
    pub date: Option<String>,
    /// The sections of a part with several capacitors in one can.
    pub sections: Option<Vec<Farad>>,
    /// How probable this reading is, from the marking alone, 0 to 1.
    pub plausibility: f64,
    /// What each piece of the marking was used for, in the order of the marking.
    pub used: Vec<Used>,
    /// The tokens this reading leaves unexplained.
    pub unexplained: Vec<String>,
    /// The reasons that made this reading more or less plausible.
    pub why: Vec<String>,
}

/// The rated voltages of a part. At least one is given.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct RatedVoltage {
    /// Direct voltage, or a voltage of no stated kind (which is direct by custom).
    pub dc: Option<Volt>,
    /// Effective alternating voltage; for an X/Y part that of the X duty.
    pub ac: Option<Volt>,
    /// Effective alternating voltage of the Y duty.
    pub y: Option<Volt>,
}

/// A piece of the marking and what it was used for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Used {
    /// The piece as it stands in the marking.
    pub text: String,
    /// What it was used for.
    pub role: Role,
}

/// What a piece of a marking is used for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Role {
    /// The capacitance.
    Value,
    /// The tolerance.
    Tolerance,
    /// A rated voltage.
    Voltage,
    /// The family or dielectric.
    Family,
    /// The temperature characteristic.
    Characteristic,
    /// The interference-suppression class.
    SafetyClass,
    /// The date of make.
    Date,
    /// Text that says nothing about the part's values.
    Text,
}

impl Role {
    /// Returns the word of the JSON contract.
    pub fn word(self) -> &'static str {
        match self {
            Self::Value => "value",
            Self::Tolerance => "tolerance",
            Self::Voltage => "voltage",
            Self::Family => "family",
            Self::Characteristic => "characteristic",
            Self::SafetyClass => "safety class",
            Self::Date => "date",
            Self::Text => "text",
        }
    }
}

impl RatedVoltage {
    /// Makes a direct voltage.
    pub fn dc(volts: f64) -> Self {
        Self {
            dc: Some(Volt::new(volts)),
            ..Self::default()
        }
    }

    /// Makes an alternating voltage.
    pub fn ac(volts: f64) -> Self {
        Self {
            ac: Some(Volt::new(volts)),
            ..Self::default()
        }
    }
}

impl std::fmt::Display for RatedVoltage {
    /// Writes "100 V dc", "250 V ac" or "630 V dc, 300 V ac".
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let parts = [(self.dc, "dc"), (self.ac, "ac"), (self.y, "ac as Y")];
        let mut separator = "";
        for (volts, kind) in parts {
            if let Some(volts) = volts {
                write!(f, "{separator}{volts} {kind}")?;
                separator = ", ";
            }
        }
        Ok(())
    }
}

impl Decoding {
    /// Returns the most plausible reading.
    pub fn best(&self) -> Option<&Reading> {
        self.readings.first()
    }
}

impl Reading {
    /// Returns the reading in a few words: "220 nF ±5 %, 100 V dc".
    pub fn in_words(&self) -> String {
        let mut words = self.capacitance.to_string();
        match self.tolerance {
            Some(tolerance) => words.extend([" ", &tolerance.to_string()]),
            None => words.push_str(", no tolerance marked"),
        }
        let voltage = self.voltage.map(|voltage| voltage.to_string());
        for extra in [&voltage, &self.safety_class, &self.characteristic]
            .into_iter()
            .flatten()
        {
            words.push_str(", ");
            words.push_str(extra);
        }
        words
    }
}
