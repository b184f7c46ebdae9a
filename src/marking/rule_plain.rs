//! Numbers without a unit: picofarad or microfarad, by custom and family.
//!
//! ```text
//! plain   = one to five digits, no leading zero                "22"  "470"  "2200"  "10000"
//! decimal = digits with a point or comma                       "4.7"  ".047"  "0,1"
//! worn    = "0" and two digits                                 "047": .047 with the point worn off
//! ```

use super::lexicon::Lexicon;
use super::piece::{Amount, Pieces};
use super::scan::{Figures, Scan};

const PICOFARAD: i8 = -12;
const MICROFARAD: i8 = -6;

/// Proposes the values of a number without a unit at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.figures(at) else {
        return;
    };
    let cells = (at, figures.end);
    let named = &lexicon.named;
    let is_decimal = figures.n_decimals > 0;
    if scan.at(at) == b'0' && !is_decimal {
        if figures.n_whole == 3 {
            let worn = Figures {
                n_decimals: 3,
                ..figures
            };
            pieces.value(cells, Amount::of(worn, MICROFARAD), named.worn_point, 1.0);
        }
        return;
    }
    let (pico, micro) = if is_decimal {
        match figures.number() {
            ..1.0 => (named.decimal_small_pico, named.decimal_small_micro),
            1.0..10.0 => (named.decimal_one_pico, named.decimal_one_micro),
            _ => (named.decimal_ten_pico, named.decimal_ten_micro),
        }
    } else {
        match figures.n_whole {
            1 | 2 => (named.plain_pico_short, named.plain_micro_short),
            3 => (named.plain_pico_3, named.plain_micro_3),
            4 => (named.plain_pico_4, named.plain_micro_4),
            5 => (named.plain_pico_5, named.plain_micro_5),
            _ => return,
        }
    };
    pieces.value(cells, Amount::of(figures, PICOFARAD), pico, 1.0);
    pieces.value(cells, Amount::of(figures, MICROFARAD), micro, 1.0);
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
    fn numbers_count_picofarads_or_microfarads() {
        check("22", &["22 pF", "22 µF"]);
        check("2200", &["2.2 nF", "2.2 mF"]);
        check("4.7", &["4.7 pF", "4.7 µF"]);
        check(".047", &["0.047 pF", "47 nF"]);
        check("0,1", &["0.1 pF", "100 nF"]);
    }

    #[test]
    fn a_leading_zero_is_a_worn_point() {
        check("047", &["47 nF"]);
        check("0", &[]);
        check("00", &[]);
        check("000", &[]);
    }

    #[test]
    fn long_numbers_are_no_values() {
        check("123456", &[]);
        check("99999999999999999999", &[]);
    }
}
