//! Tolerance letters (IEC 60062), and words that stand for a tolerance.
//!
//! ```text
//! tolerance = letter | word          "J"  "K"  "Z"  "GMV"
//! ```
//! A letter behind figures or a unit, or with blanks around it. What it says depends on the value: below 10 pF a capacitance.

use super::lexicon::Lexicon;
use super::piece::{Meaning, Pieces};
use super::scan::{Scan, Sort};
use crate::tables::TABLES;

/// Proposes the tolerances that a letter or word at a cell stands for.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let factors = &TABLES.ranking.factors;
    let before = scan.sort(at.wrapping_sub(1));
    if before != Sort::Letter {
        for entry in lexicon.limit_words.longest(scan, at) {
            let end = at + entry.glyphs.len();
            if scan.sort(end) != Sort::Letter {
                let (limits, share) = entry.meaning;
                pieces.push((at, end), Meaning::Limits(limits), lexicon.limits, share);
            }
        }
    }
    let behind = scan.sort(at + 1);
    let mut weight = 1.0;
    if behind == Sort::Letter {
        weight *= factors.tolerance_runs_on;
    }
    if scan.at(at.wrapping_sub(1)).is_ascii_uppercase() {
        weight *= factors.tolerance_runs_on;
    }
    if matches!(before, Sort::Blank | Sort::Sign) {
        weight *= factors.tolerance_alone;
    }
    for entry in lexicon.letter_index.starting(scan.at(at)) {
        let row = entry.meaning;
        if let Some(letter) = lexicon.letters.get(usize::from(row)) {
            pieces.push((at, at + 1), Meaning::Letter(row), letter.evidence, weight);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_tolerances;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_tolerances(propose, text, expected);
    }

    #[test]
    fn letters_and_words() {
        check("J", &["±5 %"]);
        check("C", &["±0.25 %"]);
        check("GMV", &["GMV", "±2 %"]);
        check("8", &[]);
        check("O", &[]);
    }

    #[test]
    fn disputed_letters_have_several_meanings() {
        check("Y", &["-20/+50 %", "-0/+50 %", "-10/+100 %"]);
    }
}
