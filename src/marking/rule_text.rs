//! Text that must not be taken for a value: temperatures and climatic categories.
//!
//! ```text
//! temperature = digits [blank] ("°" | "°C" | "C")            "105°C"  "85 C"
//! climate     = lowest "/" highest "/" days ["/" letter]     "40/085/21"  (IEC 60068-1)
//! ```

use super::lexicon::Lexicon;
use super::piece::{Meaning, Pieces};
use super::scan::{DEGREE, Scan, Sort};
use crate::tables::TABLES;

/// Proposes the temperature or climatic category at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.whole(at) else {
        return;
    };
    let sign_at = scan.after_blanks(figures.end);
    let mut push = |end, weight| {
        pieces.push((at, end), Meaning::Text, lexicon.climate_text, weight);
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
        push(end, 1.0);
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
        check("105CX", &[]);
    }

    #[test]
    fn climatic_categories() {
        check("40/085/21", &["40/085/21"]);
        check("40/110/56/B X2", &["40/110/56/B"]);
        check("10/63", &[]);
        check("40/085/22", &[]);
    }
}
