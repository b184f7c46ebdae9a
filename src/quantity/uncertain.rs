//! A measured value with its standard uncertainty.

use super::{Fraction, Prefix, Quantity, Resolution, engineering_in};

/// A value and its standard uncertainty (JCGM 100:2008, 2.3.1).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Uncertain<Q> {
    /// The estimate.
    pub value: Q,
    /// One standard uncertainty, in the unit of the value, not negative.
    pub standard_uncertainty: Q,
}

/// The coverage factor of what screens show (JCGM 100:2008, 6.3.3).
const COVERAGE_FACTOR: f64 = 2.0;

impl<Q: Quantity> Uncertain<Q> {
    /// Returns the standard uncertainty as a part of the value.
    pub fn relative(self) -> Fraction {
        Fraction::new(self.standard_uncertainty.base() / self.value.base().abs())
    }

    /// Returns the expanded uncertainty, k = 2.
    pub fn expanded(self) -> Q {
        Q::from_base(self.standard_uncertainty.base() * COVERAGE_FACTOR)
    }

    /// Returns the value and its expanded uncertainty as two texts, both with the prefix of the value or the one given
    /// and with no more digits than the uncertainty supports: "217.4 nF" and "4.1 nF".
    pub fn in_words(self, prefix: Option<Prefix>) -> (String, String) {
        let resolution = Resolution::Uncertainty(self.standard_uncertainty.base());
        let prefix = prefix.unwrap_or_else(|| Prefix::fitting(self.value.base(), resolution));
        (
            engineering_in(self.value.base(), resolution, prefix, Q::SYMBOL),
            engineering_in(self.expanded().base(), resolution, prefix, Q::SYMBOL),
        )
    }
}

impl<Q: Quantity> std::fmt::Display for Uncertain<Q> {
    /// Writes "217.4 nF ± 4.1 nF", the second figure being the expanded uncertainty (k = 2).
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let (value, expanded) = self.in_words(None);
        write!(f, "{value} ± {expanded}")
    }
}

#[cfg(test)]
mod tests {
    use super::super::Farad;
    use super::*;

    #[test]
    fn prints_the_expanded_uncertainty_to_the_same_place() {
        let measured = Uncertain {
            value: Farad::new(217.43e-9),
            standard_uncertainty: Farad::new(2.05e-9),
        };
        assert_eq!(measured.to_string(), "217.4 nF ± 4.1 nF");
        assert_eq!(measured.relative().to_string(), "0.943 %");
    }
}
