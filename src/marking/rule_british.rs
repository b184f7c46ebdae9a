//! Old British ceramic parts: a plain number of picofarads, a tolerance letter, a letter for the temperature coefficient.
//!
//! ```text
//! value = one to four digits letter letter        "470JN": 470 pF ±5 %, -750 ppm/K
//! ```
//! The letters have meanings of their own there (`british-letters.toml`), so the three only stand together.

use super::lexicon::Lexicon;
use super::piece::{Amount, Meaning, Pieces};
use super::scan::{Scan, Sort};

const PICOFARAD: i8 = -12;

/// Proposes the old British marking at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.figures(at) else {
        return;
    };
    let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
    let (first, second) = (figures.end, figures.end + 1);
    let is_short = figures.n_whole <= 4 && figures.n_decimals <= 1;
    if !is_short || touches(second + 1) || touches(at.wrapping_sub(1)) {
        return;
    }
    let codes = &lexicon.codes;
    let tolerance = codes.british_tolerances.get(scan.at(first));
    let coefficient = codes.british_coefficients.get(scan.at(second));
    let amount = Amount::of(figures, PICOFARAD);
    if let Some(((&(limits, why), &row), amount)) = tolerance.zip(coefficient).zip(amount) {
        let word = lexicon.words.get(usize::from(row));
        let evidence = word.map_or(lexicon.neutral, |word| word.evidence);
        let parts = [
            (
                (at, first),
                Meaning::Value(amount),
                lexicon.named.plain_pico_3,
            ),
            ((first, second), Meaning::Limits(limits), why),
            ((second, second + 1), Meaning::Word(row), evidence),
        ];
        pieces.group(lexicon.named.british, 1.0, &parts);
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_values;
    use super::*;

    #[test]
    fn two_letters_behind_a_plain_number() {
        check_values(propose, "470JN", &["470 pF"]);
        check_values(propose, "470J", &[]);
        check_values(propose, "470JNX", &[]);
    }
}
