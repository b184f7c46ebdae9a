//! Codes of three or four digits: figures and a power of ten, in picofarad (EIA-198).
//!
//! ```text
//! code = digit digit multiplier | digit digit digit multiplier        "224" = 22 · 10⁴ pF   "1002" = 100 · 10² pF
//! ```
//! The first digit is not 0. What a multiplier digit says is a row of `multipliers.toml`; 8 has two rows, by polarity. Codes of four
//! digits are read with the multipliers 0 to 7 only.

use super::lexicon::Lexicon;
use super::piece::{Amount, Pieces};
use super::scan::Scan;
use crate::tables::Parts;

const PICOFARAD: i8 = -12;

/// Proposes the values of a code at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.whole(at) else {
        return;
    };
    if scan.at(at) == b'0' || !matches!(figures.n_whole, 3 | 4) {
        return;
    }
    let last = figures.digits % 10;
    for multiplier in &lexicon.multipliers {
        if u32::from(multiplier.digit) != last {
            continue;
        }
        let evidence = match (figures.n_whole, multiplier.on) {
            (4, _) if multiplier.exponent < 0 || multiplier.on != Parts::Any => continue,
            (4, _) => lexicon.named.code4,
            (_, Parts::Any) => lexicon.named.code3,
            (_, Parts::NonPolar) => lexicon.named.code3_small,
            (_, Parts::Polar) => lexicon.named.code3_polar,
        };
        let amount = Amount::new(figures.digits / 10, PICOFARAD + multiplier.exponent);
        pieces.value((at, figures.end), amount, evidence, 1.0);
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_values;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_values(propose, text, expected);
    }

    #[test]
    fn three_digits_are_two_figures_and_a_power_of_ten() {
        check("224J", &["220 nF"]);
        check("104", &["100 nF"]);
        check("100", &["10 pF"]);
        check("477", &["470 µF"]);
        check("479", &["4.7 pF"]);
    }

    #[test]
    fn eight_depends_on_polarity() {
        check("108", &["0.1 pF", "1 mF"]);
    }

    #[test]
    fn four_digits_are_three_figures_and_a_power_of_ten() {
        check("1002", &["10 nF"]);
        check("4751", &["4.75 nF"]);
        check("1208", &[]);
    }

    #[test]
    fn other_lengths_and_leading_zeros_are_no_codes() {
        check("22", &[]);
        check("10000", &[]);
        check("047", &[]);
        check("n47", &[]);
    }
}
