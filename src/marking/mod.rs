//! From the text printed on a part to what it may mean.
//!
//! ```text
//! marking = line { ("|" | newline) line }        lines and tokens in any order, blanks or signs between them or not
//! token   = value | tolerance | voltage | word | class | date | text       one `rule_*.rs` a notation, with its grammar
//! "?"     = a character that could not be read, anywhere
//! ```
//!
//! The text is folded to one byte a character (`scan`), rules look at one place of it and propose pieces with a meaning
//! (`piece`), a beam joins pieces from left to right (`beam`), and what is usual for each kind of part decides between the
//! ways that reach the end (`rank`). Every number in that decision is a row of `data/ranking.toml`. So a new notation is a
//! rule, and no rule knows of another. Marks that depend on each other (the fields of a part number, bands in one order) are
//! proposed as one group. [`marks`] goes the other way, from a part to its likely markings (`print`).
//!
//! Bounds: the first 96 characters are looked at, what stands behind them is listed as unexplained; 16 paths go on from
//! each character; 50 readings are given. How unreadable characters, look-alikes and turned parts are bounded is said in
//! `variants`.

mod beam;
mod compile;
mod compile_codes;
mod compile_colours;
mod lexicon;
mod marks;
mod path;
mod piece;
mod print;
mod rank;
mod reading;
mod rule_british;
mod rule_characteristic;
mod rule_chip;
mod rule_code;
mod rule_colour;
mod rule_date;
mod rule_letter;
mod rule_limits;
mod rule_military;
mod rule_plain;
mod rule_point;
mod rule_sections;
mod rule_text;
mod rule_unit;
mod rule_voltage;
mod rule_voltage_code;
mod rule_word;
mod scan;
#[cfg(test)]
mod testing;
mod variants;
mod weigh;
mod words;

pub use marks::{Mark, Wanted, marks};
pub use reading::{Decoding, RatedVoltage, Reading, Role, Used, WithoutValue};

use crate::tables::{Family, TABLES};
use lexicon::{LEXICON, Lexicon};
use piece::Pieces;
use rank::Masses;
use scan::{Scan, Sort, sort};
use variants::Variant;

/// Returns what a marking may mean, most plausible reading first; `family` is what the person knows of the part.
///
/// Never fails: a text without a readable value has no readings. The plausibilities are probabilities from the marking alone;
/// they sum to at most 1, the rest being "none of these". They rest on estimates of what is usual (`data/ranking.toml`), so
/// where two readings a thousandfold apart both are usual, neither is given more than one half.
pub fn decode(text: &str, family: Option<Family>) -> Decoding {
    let scan = Scan::new(text);
    let mut variants = vec![Variant::AsTyped];
    let mut masses = Masses::default();
    let beam = beam::search(&scan, &LEXICON, family);
    masses.add_unknown(scan.n_visible());
    let completions = if rule_colour::starts(&scan, &LEXICON) {
        Vec::new()
    } else {
        variants::completions(&scan)
    };
    let add =
        |more: Vec<Variant>, weight: f64, variants: &mut Vec<Variant>, masses: &mut Masses| {
            for variant in more {
                let changed = variant.of(&scan);
                let number = u16::try_from(variants.len()).unwrap_or(u16::MAX);
                let weight = variant.share(weight);
                masses.add(&beam::search(&changed, &LEXICON, family), number, weight);
                variants.push(variant);
            }
        };
    let factors = &TABLES.ranking.factors;
    if completions.is_empty() {
        masses.add(&beam, 0, 1.0);
        let turned = variants::turned(&scan).into_iter().collect();
        add(turned, factors.turned, &mut variants, &mut masses);
        if masses.is_doubtful() {
            add(
                variants::slips(&scan),
                factors.slip,
                &mut variants,
                &mut masses,
            );
        }
    } else {
        add(completions, 1.0, &mut variants, &mut masses);
    }
    masses.rank();
    words::decoding(text, &beam, family, &variants, &masses)
}

/// A rule proposes the pieces of one notation at a cell.
type Rule = fn(&Scan<'_>, usize, &Lexicon, &mut Pieces);

const AT_FIGURES: [Rule; 13] = [
    rule_code::propose,
    rule_plain::propose,
    rule_unit::propose,
    rule_point::propose,
    rule_limits::propose,
    rule_voltage::propose,
    rule_voltage_code::propose,
    rule_text::propose,
    rule_characteristic::propose,
    rule_british::propose,
    rule_date::propose,
    rule_sections::propose,
    rule_word::propose,
];
const AT_LETTERS: [Rule; 10] = [
    rule_point::propose,
    rule_letter::propose,
    rule_voltage_code::propose,
    rule_word::propose,
    rule_characteristic::propose,
    rule_date::propose,
    rule_chip::propose,
    rule_military::propose,
    rule_text::propose,
    rule_colour::propose,
];
const AT_POINTS: [Rule; 4] = [
    rule_plain::propose,
    rule_unit::propose,
    rule_voltage::propose,
    rule_sections::propose,
];
const AT_OTHER_SIGNS: [Rule; 1] = [rule_text::propose];
const AT_SIGNS: [Rule; 2] = [rule_limits::propose, rule_text::propose];

/// Returns the rules that can start with a glyph.
fn rules_for(glyph: u8) -> &'static [Rule] {
    match (sort(glyph), glyph) {
        (Sort::Digit, _) => &AT_FIGURES,
        (Sort::Letter, _) => &AT_LETTERS,
        (_, b'.' | b',') => &AT_POINTS,
        (_, b'+' | b'-' | scan::PLUS_MINUS) => &AT_SIGNS,
        (Sort::Sign, _) => &AT_OTHER_SIGNS,
        (Sort::Blank, _) => &[],
    }
}
