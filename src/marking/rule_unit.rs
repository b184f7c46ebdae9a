//! Numbers with a unit word or a unit letter behind them.
//!
//! ```text
//! value = figures [blank] word       "100 nF"  "0,1µF"  "500 MMF"  "47n"  "22K" (thousands of pF)
//! ```
//! The words are rows of `unit-words.toml`. A word of several letters ends where no letter follows; one letter may be followed
//! by a tolerance letter (`47nJ`).

use super::lexicon::Lexicon;
use super::piece::{Amount, Pieces};
use super::scan::{Scan, Sort, is_cyrillic};
use crate::tables::TABLES;

/// Proposes the values of a number with a unit at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.figures(at) else {
        return;
    };
    let factors = &TABLES.ranking.factors;
    let word_at = scan.after_blanks(figures.end);
    for entry in lexicon.units.longest(scan, word_at) {
        let end = word_at + entry.glyphs.len();
        let is_letter = entry.glyphs.len() == 1;
        let runs_on = entry.ends_with_letter() && scan.sort(end) == Sort::Letter;
        let followed =
            is_letter && (scan.at(end).is_ascii_uppercase() || is_cyrillic(scan.at(end)));
        if runs_on && !followed {
            continue;
        }
        let mut weight = entry.meaning.share;
        if is_letter && word_at > figures.end {
            weight *= factors.unit_letter_apart;
        }
        if is_letter && scan.sort(end) == Sort::Digit {
            weight *= factors.unit_letter_runs_on;
        }
        if is_letter && figures.n_decimals > 0 && scan.at(word_at).is_ascii_uppercase() {
            weight *= if figures.number() < 1.0 {
                factors.unit_letter_decimal
            } else {
                factors.unit_letter_decimal_one
            };
        }
        let unit = &entry.meaning;
        let amount = Amount::of(figures, unit.exponent).map(|amount| amount.in_units(unit.scale));
        pieces.value((at, end), amount, unit.evidence, weight);
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
    fn words_and_letters_are_units() {
        check("100 nF", &["100 nF"]);
        check("0,1µF", &["100 nF"]);
        check("0.1μF", &["100 nF"]);
        check("500 MMF", &["500 pF"]);
        check(".0005 MFD", &["500 pF"]);
        check(".0005 M.F.D.", &["500 pF"]);
        check("47nJ", &["47 nF"]);
        check("33pKL", &["33 pF"]);
        check("22K", &["22 nF"]);
        check("10M", &["10 µF"]);
        check("1F 5.5V", &["1 F"]);
    }

    #[test]
    fn the_old_millifarad_is_a_microfarad() {
        check("3300mF", &["3.3 mF", "3.3 F"]);
    }

    #[test]
    fn other_words_are_no_units() {
        check("100 nails", &[]);
        check("100", &[]);
        check("0 pF", &[]);
    }
}
