//! What the tests of the rules share: the pieces of one rule at the first cell that is not blank, in words.

use super::lexicon::{LEXICON, Lexicon};
use super::piece::{Meaning, Pieces};
use super::scan::Scan;
use crate::quantity::Volt;
use crate::tables::VoltageKind;

type Rule = fn(&Scan<'_>, usize, &Lexicon, &mut Pieces);

fn in_words(
    rule: Rule,
    text: &str,
    words: impl Fn(&str, Meaning, &Pieces) -> Option<String>,
) -> Vec<String> {
    let scan = Scan::new(text);
    let mut pieces = Pieces::default();
    rule(&scan, scan.after_blanks(0), &LEXICON, &mut pieces);
    let shown = |piece: &super::piece::Piece| words(piece.text(&scan), piece.meaning, &pieces);
    pieces.list.iter().filter_map(shown).collect()
}

/// Checks the values that a rule proposes.
#[track_caller]
pub(super) fn check_values(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |_, meaning, _| match meaning {
        Meaning::Value(amount) => Some(amount.farads().to_string()),
        _ => None,
    });
    assert_eq!(found, expected, "values of {text:?}");
}

/// Checks the tolerances that a rule proposes, those of values from 10 pF up.
#[track_caller]
pub(super) fn check_tolerances(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |_, meaning, _| match meaning {
        Meaning::Limits(limits) => Some(limits.to_string()),
        Meaning::Letter(row) => Some(LEXICON.letters.get(usize::from(row))?.limits?.to_string()),
        _ => None,
    });
    assert_eq!(found, expected, "tolerances of {text:?}");
}

/// Checks the voltages that a rule proposes.
#[track_caller]
pub(super) fn check_voltages(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |_, meaning, _| match meaning {
        Meaning::Voltage(voltage) => {
            let kind = match voltage.kind {
                VoltageKind::Unstated => "",
                VoltageKind::Dc => " dc",
                VoltageKind::Ac => " ac",
            };
            Some(format!("{}{kind}", Volt::new(voltage.volts)))
        }
        _ => None,
    });
    assert_eq!(found, expected, "voltages of {text:?}");
}

/// Checks the text of the pieces that a rule proposes.
#[track_caller]
pub(super) fn check_pieces(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |piece, _, _| Some(piece.to_owned()));
    assert_eq!(found, expected, "pieces of {text:?}");
}

/// Checks the dates that a rule proposes.
#[track_caller]
pub(super) fn check_dates(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |_, meaning, _| match meaning {
        Meaning::Date(date) => Some(date.in_words()),
        _ => None,
    });
    assert_eq!(found, expected, "dates of {text:?}");
}

/// Checks the sections that a rule proposes.
#[track_caller]
pub(super) fn check_sections(rule: Rule, text: &str, expected: &[&str]) {
    let found = in_words(rule, text, |_, meaning, pieces| match meaning {
        Meaning::Sections(row) => {
            let amounts = pieces.sections.get(usize::from(row))?;
            let words: Vec<String> = amounts.iter().map(|one| one.farads().to_string()).collect();
            Some(words.join(", "))
        }
        _ => None,
    });
    assert_eq!(found, expected, "sections of {text:?}");
}
