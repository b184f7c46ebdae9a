//! Text that must not be taken for a value: temperatures, climatic categories, approvals, lots and type numbers.
//!
//! ```text
//! temperature = digits [blank] ("°" | "°C" | "C")            "105°C"  "85 C"
//! climate     = lowest "/" highest "/" days ["/" letter]     "40/085/21"  (IEC 60068-1)
//!             | letter letter letter                         "FME"  (DIN 40040)
//! word        = a row of `text-words.toml`                   "SH"  "EN132400"  "_"
//! lot         = six digits or more | five or more letters and digits mixed | three letters or more, all apart
//! ```

use super::lexicon::Lexicon;
use super::piece::{Meaning, Pieces};
use super::scan::{DEGREE, Scan, Sort};
use crate::tables::TABLES;

/// Proposes the temperature or climatic category at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    words(scan, at, lexicon, pieces);
    let Some(figures) = scan.whole(at) else {
        return;
    };
    let sign_at = scan.after_blanks(figures.end);
    let mut push = |end, weight| {
        pieces.push((at, end), Meaning::Text, lexicon.named.temperature, weight);
    };
    let celsius = |at: usize| scan.at(at) == b'C' && scan.sort(at + 1) != Sort::Letter;
    if scan.at(sign_at) == DEGREE {
        let end = sign_at + 1;
        push(if celsius(end) { end + 1 } else { end }, 1.0);
    } else if celsius(sign_at) && is_listed(scan, at, figures.end, 1, lexicon) {
        push(
            sign_at + 1,
            TABLES.ranking.factors.temperature_without_degree,
        );
    }
    if let Some(end) = climate(scan, at, lexicon) {
        pieces.push((at, end), Meaning::Text, lexicon.climate_text, 1.0);
    }
}

fn words(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
    if scan.sort(at) != Sort::Sign && touches(at.wrapping_sub(1)) {
        // A packing mark on a reel label touches the digits before it.
        let behind_digits = scan.sort(at.wrapping_sub(1)) == Sort::Digit;
        if scan.sort(at) != Sort::Letter || !behind_digits {
            return;
        }
    }
    for entry in lexicon.codes.texts.longest(scan, at) {
        let end = at + entry.glyphs.len();
        if !entry.ends_with_letter() || !touches(end) {
            pieces.push((at, end), Meaning::Text, entry.meaning, 1.0);
        }
    }
    if touches(at.wrapping_sub(1)) {
        return;
    }
    let three = [scan.at(at), scan.at(at + 1), scan.at(at + 2)];
    if scan.sort(at) == Sort::Letter
        && !touches(at + 3)
        && let Some(&evidence) = lexicon.codes.climates.get(&three)
    {
        pieces.push((at, at + 3), Meaning::Text, evidence, 1.0);
    }
    let mut end = at;
    let mut n_digits = 0;
    while touches(end) {
        n_digits += usize::from(scan.sort(end) == Sort::Digit);
        end += 1;
    }
    let n_letters = end - at - n_digits;
    let mut known = lexicon.word_index.longest(scan, at);
    if known.any(|word| word.glyphs.len() > 1) {
        return;
    }
    let is_lot = match (n_digits, n_letters) {
        (0, letters) => letters >= 3,
        (digits, 0) => digits >= 6,
        (digits, letters) => digits + letters >= 5,
    };
    if is_lot {
        let factors = &TABLES.ranking.factors;
        let weight = if n_letters == 0 {
            factors.lot_figures
        } else {
            factors.lot
        };
        pieces.push((at, end), Meaning::Text, lexicon.codes.lot, weight);
    }
}

fn climate(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Option<usize> {
    let mut start = at;
    let mut end = at;
    for place in 0..3 {
        let figures = scan.whole(start)?;
        end = figures.end;
        if !is_listed(scan, start, end, place, lexicon) || (place < 2 && scan.at(end) != b'/') {
            return None;
        }
        start = end + 1;
    }
    let has_letter = scan.at(end) == b'/' && matches!(scan.at(end + 1), b'A'..=b'C');
    Some(if has_letter && scan.sort(end + 2) != Sort::Letter {
        end + 2
    } else {
        end
    })
}

fn is_listed(scan: &Scan<'_>, from: usize, to: usize, place: usize, lexicon: &Lexicon) -> bool {
    let figures = scan.rest(from).get(..to - from).unwrap_or_default();
    lexicon
        .climate
        .get(place)
        .is_some_and(|values| values.iter().any(|value| value == figures))
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
    fn temperatures() {
        check("105°C", &["105°C"]);
        check("85 C", &["85 C"]);
        check("470C", &[]);
        check("105CX", &["105CX"]);
    }

    #[test]
    fn climatic_categories() {
        check("40/085/21", &["40/085/21"]);
        check("40/110/56/B X2", &["40/110/56/B"]);
        check("10/63", &[]);
        check("40/085/22", &[]);
    }
}
