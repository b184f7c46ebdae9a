//! Words, signs and letters that stand beside figures on a part.

use super::codes::{Share, keyed, quantity};
use super::read::RawRow;
use crate::quantity::{Farad, Quantity, Resolution, Volt, engineering};
use serde::Deserialize;
use std::fmt;

/// A word behind a number that makes it a capacitance.
#[derive(Clone, Debug, PartialEq)]
pub struct UnitWord {
    /// The word.
    pub word: String,
    /// The power of ten of the unit in farad.
    pub exponent: i8,
    /// The unit in hundred-thousandths of that power of ten, where it is none.
    pub scale: Option<u32>,
    /// The row of the ranking table.
    pub notation: String,
    /// How often the word means this, 0 to 1.
    pub share: f64,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawUnitWord {
    word: String,
    exponent: i8,
    scale: Option<u32>,
    notation: String,
    share: Option<f64>,
    source: Option<String>,
}

impl RawRow for RawUnitWord {
    type Typed = UnitWord;
    fn key(&self) -> String {
        keyed(&self.word, self.share)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<UnitWord, String> {
        Ok(UnitWord {
            word: some_text(self.word)?,
            exponent: exponent(self.exponent)?,
            scale: self.scale,
            notation: self.notation,
            share: Share::read(self.share, None)?.usual,
        })
    }
}

impl fmt::Display for UnitWord {
    /// Writes "mfd: 1 µF", "cm: 1.11265 times 1 pF".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: ", self.word)?;
        if let Some(scale) = self.scale {
            write!(f, "{} times ", f64::from(scale) / 1e5)?;
        }
        f.write_str(&unit(self.exponent))
    }
}

/// A letter that stands for the decimal point and names the unit.
#[derive(Clone, Debug, PartialEq)]
pub struct PointLetter {
    /// The letter.
    pub letter: char,
    /// Where it may stand.
    pub place: Place,
    /// The power of ten of the unit in farad.
    pub exponent: i8,
    /// The row of the ranking table.
    pub notation: String,
    /// How often the letter means this, 0 to 1.
    pub share: f64,
}

/// Where a letter may stand for the decimal point.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Place {
    /// Before the figures or between them.
    #[default]
    Any,
    /// Only before them.
    Leading,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawPointLetter {
    letter: char,
    place: Option<Place>,
    exponent: i8,
    notation: String,
    share: Option<f64>,
    source: Option<String>,
}

impl RawRow for RawPointLetter {
    type Typed = PointLetter;
    fn key(&self) -> String {
        keyed(&self.letter.to_string(), self.share)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<PointLetter, String> {
        Ok(PointLetter {
            letter: self.letter,
            place: self.place.unwrap_or_default(),
            exponent: exponent(self.exponent)?,
            notation: self.notation,
            share: Share::read(self.share, None)?.usual,
        })
    }
}

impl fmt::Display for PointLetter {
    /// Writes "n for the point, as in 4n7 or n47: 1 nF".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let letter = self.letter;
        match self.place {
            Place::Any => write!(
                f,
                "{letter} for the point, as in 4{letter}7 or {letter}47: "
            )?,
            Place::Leading => write!(f, "{letter} for the point, as in {letter}5: ")?,
        }
        f.write_str(&unit(self.exponent))
    }
}

/// A word or sign behind a number that makes it a rated voltage.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltageWord {
    /// The word.
    pub word: String,
    /// The unit.
    pub scale: Volt,
    /// What it says about the kind of voltage.
    pub kind: VoltageKind,
}

/// Whether a voltage is direct or alternating.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum VoltageKind {
    /// Nothing is said.
    Unstated,
    /// Direct.
    Dc,
    /// Alternating, effective.
    Ac,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawVoltageWord {
    word: String,
    scale: String,
    kind: VoltageKind,
    source: Option<String>,
}

impl RawRow for RawVoltageWord {
    type Typed = VoltageWord;
    fn key(&self) -> String {
        self.word.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<VoltageWord, String> {
        Ok(VoltageWord {
            word: some_text(self.word)?,
            scale: quantity(&self.scale)?,
            kind: self.kind,
        })
    }
}

impl fmt::Display for VoltageWord {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let kind = match self.kind {
            VoltageKind::Unstated => "kind not stated",
            VoltageKind::Dc => "direct",
            VoltageKind::Ac => "alternating",
        };
        write!(f, "{}: {}, {kind}", self.word, self.scale)
    }
}

/// A letter that stands for the decimal point of a rated voltage.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltagePoint {
    /// The letter.
    pub letter: char,
    /// The unit.
    pub scale: Volt,
    /// How often the letter means this, 0 to 1.
    pub share: f64,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawVoltagePoint {
    letter: char,
    scale: String,
    share: Option<f64>,
    source: Option<String>,
}

impl RawRow for RawVoltagePoint {
    type Typed = VoltagePoint;
    fn key(&self) -> String {
        self.letter.to_string()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<VoltagePoint, String> {
        Ok(VoltagePoint {
            letter: self.letter,
            scale: quantity(&self.scale)?,
            share: Share::read(self.share, None)?.usual,
        })
    }
}

impl fmt::Display for VoltagePoint {
    /// Writes "k for the point, as in 1k6: 1 kV".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let letter = self.letter;
        write!(
            f,
            "{letter} for the point, as in 1{letter}6: {}",
            self.scale
        )
    }
}

fn exponent(value: i8) -> Result<i8, String> {
    if (-12..=0).contains(&value) {
        Ok(value)
    } else {
        Err(format!("the power of ten {value} is not -12 to 0"))
    }
}

pub(super) fn some_text(word: String) -> Result<String, String> {
    if word.trim().is_empty() {
        Err("the word is empty".to_owned())
    } else {
        Ok(word)
    }
}

fn unit(exponent: i8) -> String {
    engineering(
        10f64.powi(i32::from(exponent)),
        Resolution::Nominal,
        Farad::SYMBOL,
    )
}
