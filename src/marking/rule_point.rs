//! A letter for the decimal point that names the unit at once (IEC 60062).
//!
//! ```text
//! value = digits letter digits | letter digits       "4n7"  "n47"  "µ1"  "4R7"  "M15"
//! ```
//! At most four digits. The letters are rows of `point-letters.toml`; digits with a letter behind them are `rule_unit`.

use super::lexicon::Lexicon;
use super::piece::{Amount, Pieces};
use super::scan::{Scan, Sort, power_of_ten};
use crate::tables::{Place, TABLES};

const MOST_DIGITS: usize = 4;

/// Proposes the values of figures with a letter for the point at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let whole = scan.whole(at);
    let letter_at = whole.map_or(at, |whole| whole.end);
    let leads = whole.is_none();
    if leads && scan.sort(at.wrapping_sub(1)) == Sort::Letter {
        return;
    }
    for entry in lexicon.points.longest(scan, letter_at) {
        let Some(decimals) = scan.whole(letter_at + 1) else {
            return;
        };
        let n_whole = whole.map_or(0, |whole| whole.n_whole);
        let unit = &entry.meaning;
        if n_whole + decimals.n_whole > MOST_DIGITS || (unit.place == Place::Leading && !leads) {
            continue;
        }
        let digits = whole.map_or(0, |whole| whole.digits) * power_of_ten(decimals.n_whole)
            + decimals.digits;
        let n_decimals = i8::try_from(decimals.n_whole).unwrap_or(0);
        let amount = Amount::new(digits, unit.exponent - n_decimals);
        // Nobody prints "p100" for p1.
        let has_idle_zero = decimals.n_whole > 1 && digits.is_multiple_of(10);
        let idle = if has_idle_zero {
            TABLES.ranking.factors.idle_zero
        } else {
            1.0
        };
        let weight = unit.share * idle;
        pieces.value((at, decimals.end), amount, unit.evidence, weight);
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
    fn the_letter_stands_between_or_before_the_figures() {
        check("4n7", &["4.7 nF"]);
        check("n47", &["470 pF"]);
        check("µ47K63", &["470 nF"]);
        check("u47", &["470 nF"]);
        check("0u1", &["100 nF"]);
        check("p33", &["0.33 pF"]);
        check("4K7", &["4.7 nF"]);
        check("332p", &[]);
    }

    #[test]
    fn r_is_pico_or_micro_by_family() {
        check("4R7C", &["4.7 pF", "4.7 µF"]);
        check("R47", &["0.47 pF", "470 nF"]);
    }

    #[test]
    fn old_letters() {
        check("M15", &["150 nF", "150 µF"]);
        check("1m0", &["1 µF", "1 mF"]);
        check("G5", &["500 µF"]);
        check("1G5", &[]);
    }

    #[test]
    fn at_most_four_digits() {
        check("473K100", &[]);
        check("n12345", &[]);
    }
}
