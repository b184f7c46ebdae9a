//! The other way round: from a part to the markings it is likely to carry.
//!
//! Each system prints the value in its own way, or not at all where it has no way; tolerance and voltage follow in the form that
//! goes with it. How likely a marking is comes from the same figures that rank readings (`data/ranking.toml`), and each one is
//! decoded again: a marking that reads back as something else is listed with that doubt, because a person who looks for the part
//! in a drawer meets it.

use super::decode;
use super::lexicon::{LEXICON, view_of};
use super::print::{self, Figures, Printed};
use super::weigh::range_factor;
use crate::quantity::{Farad, Tolerance, Volt};
use crate::tables::{Family, KINDS, TABLES};

/// The least share of a marking that is listed.
const LEAST_SHARE: f64 = 0.002;

/// A part whose markings are asked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Wanted {
    /// The nominal capacitance.
    pub capacitance: Farad,
    /// The tolerance, if it is to be printed.
    pub tolerance: Option<Tolerance>,
    /// The family, a group or a member.
    pub family: Option<Family>,
    /// The rated direct voltage, if it is to be printed.
    pub voltage: Option<Volt>,
}

/// A way in which a part is likely to be marked.
#[derive(Clone, Debug, PartialEq)]
pub struct Mark {
    /// The marking.
    pub text: String,
    /// The system, in the words of its reason: "two figures and a power of ten, in pF (EIA-198)".
    pub system: String,
    /// How usual this way is among those listed, 0 to 1; they sum to 1.
    pub share: f64,
    /// How plausible [`decode`] finds this very part when it reads the marking, the family known; 0 where it does not.
    pub reads_back: f64,
    /// The place of that reading among all, 0 for the first; `None` where none is this part.
    pub rank: Option<usize>,
}

/// Returns the likely markings of a part, the most usual first.
///
/// Empty for a capacitance that is not a positive number.
pub fn marks(wanted: &Wanted) -> Vec<Mark> {
    let Some(figures) = Figures::of(wanted.capacitance) else {
        return Vec::new();
    };
    let mut found: Vec<(Printed, f64)> = Vec::new();
    for printed in print::all(wanted, figures) {
        let share = usual(wanted, &printed);
        let is_new = found.iter().all(|(other, _)| other.text != printed.text);
        if share > 0.0 && is_new {
            found.push((printed, share));
        }
    }
    let whole: f64 = found.iter().map(|one| one.1).sum();
    found.retain(|one| one.1 >= LEAST_SHARE * whole);
    let whole: f64 = found.iter().map(|one| one.1).sum();
    let mut marks: Vec<Mark> = found
        .into_iter()
        .map(|(printed, share)| mark(wanted, printed, share / whole))
        .collect();
    marks.sort_by(|a, b| b.share.total_cmp(&a.share));
    marks
}

/// Returns how often parts of the family carry such a marking, over the kinds it can be.
fn usual(wanted: &Wanted, printed: &Printed) -> f64 {
    let ranking = &TABLES.ranking;
    let on = |name: &str| {
        let row = ranking
            .evidence_named(name)
            .and_then(|row| ranking.evidence.get(row));
        row.map_or([0.0; KINDS], |row| row.on)
    };
    let value = on(printed.notation);
    let voltage = printed.voltage_notation.map(on);
    let views = LEXICON.view(view_of(wanted.family));
    let capacitance = wanted.capacitance.get();
    let kinds = views.iter().zip(value).enumerate();
    kinds
        .map(|(kind, (view, value))| {
            let voltage = voltage.and_then(|on| on.get(kind).copied()).unwrap_or(1.0);
            let usual = range_factor(view, capacitance, &ranking.factors);
            view.prior * value * voltage * usual
        })
        .sum::<f64>()
        * printed.share
}

fn mark(wanted: &Wanted, printed: Printed, share: f64) -> Mark {
    let ranking = &TABLES.ranking;
    let decoding = decode(&printed.text, wanted.family);
    let rank = decoding.readings.iter().position(|reading| {
        let ratio = reading.capacitance / wanted.capacitance;
        let rated = reading.voltage.and_then(|rated| rated.dc);
        (ratio - 1.0).abs() < 1e-6
            && same_limits(reading.tolerance, wanted.tolerance, wanted.capacitance)
            && rated.map(Volt::get).map(f64::to_bits)
                == wanted.voltage.map(Volt::get).map(f64::to_bits)
    });
    let row = ranking
        .evidence_named(printed.notation)
        .and_then(|row| ranking.evidence.get(row));
    Mark {
        system: printed
            .system
            .unwrap_or_else(|| row.map_or_else(String::new, |row| row.why.clone())),
        reads_back: rank
            .and_then(|rank| decoding.readings.get(rank))
            .map_or(0.0, |reading| reading.plausibility),
        rank,
        share,
        text: printed.text,
    }
}

/// Whether two tolerances give the same limits for a value.
pub(super) fn same_limits(
    one: Option<Tolerance>,
    other: Option<Tolerance>,
    nominal: Farad,
) -> bool {
    match (one, other) {
        (None, None) => true,
        (Some(one), Some(other)) => {
            let ((low, high), (other_low, other_high)) =
                (one.limits(nominal), other.limits(nominal));
            let near = |a: Farad, b: Farad| (a - b).get().abs() <= 1e-9 * nominal.get();
            near(low, other_low)
                && match (high, other_high) {
                    (Some(a), Some(b)) => near(a, b),
                    (None, None) => true,
                    _ => false,
                }
        }
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::parse;

    #[track_caller]
    fn check(value: &str, tolerance: &str, family: &str, volts: f64, expected: &[&str]) {
        let wanted = Wanted {
            capacitance: parse(value).expect("a capacitance"),
            tolerance: Tolerance::parse(tolerance).ok(),
            family: Family::named(family),
            voltage: Some(volts).filter(|volts| *volts > 0.0).map(Volt::new),
        };
        let found = marks(&wanted);
        let texts: Vec<&str> = found.iter().map(|mark| mark.text.as_str()).collect();
        for text in expected {
            assert!(texts.contains(text), "{text} among {texts:?}");
        }
        let sum: f64 = found.iter().map(|mark| mark.share).sum();
        assert!((sum - 1.0).abs() < 1e-9, "shares sum to {sum}");
    }

    #[test]
    fn a_film_part() {
        check(
            "220 nF",
            "5 %",
            "film",
            0.0,
            &["224J", "220nJ", ".22J", "0.22 µF ±5 %"],
        );
        check(
            "220 nF",
            "5 %",
            "pet",
            100.0,
            &["224J100", "2A224J", "220nJ100", ".22J100"],
        );
    }

    #[test]
    fn small_and_polar_parts() {
        check(
            "4.7 pF",
            "±0.25 pF",
            "disc1",
            0.0,
            &["4p7C", "4R7C", "479C"],
        );
        check("4.7 nF", "", "mlcc2", 0.0, &["472", "4n7", "S3"]);
        check("4.7 µF", "", "ta", 10.0, &["A475", "475A", "4.7 10V"]);
        check("100 µF", "", "al", 25.0, &["100 25V", "100 µF 25V"]);
        check("1 mF", "", "polymer", 2.5, &["108 2.5V"]);
    }

    #[test]
    fn colours() {
        let bands = "brown black yellow white red";
        check("100 nF", "10 %", "pet", 250.0, &[bands]);
    }

    #[test]
    fn what_is_no_capacitance_has_no_marks() {
        let wanted = |farads: f64| Wanted {
            capacitance: Farad::new(farads),
            tolerance: None,
            family: None,
            voltage: None,
        };
        for farads in [0.0, -1e-9, f64::NAN, f64::INFINITY] {
            assert!(marks(&wanted(farads)).is_empty(), "{farads}");
        }
    }
}
