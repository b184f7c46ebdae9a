//! Values and voltages that parts are made for.

use super::read::RawRow;
use serde::Deserialize;
use std::fmt;

/// A series of preferred values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ValueSeries {
    /// Its name.
    pub series: Series,
    /// The mantissas, 100 to 999, rising.
    pub mantissas: Vec<u16>,
}

/// The series, the coarse ones first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Deserialize)]
pub enum Series {
    /// 3 values a decade.
    E3,
    /// 6 values a decade.
    E6,
    /// 12 values a decade.
    E12,
    /// 24 values a decade.
    E24,
    /// 48 values a decade.
    E48,
    /// 96 values a decade.
    E96,
    /// 192 values a decade.
    E192,
    /// Round values of parts made before the series came into use.
    #[serde(rename = "legacy")]
    Legacy,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawValueSeries {
    series: Series,
    mantissas: Vec<u16>,
    source: Option<String>,
}

impl RawRow for RawValueSeries {
    type Typed = ValueSeries;
    fn key(&self) -> String {
        format!("{:02}", self.series as u8)
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<ValueSeries, String> {
        if !self.mantissas.iter().all(|m| (100..=999).contains(m))
            || !self.mantissas.is_sorted_by(|a, b| a < b)
        {
            return Err("the mantissas are not rising numbers from 100 to 999".to_owned());
        }
        Ok(ValueSeries {
            series: self.series,
            mantissas: self.mantissas,
        })
    }
}

impl fmt::Display for ValueSeries {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:?}:", self.series)?;
        for mantissa in &self.mantissas {
            write!(f, " {}.{:02}", mantissa / 100, mantissa % 100)?;
        }
        Ok(())
    }
}

/// A set of usual rated voltages.
#[derive(Clone, Debug, PartialEq)]
pub struct RatedVoltages {
    /// What they are.
    pub name: String,
    /// In volt, rising.
    pub volts: Vec<f64>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawRatedVoltages {
    name: String,
    volts: Vec<f64>,
    source: Option<String>,
}

impl RawRow for RawRatedVoltages {
    type Typed = RatedVoltages;
    fn key(&self) -> String {
        self.name.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<RatedVoltages, String> {
        if self.volts.iter().all(|v| v.is_finite()) && self.volts.is_sorted_by(|a, b| a < b) {
            Ok(RatedVoltages {
                name: self.name,
                volts: self.volts,
            })
        } else {
            Err("the voltages do not rise".to_owned())
        }
    }
}

impl fmt::Display for RatedVoltages {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:", self.name)?;
        for volts in &self.volts {
            write!(f, " {volts}")?;
        }
        Ok(())
    }
}
