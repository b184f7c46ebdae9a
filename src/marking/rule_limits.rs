//! Tolerances in figures.
//!
//! ```text
//! tolerance = figures "%"                                   "5%"  "10 %"
//!           | ("±" | "+-" | "+/-") figures ["%" | unit]     "±10"  "±0.25 pF"
//!           | sign figures ["%"] ["/"] sign figures ["%"]   "+80-20"  "-20/+80 %"
//!           | figures "/" figures "%"                       "10/50 %": the smaller is the minus side
//!           | a pair of figures that is a row of `tolerance-words.toml`          "10/50"
//! ```

use super::lexicon::Lexicon;
use super::piece::{Amount, Meaning, Pieces};
use super::scan::{Figures, PLUS_MINUS, Scan, Sort};
use crate::quantity::Tolerance;
use crate::tables::TABLES;

const MOST_PERCENT: f64 = 100.0;

/// Proposes the tolerances in figures at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let found = match scan.at(at) {
        PLUS_MINUS => symmetric(scan, at + 1, lexicon),
        b'+' if scan.at(at + 1) == b'-' && !scan.at(at + 2).is_ascii_digit() => None,
        b'+' if scan.at(at + 1) == b'-' => symmetric(scan, at + 2, lexicon),
        b'+' if scan.rest(at).starts_with(b"+/-") => symmetric(scan, at + 3, lexicon),
        b'+' | b'-' => two_sided(scan, at),
        _ => {
            words(scan, at, lexicon, pieces);
            percent(scan, at)
        }
    };
    if let Some((limits, end, weight)) = found {
        pieces.push((at, end), Meaning::Limits(limits), lexicon.limits, weight);
    }
}

/// Proposes pairs of figures that are a tolerance by custom: "10/50".
fn words(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let touches = |cell: usize| matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
    if touches(at.wrapping_sub(1)) {
        return;
    }
    for entry in lexicon.limit_words.longest(scan, at) {
        let end = at + entry.glyphs.len();
        if !touches(end) && scan.at(end) != b'%' {
            let (limits, share) = entry.meaning;
            pieces.push((at, end), Meaning::Limits(limits), lexicon.limits, share);
        }
    }
}

type Found = Option<(Tolerance, usize, f64)>;

fn symmetric(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Found {
    let figures = scan.figures(scan.after_blanks(at))?;
    if let Some(end) = percent_sign(scan, figures.end) {
        return Some((Tolerance::percent(figures.number()), end, 1.0));
    }
    let unit_at = scan.after_blanks(figures.end);
    if let Some(unit) = lexicon.units.longest(scan, unit_at).next() {
        let end = unit_at + unit.glyphs.len();
        if unit.glyphs.len() > 1 && scan.sort(end) != Sort::Letter {
            let half_width = Amount::of(figures, unit.meaning.exponent)?.farads();
            return Some((Tolerance::Absolute(half_width), end, 1.0));
        }
    }
    let unsigned = TABLES.ranking.factors.percent_unsigned;
    let limits = Tolerance::percent(figures.number());
    (figures.number() <= MOST_PERCENT).then_some((limits, figures.end, unsigned))
}

fn two_sided(scan: &Scan<'_>, at: usize) -> Found {
    let first = scan.figures(at + 1)?;
    let mut next = percent_sign(scan, first.end).unwrap_or(first.end);
    next = scan.after_blanks(next);
    if scan.at(next) == b'/' {
        next = scan.after_blanks(next + 1);
    }
    let (sign, other) = (scan.at(at), scan.at(next));
    if !matches!((sign, other), (b'+', b'-') | (b'-', b'+')) {
        return None;
    }
    let second = scan.figures(next + 1)?;
    let end = percent_sign(scan, second.end).unwrap_or(second.end);
    let (minus, plus) = if sign == b'-' {
        (first, second)
    } else {
        (second, first)
    };
    sides(minus, plus).map(|limits| (limits, end, 1.0))
}

fn percent(scan: &Scan<'_>, at: usize) -> Found {
    let first = scan.figures(at)?;
    if let Some(end) = percent_sign(scan, first.end) {
        return Some((Tolerance::percent(first.number()), end, 1.0));
    }
    if scan.at(first.end) != b'/' {
        return None;
    }
    let second = scan.figures(first.end + 1)?;
    let end = percent_sign(scan, second.end)?;
    let (minus, plus) = if first.number() <= second.number() {
        (first, second)
    } else {
        (second, first)
    };
    sides(minus, plus).map(|limits| (limits, end, 1.0))
}

fn sides(minus: Figures, plus: Figures) -> Option<Tolerance> {
    let (minus, plus) = (minus.number(), plus.number());
    (minus <= MOST_PERCENT && plus <= 2.0 * MOST_PERCENT)
        .then(|| Tolerance::asymmetric(minus, plus))
}

/// Returns the end of a percent sign with at most one blank before it.
fn percent_sign(scan: &Scan<'_>, at: usize) -> Option<usize> {
    let sign_at = if scan.at(at) == b' ' { at + 1 } else { at };
    (scan.at(sign_at) == b'%').then_some(sign_at + 1)
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
    fn like_sides() {
        check("5%", &["±5 %"]);
        check("2,5 %", &["±2.5 %"]);
        check("±10", &["±10 %"]);
        check("+-20%", &["±20 %"]);
        check("+/-5%", &["±5 %"]);
        check("±0.25 pF", &["±0.25 pF"]);
    }

    #[test]
    fn unlike_sides_in_either_order() {
        check("+80-20", &["-20/+80 %"]);
        check("-20+80", &["-20/+80 %"]);
        check("-20/+80 %", &["-20/+80 %"]);
        check("+80/-20%", &["-20/+80 %"]);
        check("+50% -10%", &["-10/+50 %"]);
        check("10/50%", &["-10/+50 %"]);
        check("+100-0", &["-0/+100 %"]);
    }

    #[test]
    fn other_signs_are_no_tolerances() {
        check("-16", &[]);
        check("+", &[]);
        check("+-", &[]);
        check("±", &[]);
        check("10/63", &[]);
        check("-200/+80 %", &[]);
    }
}
