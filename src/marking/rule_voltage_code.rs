//! Rated voltages as a code: a digit and a letter, or on chip parts one letter beside three digits.
//!
//! ```text
//! code   = digit letter          "2A" = 100 V, before the value or behind it; no letter follows, nor one or two digits
//! single = letter                "107A"  "A475"; on parts with Cyrillic letters right behind the tolerance letter
//! ```

use super::lexicon::{Lexicon, Volts};
use super::piece::{Form, Meaning, Pieces, Voltage};
use super::scan::{Scan, Sort};
use crate::tables::{TABLES, VoltageKind};

/// Proposes the voltage codes at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    if scan.sort(at) == Sort::Letter {
        single(scan, at, lexicon, pieces);
    }
    let value_follows = scan.whole(at + 2).is_none_or(|value| value.n_whole >= 3);
    let is_apart = scan.sort(at + 2) != Sort::Letter && value_follows;
    for entry in lexicon.voltage_codes.longest(scan, at).filter(|_| is_apart) {
        push((at, at + 2), &entry.meaning, pieces);
    }
}

fn single(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    let n_behind = scan.whole(at + 1).map_or(0, |behind| behind.n_whole);
    let mut n_before = 0;
    while n_before < at && scan.at(at - 1 - n_before).is_ascii_digit() {
        n_before += 1;
    }
    let leads = n_behind == 3 && matches!(scan.sort(at.wrapping_sub(1)), Sort::Blank | Sort::Sign);
    let ends = n_before == 3 && matches!(scan.sort(at + 1), Sort::Blank | Sort::Sign);
    if scan.sort(at.wrapping_sub(1)) == Sort::Letter
        && !matches!(scan.sort(at + 1), Sort::Letter | Sort::Digit)
        && scan.is_cyrillic()
        && let Some(&(volts, evidence)) = lexicon.codes.soviet_volts.get(scan.at(at))
    {
        let soviet = TABLES.ranking.factors.soviet_voltage;
        let voltage = Voltage {
            volts,
            kind: VoltageKind::Dc,
            form: Form::Said,
        };
        pieces.push((at, at + 1), Meaning::Voltage(voltage), evidence, soviet);
    }
    if leads || ends {
        for entry in lexicon.voltage_letters.starting(scan.at(at)) {
            push((at, at + 1), &entry.meaning, pieces);
        }
    }
}

fn push(cells: (usize, usize), found: &Volts, pieces: &mut Pieces) {
    let voltage = Voltage {
        volts: found.scale,
        kind: found.kind,
        form: Form::Said,
    };
    pieces.push(
        cells,
        Meaning::Voltage(voltage),
        found.evidence,
        found.share,
    );
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
    fn a_digit_and_a_letter() {
        check("2A104J", &["100 V dc"]);
        check("1H", &["50 V dc"]);
        check("0J", &["6.3 V dc"]);
        check("2E", &["250 V dc"]);
        check("1V", &["35 V dc"]);
        check("3F", &["3.15 kV dc"]);
        check("2M", &[]);
        check("1KV", &[]);
        check("2K2", &[]);
        check("2C1", &[]);
    }

    #[test]
    fn one_letter_beside_three_digits() {
        check("A475", &["10 V dc"]);
        check("J107", &["6.3 V dc", "63 V dc"]);
        check("A47", &[]);
        check("AB475", &[]);
    }
}
