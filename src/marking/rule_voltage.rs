//! Rated voltages in figures, with a unit, a sign, a letter for the point, or bare.
//!
//! ```text
//! voltage = figures [blank] word           "50V"  "1KV"  "250~"  "63-"  "400 VAC"
//!         | digits letter digits           "1k6"  "6R3"
//!         | figures                        "250"  behind the value, if parts are made for it
//!         | digit digit multiplier         "101": 100 V, as on reel labels
//! ```

use super::lexicon::{Lexicon, Volts};
use super::piece::{Form, Meaning, Pieces, Voltage};
use super::scan::{Figures, Scan, Sort, power_of_ten};
use crate::tables::{TABLES, VoltageKind};

/// The highest voltage that is taken for a rated one.
const MOST_VOLTS: f64 = 100_000.0;

/// Proposes the rated voltages in figures at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let Some(figures) = scan.figures(at) else {
        return;
    };
    let mut out = Proposals {
        lexicon,
        pieces,
        at,
    };
    worded(scan, figures, &mut out);
    pointed(scan, figures, &mut out);
    if scan.sort(figures.end) != Sort::Letter {
        let bare = Volts {
            scale: 1.0,
            kind: VoltageKind::Unstated,
            evidence: lexicon.named.voltage_bare,
            share: 1.0,
        };
        out.add(figures.number(), figures.end, &bare, Form::Bare);
    }
    let ends_in_multiplier = (1..=3).contains(&(figures.digits % 10)) || figures.digits % 10 == 0;
    if at > 0 && figures.n_whole == 3 && figures.n_decimals == 0 && ends_in_multiplier {
        let mantissa = figures.digits / 10;
        let power = usize::try_from(figures.digits % 10).unwrap_or(0);
        let volts = f64::from(mantissa * power_of_ten(power));
        if mantissa >= 10 && lexicon.is_rated(volts) {
            let group = Volts {
                scale: 1.0,
                kind: VoltageKind::Unstated,
                evidence: lexicon.named.voltage_group,
                share: 1.0,
            };
            out.add(volts, figures.end, &group, Form::Bare);
        }
    }
}

struct Proposals<'a> {
    lexicon: &'a Lexicon,
    pieces: &'a mut Pieces,
    at: usize,
}

impl Proposals<'_> {
    fn add(&mut self, number: f64, end: usize, unit: &Volts, form: Form) {
        let factors = &TABLES.ranking.factors;
        let volts = (number * unit.scale * 1000.0).round() / 1000.0;
        if volts <= 0.0 || volts > MOST_VOLTS {
            return;
        }
        let odd = match form {
            _ if self.lexicon.is_rated(volts) => 1.0,
            Form::Said => factors.odd_voltage,
            Form::Bare => factors.odd_bare_voltage,
        };
        let kind = unit.kind;
        let meaning = Meaning::Voltage(Voltage { volts, kind, form });
        self.pieces
            .push((self.at, end), meaning, unit.evidence, unit.share * odd);
    }
}

fn worded(scan: &Scan<'_>, figures: Figures, out: &mut Proposals<'_>) {
    let lexicon = out.lexicon;
    let word_at = scan.after_blanks(figures.end);
    for entry in lexicon.voltage_words.longest(scan, word_at) {
        let end = word_at + entry.glyphs.len();
        let is_point = entry.glyphs.len() == 1 && entry.meaning.scale > 1.0;
        let runs_on = if entry.ends_with_letter() {
            scan.sort(end) == Sort::Letter || (is_point && scan.sort(end) == Sort::Digit)
        } else {
            entry.glyphs.ends_with(b"-") && scan.sort(end) == Sort::Digit
        };
        if !runs_on {
            out.add(figures.number(), end, &entry.meaning, Form::Said);
        }
    }
}

fn pointed(scan: &Scan<'_>, whole: Figures, out: &mut Proposals<'_>) {
    let lexicon = out.lexicon;
    if whole.n_decimals > 0 || whole.n_whole > 2 || whole.digits == 0 {
        return;
    }
    let letter_at = whole.end;
    for entry in lexicon.voltage_points.starting(scan.at(letter_at)) {
        let Some(decimals) = scan.whole(letter_at + 1) else {
            return;
        };
        if decimals.n_whole <= 2 {
            let number = f64::from(whole.digits * power_of_ten(decimals.n_whole) + decimals.digits)
                / f64::from(power_of_ten(decimals.n_whole));
            out.add(number, decimals.end, &entry.meaning, Form::Said);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::check_voltages;
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &[&str]) {
        check_voltages(propose, text, expected);
    }

    #[test]
    fn words_and_signs() {
        check("50V", &["50 V"]);
        check("1KV", &["1 kV"]);
        check("250~", &["250 V ac", "250 V"]);
        check("250 VAC", &["250 V ac", "250 V"]);
        check("63-", &["63 V dc", "63 V"]);
        check("6.3V", &["6.3 V"]);
        check("50Volts", &[]);
    }

    #[test]
    fn a_minus_before_figures_is_a_separator() {
        check("2200-16", &["2.2 kV"]);
    }

    #[test]
    fn letters_for_the_point() {
        check("1k6", &["1.6 kV"]);
        check("6R3", &["6.3 V"]);
        check("1k25", &["1.25 kV"]);
    }

    #[test]
    fn bare_numbers_and_reel_groups() {
        check("250", &["250 V"]);
        check(" 500", &["500 V", "50 V"]);
        check(" 101", &["101 V", "100 V"]);
        check("0", &[]);
        check("999999", &[]);
    }
}
