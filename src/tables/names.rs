//! Words for what a part is made of, where it may stand and what climate it bears.

use super::Family;
use super::read::RawRow;
use super::words::some_text;
use serde::Deserialize;
use std::fmt;

/// A word that names a family.
#[derive(Clone, Debug, PartialEq)]
pub struct FamilyWord {
    /// The word.
    pub word: String,
    /// The family.
    pub family: Family,
    /// The kinds of the ranking table that the part can be; empty: those of the family.
    pub kinds: Vec<String>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawFamilyWord {
    word: String,
    family: String,
    kinds: Option<Vec<String>>,
    source: Option<String>,
}

impl RawRow for RawFamilyWord {
    type Typed = FamilyWord;
    fn key(&self) -> String {
        self.word.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<FamilyWord, String> {
        Ok(FamilyWord {
            word: some_text(self.word)?,
            family: family(&self.family)?,
            kinds: self.kinds.unwrap_or_default(),
        })
    }
}

impl fmt::Display for FamilyWord {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.word, self.family)
    }
}

/// A class of interference suppression.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SafetyWord {
    /// The class: "X2".
    pub word: String,
    /// Where such a part may stand.
    pub usage: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawSafetyWord {
    word: String,
    r#use: String,
    source: Option<String>,
}

impl RawRow for RawSafetyWord {
    type Typed = SafetyWord;
    fn key(&self) -> String {
        self.word.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<SafetyWord, String> {
        if !self.word.starts_with(['X', 'Y']) || self.word.chars().count() != 2 {
            return Err("a class is X or Y and a digit".to_owned());
        }
        Ok(SafetyWord {
            word: self.word,
            usage: self.r#use,
        })
    }
}

impl fmt::Display for SafetyWord {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.word, self.usage)
    }
}

/// The figures one place of a climatic category can have.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ClimateFigure {
    /// The place.
    pub figure: ClimatePlace,
    /// The figures as printed.
    pub values: Vec<String>,
}

/// A place of a climatic category.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ClimatePlace {
    /// Third: days of damp heat.
    Days,
    /// Second: highest temperature.
    Highest,
    /// First: lowest temperature without its minus sign.
    Lowest,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawClimateFigure {
    figure: ClimatePlace,
    values: Vec<String>,
    source: Option<String>,
}

impl RawRow for RawClimateFigure {
    type Typed = ClimateFigure;
    fn key(&self) -> String {
        format!("{:?}", self.figure)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<ClimateFigure, String> {
        Ok(ClimateFigure {
            figure: self.figure,
            values: self.values,
        })
    }
}

impl fmt::Display for ClimateFigure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let figure = match self.figure {
            ClimatePlace::Days => "days of damp heat",
            ClimatePlace::Highest => "highest temperature, °C",
            ClimatePlace::Lowest => "lowest temperature, °C, without its minus",
        };
        write!(f, "{figure}: {}", self.values.join(" "))
    }
}

/// Returns the family with a name, or says that there is none.
pub(super) fn family(name: &str) -> Result<Family, String> {
    Family::named(name).ok_or_else(|| format!("`{name}` is no family"))
}
