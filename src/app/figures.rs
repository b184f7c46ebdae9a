//! How values are written for people: engineering notation in the unit asked for, no more digits than the uncertainty
//! supports, expanded uncertainties (k = 2).

use super::{Outcome, Units};
use crate::quantity::{Farad, Prefix, Quantity, Resolution, Uncertain, engineering_in};

impl Units {
    /// Returns the prefix asked for; `None` for the one that fits.
    pub fn prefix(self) -> Option<Prefix> {
        match self {
            Self::Auto => None,
            Self::Pf => Prefix::named("p"),
            Self::Nf => Prefix::named("n"),
            Self::Uf => Prefix::named("µ"),
        }
    }

    /// Writes a nominal capacitance, or a limit.
    pub fn write(self, value: Farad) -> String {
        self.write_with(value, Resolution::Digits(4))
    }

    /// Writes a capacitance as finely as asked for.
    pub fn write_with(self, value: Farad, resolution: Resolution) -> String {
        let prefix = self
            .prefix()
            .unwrap_or_else(|| Prefix::fitting(value.get(), resolution));
        engineering_in(value.get(), resolution, prefix, Farad::SYMBOL)
    }

    /// Writes what was measured, to the second digit of its standard uncertainty: "217.4 nF".
    pub fn measured(self, outcome: &Outcome) -> Option<String> {
        Some(uncertain(outcome)?.in_words(self.prefix()).0)
    }

    /// Writes what was measured with its expanded uncertainty: "217.4 ± 4.1 nF".
    pub fn measured_with_doubt(self, outcome: &Outcome) -> Option<String> {
        let (value, expanded) = uncertain(outcome)?.in_words(self.prefix());
        let number = value.split(' ').next().unwrap_or_default();
        Some(format!("{number} ± {expanded}"))
    }

    /// Writes the limits in force: "209 nF … 231 nF", "at least 209 nF".
    pub fn limits(self, low: Farad, high: Option<Farad>) -> String {
        match high {
            Some(high) => format!("{} … {}", self.write(low), self.write(high)),
            None => format!("at least {}", self.write(low)),
        }
    }
}

/// Returns the measured capacitance with its standard uncertainty.
pub fn uncertain(outcome: &Outcome) -> Option<Uncertain<Farad>> {
    Some(Uncertain {
        value: Farad::from_picofarads(outcome.capacitance_pf?),
        standard_uncertainty: Farad::from_picofarads(outcome.uncertainty_pf?),
    })
}

/// Writes a deviation: "-1.2 %", "+0.4 %", no more digits than the doubt supports.
pub fn deviation(outcome: &Outcome) -> Option<String> {
    let percent = outcome.deviation_percent?;
    let doubt = uncertain(outcome).map_or(0.1, |u| u.relative().percent());
    let n_decimals = if doubt < 0.1 {
        2
    } else {
        usize::from(doubt < 10.0)
    };
    let text = format!("{percent:+.n_decimals$}");
    let is_zero = text.bytes().all(|b| matches!(b, b'-' | b'+' | b'0' | b'.'));
    let text = if is_zero {
        text.trim_start_matches(['-', '+']).to_owned()
    } else {
        text
    };
    Some(format!("{text} %"))
}

/// Writes a probability in percent, never more certain than it is: "97 %", "over 99 %", "under 1 %".
pub fn probability(share: f64) -> String {
    match share {
        share if share > 0.995 => "over 99 %".to_owned(),
        share if share < 0.005 => "under 1 %".to_owned(),
        share => format!("{:.0} %", share * 100.0),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn outcome(capacitance_pf: f64, uncertainty_pf: f64, deviation_percent: f64) -> Outcome {
        Outcome {
            capacitance_pf: Some(capacitance_pf),
            uncertainty_pf: Some(uncertainty_pf),
            deviation_percent: Some(deviation_percent),
            ..Outcome::default()
        }
    }

    #[test]
    fn values_come_in_the_unit_asked_for() {
        let measured = outcome(217_430.0, 2050.0, -1.17);
        let shown = |units: Units| units.measured_with_doubt(&measured).expect("a value");
        assert_eq!(shown(Units::Auto), "217.4 ± 4.1 nF");
        assert_eq!(shown(Units::Uf), "0.2174 ± 0.0041 µF");
        assert_eq!(Units::Pf.write(Farad::new(220e-9)), "220000 pF");
        assert_eq!(Units::Auto.write(Farad::new(12.54e-9)), "12.54 nF");
    }

    #[test]
    fn deviations_have_a_sign_and_few_digits() {
        let shown = |dev, u| deviation(&outcome(1000.0, u, dev)).expect("a deviation");
        assert_eq!(shown(-1.17, 10.0), "-1.2 %");
        assert_eq!(shown(0.44, 10.0), "+0.4 %");
        assert_eq!(shown(-0.01, 10.0), "0.0 %");
        assert_eq!(shown(-31.7, 150.0), "-32 %");
    }

    #[test]
    fn probabilities_never_claim_certainty() {
        assert_eq!(probability(1.0), "over 99 %");
        assert_eq!(probability(0.974), "97 %");
        assert_eq!(probability(0.0), "under 1 %");
    }
}
