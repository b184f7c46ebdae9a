//! How much alternating voltage a polarised part may see without bias.

use super::read::RawRow;
use super::{Family, TABLES};
use crate::quantity::{Volt, parse};
use serde::Deserialize;
use std::fmt;

/// The highest alternating voltage for a family.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WithoutBias {
    /// The family.
    pub family: Family,
    /// The voltage, peak.
    pub peak: Volt,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct RawWithoutBias {
    family: String,
    peak: String,
    source: Option<String>,
}

impl RawRow for RawWithoutBias {
    type Typed = WithoutBias;
    fn key(&self) -> String {
        self.family.clone()
    }
    fn source(&self) -> Option<&str> {
        self.source.as_deref()
    }
    fn typed(self) -> Result<WithoutBias, String> {
        let family = Family::named(&self.family)
            .ok_or_else(|| format!("no family is called {}", self.family))?;
        let peak = parse(&self.peak).map_err(|refusal| refusal.to_string())?;
        Ok(WithoutBias { family, peak })
    }
}

impl fmt::Display for WithoutBias {
    /// Writes "tantalum: at most 500 mV peak without bias".
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{}: at most {} peak without bias",
            self.family, self.peak
        )
    }
}

/// Returns the highest alternating voltage, peak, that a part of this family should see without direct voltage beside it;
/// `None` for families without polarity.
pub fn peak_without_bias(family: Family) -> Option<Volt> {
    TABLES
        .without_bias()
        .find(|row| family.is_one_of(row.family))
        .map(|row| row.peak)
}

#[cfg(test)]
mod tests {
    use super::super::{Dielectric, Group};
    use super::*;

    #[test]
    fn polarised_families_have_a_limit_and_others_none() {
        assert_eq!(
            peak_without_bias(Family::Member(Dielectric::Al)),
            Some(Volt::new(1.0))
        );
        assert_eq!(
            peak_without_bias(Family::Member(Dielectric::Ta)),
            Some(Volt::new(0.5))
        );
        assert_eq!(peak_without_bias(Family::Group(Group::Film)), None);
        for family in Family::all() {
            assert_eq!(
                peak_without_bias(family).is_some(),
                family.is_polar(),
                "{family}"
            );
        }
    }
}
