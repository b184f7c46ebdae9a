//! Words for families, temperature characteristics and classes of interference suppression.
//!
//! ```text
//! word  = family [["-"] type number] | characteristic       "MKT"  "CBB22"  "K73-17"  "NP0"
//! class = ("X" | "Y") digit                           "X2"  "X1Y2"
//! ```

use super::lexicon::Lexicon;
use super::piece::{Meaning, Pieces};
use super::scan::{Scan, Sort};
use crate::tables::{Stands, TABLES};

/// Proposes the words at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    for entry in lexicon.classes.longest(scan, at) {
        let end = at + entry.glyphs.len();
        let another_follows = lexicon.classes.longest(scan, end).next().is_some();
        let is_apart = matches!(scan.sort(end), Sort::Blank | Sort::Sign);
        if another_follows || is_apart {
            pieces.push(
                (at, end),
                Meaning::Safety(entry.meaning),
                lexicon.named.safety,
                1.0,
            );
        }
    }
    for entry in lexicon.word_index.longest(scan, at) {
        let row = entry.meaning;
        let Some(word) = lexicon.words.get(usize::from(row)) else {
            continue;
        };
        let end = at + entry.glyphs.len();
        let before = scan.sort(at.wrapping_sub(1));
        if scan.sort(end) == Sort::Letter {
            continue;
        }
        let touches = |sort: Sort| matches!(sort, Sort::Digit | Sort::Letter);
        if word.characteristic.is_some() {
            let is_apart = !touches(before) && !touches(scan.sort(end));
            let figures_follow = scan.figures(scan.after_blanks(end)).is_some();
            let stands = match word.stands {
                Stands::Anywhere => scan.sort(end) != Sort::Digit,
                Stands::Apart => is_apart,
                Stands::Before => is_apart && figures_follow,
            };
            if stands {
                pieces.push((at, end), Meaning::Word(row), word.evidence, 1.0);
            }
        } else if before != Sort::Letter && before != Sort::Digit {
            let ends_in_digit = scan.sort(end - 1) == Sort::Digit;
            if ends_in_digit && scan.at(end) != b'-' {
                continue;
            }
            let type_at = if scan.at(end) == b'-' { end + 1 } else { end };
            let type_number = scan.whole(type_at);
            let alone = type_number.map_or(1.0, |_| TABLES.ranking.factors.word_alone);
            pieces.push((at, end), Meaning::Word(row), word.evidence, alone);
            if let Some(type_number) = type_number {
                let whole = (at, type_number.end);
                pieces.push(whole, Meaning::Word(row), word.evidence, 1.0 - alone);
            }
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
    fn words_have_bounds() {
        check("MKT", &["MKT"]);
        check("MKT1813", &["MKT", "MKT1813"]);
        check("MKTX", &[]);
        check("NP0", &["NP0"]);
        check("NP", &["NP"]);
        check("B 102K", &["B"]);
        check("B102K", &[]);
        check("К73-17", &["К73", "К73-17"]);
    }

    #[test]
    fn classes_may_follow_each_other() {
        check("X2", &["X2"]);
        check("X1Y2", &["X1"]);
        check("X1/Y2", &["X1"]);
        check("X21", &[]);
        check("X5", &[]);
    }
}
