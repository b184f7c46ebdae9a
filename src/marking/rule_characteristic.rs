//! Temperature characteristics as codes of two or three characters, and as one letter behind a tolerance letter.
//!
//! ```text
//! code   = letter digit letter | "2" letter digit | letter letter       "X7R"  "C0G"  "2C1"  "CH"
//! single = letter                                                        "33pKL": L right behind a tolerance letter
//! ```
//! No letter or digit touches a code, but a value may follow a pair (`SL101J`). The marks are rows of
//! `characteristic-codes.toml`.

use super::lexicon::Lexicon;
use super::piece::{Meaning, Pieces};
use super::scan::{Scan, Sort};
use crate::tables::TABLES;

/// Proposes the characteristics at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let codes = &lexicon.codes;
    let before = scan.sort(at.wrapping_sub(1));
    let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
    let mut push = |end: usize, row: u16, weight: f64| {
        if let Some(word) = lexicon.words.get(usize::from(row)) {
            pieces.push((at, end), Meaning::Word(row), word.evidence, weight);
        }
    };
    let runs_on = TABLES.ranking.factors.characteristic_touches;
    let starts = codes.characteristic_starts.get(scan.at(at)).is_some();
    if starts && before != Sort::Letter && before != Sort::Digit {
        let three = [scan.at(at), scan.at(at + 1), scan.at(at + 2)];
        if !touches(at + 3)
            && three[1] != b' '
            && let Some(&row) = codes.characteristics.get(&three)
        {
            push(at + 3, row, 1.0);
        }
        if scan.sort(at + 2) != Sort::Letter
            && let Some(&row) = codes.characteristics.get(&[three[0], three[1], b' '])
        {
            let value_follows = scan.whole(at + 2).is_none_or(|value| value.n_whole >= 3);
            let weight = if touches(at + 2) { runs_on } else { 1.0 };
            if value_follows {
                push(at + 2, row, weight);
            }
        }
    } else if before == Sort::Letter && !touches(at + 1) {
        let is_behind = scan.at(at - 1).is_ascii_uppercase()
            && !scan.at(at.wrapping_sub(2)).is_ascii_uppercase()
            && touches(at.wrapping_sub(2));
        if let Some(&row) = codes.coefficients.get(scan.at(at)).filter(|_| is_behind) {
            push(at + 1, row, runs_on);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_pieces;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_pieces(propose, text, expected);
    }

    #[test]
    fn codes_follow_their_grammar() {
        check("X7R", &["X7R"]);
        check("C0G", &["C0G"]);
        check("M7G 100", &["M7G"]);
        check("2C1", &["2C1"]);
        check("CH 220J", &["CH"]);
        check("SL101J", &["SL"]);
        check("X7RS", &[]);
        check("2C104K", &[]);
        check("XX7", &[]);
    }
}
