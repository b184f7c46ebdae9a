//! Chip ceramic parts: a letter for the figures and a power of ten in pF, maker's letters before them.
//!
//! ```text
//! value = [letter [letter]] letter digit       "S3" = 4.7 nF   "KA2": a maker's K, then A2 = 100 pF
//! ```
//! (IEC 60062:2016/AMD1:2019, Annex B.) It stands apart from other letters and figures.

use super::lexicon::Lexicon;
use super::piece::{Amount, Meaning, Pieces};
use super::scan::{Scan, Sort};
use crate::tables::{Parts, TABLES};

/// Tenths of a picofarad.
const TENTH: i8 = -13;

/// Proposes the chip codes at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
    let (sort, end) = scan.run(at);
    if sort != Sort::Letter || end - at > 3 || touches(at.wrapping_sub(1)) || touches(end + 1) {
        return;
    }
    let letter_at = end - 1;
    let digit = scan.at(end);
    let Some(&tenths) = lexicon.codes.chip_mantissas.get(scan.at(letter_at)) else {
        return;
    };
    let row = lexicon
        .multipliers
        .iter()
        .find(|row| row.digit + b'0' == digit && row.on != Parts::Polar);
    let Some(amount) = row.and_then(|row| Amount::new(tenths, TENTH + row.exponent)) else {
        return;
    };
    let evidence = lexicon.named.chip_code;
    // Such a chip has room for nothing else.
    let is_alone = scan.n_visible() == end + 1 - at;
    let factors = &TABLES.ranking.factors;
    let beside = if is_alone {
        1.0
    } else {
        factors.chip_code_beside
    };
    if letter_at == at {
        pieces.value((at, end + 1), Some(amount), evidence, beside);
        return;
    }
    let weight = factors.maker_before_code * beside;
    let parts = [
        ((at, letter_at), Meaning::Text, lexicon.codes.maker),
        (
            (letter_at, end + 1),
            Meaning::Value(amount),
            lexicon.neutral,
        ),
    ];
    pieces.group(evidence, weight, &parts);
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_values;
    use super::*;

    #[test]
    fn a_letter_and_a_power_of_ten() {
        check_values(propose, "S3", &["4.7 nF"]);
        check_values(propose, "A2", &["100 pF"]);
        check_values(propose, "N5", &["330 nF"]);
        check_values(propose, "A9", &["0.1 pF"]);
        check_values(propose, "KA2", &["100 pF"]);
        check_values(propose, "I3", &[]);
        check_values(propose, "S33", &[]);
    }
}
