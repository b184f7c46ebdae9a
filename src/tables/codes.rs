//! Letters and digits that stand for a tolerance, a rated voltage or a power of ten.

use super::read::RawRow;
use crate::quantity::{Quantity, Tolerance, Volt, parse};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::fmt;

/// How often a mark with several meanings has this one.
#[derive(Clone, Debug, PartialEq)]
pub struct Share {
    /// On any part, 0 to 1.
    pub usual: f64,
    /// On parts of the kinds named, instead.
    pub on: BTreeMap<String, f64>,
}

impl Share {
    pub(super) fn read(
        usual: Option<f64>,
        on: Option<BTreeMap<String, f64>>,
    ) -> Result<Self, String> {
        let share = Self {
            usual: usual.unwrap_or(1.0),
            on: on.unwrap_or_default(),
        };
        let is_share = |value: &f64| 0.0 <= *value && *value <= 1.0;
        if is_share(&share.usual) && share.on.values().all(is_share) {
            Ok(share)
        } else {
            Err("a share lies from 0 to 1".to_owned())
        }
    }
}

/// What a tolerance letter may mean.
#[derive(Clone, Debug, PartialEq)]
pub struct ToleranceLetter {
    /// The letter.
    pub letter: char,
    /// From 10 pF up; `None` says nothing about the limits.
    pub limits: Option<Tolerance>,
    /// Below 10 pF, where it differs.
    pub below_ten_picofarads: Option<Tolerance>,
    /// How often the letter means this.
    pub share: Share,
    /// Whether published lists agree.
    pub standing: Standing,
}

/// Whether published lists agree on a row.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    /// They agree.
    Agreed,
    /// They differ; the row is one of several answers.
    Disputed,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawToleranceLetter {
    letter: char,
    limits: Option<String>,
    #[serde(rename = "below_10_pF")]
    below_ten_picofarads: Option<String>,
    share: Option<f64>,
    share_on: Option<BTreeMap<String, f64>>,
    disputed: Option<bool>,
    source: Option<String>,
}

impl RawRow for RawToleranceLetter {
    type Typed = ToleranceLetter;
    fn key(&self) -> String {
        keyed(&self.letter.to_string(), self.share)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<ToleranceLetter, String> {
        Ok(ToleranceLetter {
            letter: self.letter,
            limits: self.limits.as_deref().map(tolerance).transpose()?,
            below_ten_picofarads: self
                .below_ten_picofarads
                .as_deref()
                .map(tolerance)
                .transpose()?,
            share: Share::read(self.share, self.share_on)?,
            standing: if self.disputed == Some(true) {
                Standing::Disputed
            } else {
                Standing::Agreed
            },
        })
    }
}

impl fmt::Display for ToleranceLetter {
    /// Writes "J: ±5 %" or "C: ±0.25 %, below 10 pF ±0.25 pF".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: ", self.letter)?;
        match (self.limits, self.below_ten_picofarads) {
            (Some(limits), None) => write!(f, "{limits}")?,
            (Some(limits), Some(below)) => write!(f, "{limits}, below 10 pF {below}")?,
            (None, Some(below)) => write!(f, "stated elsewhere, below 10 pF {below}")?,
            (None, None) => f.write_str("no agreed meaning")?,
        }
        match self.standing {
            Standing::Agreed => Ok(()),
            Standing::Disputed => f.write_str(" (disputed)"),
        }
    }
}

/// A word that stands for a tolerance.
#[derive(Clone, Debug, PartialEq)]
pub struct ToleranceWord {
    /// The word.
    pub word: String,
    /// What it says.
    pub limits: Tolerance,
    /// How often it means that.
    pub share: f64,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawToleranceWord {
    word: String,
    limits: String,
    share: Option<f64>,
    source: Option<String>,
}

impl RawRow for RawToleranceWord {
    type Typed = ToleranceWord;
    fn key(&self) -> String {
        self.word.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<ToleranceWord, String> {
        Ok(ToleranceWord {
            limits: tolerance(&self.limits)?,
            share: Share::read(self.share, None)?.usual,
            word: self.word,
        })
    }
}

impl fmt::Display for ToleranceWord {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.limits {
            Tolerance::Minimum => write!(f, "{}: guaranteed minimum, no upper limit", self.word),
            limits => write!(f, "{}: {limits}", self.word),
        }
    }
}

/// A letter of the voltage code, and the digits it is seen with.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltageCode {
    /// The letter behind the digit.
    pub letter: char,
    /// The voltage with the digit 0.
    pub mantissa: Volt,
    /// The digits, the power of ten each.
    pub digits: Vec<u8>,
}

impl VoltageCode {
    /// Returns the voltage of a digit and this letter.
    pub fn voltage(&self, digit: u8) -> Volt {
        Volt::new((self.mantissa.get() * 100.0).round() * 10f64.powi(i32::from(digit)) / 100.0)
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawVoltageCode {
    letter: char,
    mantissa: f64,
    digits: Vec<u8>,
    source: Option<String>,
}

impl RawRow for RawVoltageCode {
    type Typed = VoltageCode;
    fn key(&self) -> String {
        self.letter.to_string()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<VoltageCode, String> {
        if !(1.0..10.0).contains(&self.mantissa) {
            return Err(format!("the mantissa {} is not 1 to 10", self.mantissa));
        }
        if !self.digits.is_sorted_by(|a, b| a < b) || self.digits.iter().any(|&digit| digit > 9) {
            return Err("the digits are not single digits in order".to_owned());
        }
        Ok(VoltageCode {
            letter: self.letter,
            mantissa: Volt::new(self.mantissa),
            digits: self.digits,
        })
    }
}

impl fmt::Display for VoltageCode {
    /// Writes "0J 6.3 V, 1J 63 V, 2J 630 V".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut separator = "";
        for &digit in &self.digits {
            let volts = self.voltage(digit);
            write!(f, "{separator}{digit}{} {volts}", self.letter)?;
            separator = ", ";
        }
        Ok(())
    }
}

/// A single letter for the rated voltage of a chip part.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltageLetter {
    /// The letter.
    pub letter: char,
    /// The rated voltage.
    pub volts: Volt,
    /// How often the letter means this.
    pub share: Share,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawVoltageLetter {
    letter: char,
    volts: String,
    share: Option<f64>,
    share_on: Option<BTreeMap<String, f64>>,
    source: Option<String>,
}

impl RawRow for RawVoltageLetter {
    type Typed = VoltageLetter;
    fn key(&self) -> String {
        keyed(&self.letter.to_string(), self.share)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<VoltageLetter, String> {
        Ok(VoltageLetter {
            letter: self.letter,
            volts: quantity(&self.volts)?,
            share: Share::read(self.share, self.share_on)?,
        })
    }
}

impl fmt::Display for VoltageLetter {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.letter, self.volts)
    }
}

/// The last digit of a code: the power of ten in picofarad.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Multiplier {
    /// The digit.
    pub digit: u8,
    /// The power of ten.
    pub exponent: i8,
    /// On which parts.
    pub on: Parts,
}

/// The parts that a multiplier is used on.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Parts {
    /// All.
    Any,
    /// Those without polarity.
    NonPolar,
    /// Those with polarity.
    Polar,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawMultiplier {
    digit: u8,
    exponent: i8,
    on: Parts,
    source: Option<String>,
}

impl RawRow for RawMultiplier {
    type Typed = Multiplier;
    fn key(&self) -> String {
        format!("{} {:?}", self.digit, self.on)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<Multiplier, String> {
        if self.digit > 9 || !(-3..=9).contains(&self.exponent) {
            return Err("a multiplier is one digit and a power of ten from -3 to 9".to_owned());
        }
        Ok(Multiplier {
            digit: self.digit,
            exponent: self.exponent,
            on: self.on,
        })
    }
}

impl fmt::Display for Multiplier {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: times 10^{} pF", self.digit, self.exponent)?;
        f.write_str(match self.on {
            Parts::Any => "",
            Parts::NonPolar => ", on parts without polarity",
            Parts::Polar => ", on parts with polarity",
        })
    }
}

/// The key of a row among others with the same mark: the larger share comes first.
pub(super) fn keyed(mark: &str, share: Option<f64>) -> String {
    format!("{mark} {:.4}", 1.0 - share.unwrap_or(1.0))
}

pub(super) fn tolerance(text: &str) -> Result<Tolerance, String> {
    Tolerance::parse(text).map_err(|refusal| refusal.to_string())
}

pub(super) fn quantity<Q: Quantity>(text: &str) -> Result<Q, String> {
    parse(text).map_err(|refusal| refusal.to_string())
}
