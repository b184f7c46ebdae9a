//! From the text printed on a part to what it may mean.
//!
//! ```text
//! marking = line { ("|" | newline) line }        lines and tokens in any order, blanks or signs between them or not
//! token   = value | tolerance | voltage | word | class | text         one `rule_*.rs` each, with its grammar
//! ```
//!
//! The text is folded to one byte a character (`scan`), rules look at one place of it and propose pieces with a meaning
//! (`piece`), a beam joins pieces from left to right (`beam`), and what is usual for each kind of part decides between the
//! ways that reach the end (`rank`). Every number in that decision is a row of `data/ranking.toml`. So a new notation is a
//! rule, and no rule knows of another.
//!
//! Bounds: the first 96 characters are looked at, what stands behind them is listed as unexplained; 16 paths go on from
//! each character; 50 readings are given.

mod beam;
mod compile;
mod lexicon;
mod path;
mod piece;
mod rank;
mod reading;
mod rule_code;
mod rule_letter;
mod rule_limits;
mod rule_plain;
mod rule_point;
mod rule_text;
mod rule_unit;
mod rule_voltage;
mod rule_voltage_code;
mod rule_word;
mod scan;
#[cfg(test)]
mod testing;
mod weigh;
mod words;

pub use reading::{Decoding, RatedVoltage, Reading, Role, Used};

use crate::tables::Family;
use lexicon::{LEXICON, Lexicon};
use piece::Pieces;
use scan::{Scan, Sort, sort};

/// Returns what a marking may mean, most plausible reading first; `family` is what the person knows of the part.
///
/// Never fails: a text without a readable value has no readings. The plausibilities are probabilities from the marking alone;
/// they sum to at most 1, the rest being "none of these". They rest on estimates of what is usual (`data/ranking.toml`), so
/// where two readings a thousandfold apart both are usual, neither is given more than one half.
pub fn decode(text: &str, family: Option<Family>) -> Decoding {
    let scan = Scan::new(text);
    let beam = beam::search(&scan, &LEXICON, family);
    let ranked = rank::rank(&beam);
    words::decoding(text, &beam, &ranked)
}

/// A rule proposes the pieces of one notation at a cell.
type Rule = fn(&Scan<'_>, usize, &Lexicon, &mut Pieces);

const AT_FIGURES: [Rule; 8] = [
    rule_code::propose,
    rule_plain::propose,
    rule_unit::propose,
    rule_point::propose,
    rule_limits::propose,
    rule_voltage::propose,
    rule_voltage_code::propose,
    rule_text::propose,
];
const AT_LETTERS: [Rule; 4] = [
    rule_point::propose,
    rule_letter::propose,
    rule_voltage_code::propose,
    rule_word::propose,
];
const AT_POINTS: [Rule; 3] = [
    rule_plain::propose,
    rule_unit::propose,
    rule_voltage::propose,
];
const AT_SIGNS: [Rule; 1] = [rule_limits::propose];

/// Returns the rules that can start with a glyph.
fn rules_for(glyph: u8) -> &'static [Rule] {
    match (sort(glyph), glyph) {
        (Sort::Digit, _) => &AT_FIGURES,
        (Sort::Letter, _) => &AT_LETTERS,
        (_, b'.' | b',') => &AT_POINTS,
        (_, b'+' | b'-' | scan::PLUS_MINUS) => &AT_SIGNS,
        _ => &[],
    }
}
