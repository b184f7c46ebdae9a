//! Military part numbers, and specification numbers, which say nothing.
//!
//! ```text
//! number        = style digit digit field { field }       "CK05BX104K"  "CSR13C226KM"
//! specification = "M" digits "/" digits ["-" …]           "M39014/01-1593"
//! ```
//! The fields of each style are a row of `military-styles.toml`, their letters rows of `military-marks.toml`.

use super::Role;
use super::compile_codes::Style;
use super::lexicon::Lexicon;
use super::piece::{Amount, Form, Inner, Meaning, Pieces, Voltage};
use super::scan::{Scan, Sort};
use crate::tables::{Field, Parts, VoltageKind};

const PICOFARAD: i8 = -12;

/// Proposes the military part number at a cell.
pub(super) fn propose(scan: &Scan<'_>, at: usize, lexicon: &Lexicon, pieces: &mut Pieces) {
    if matches!(scan.sort(at.wrapping_sub(1)), Sort::Digit | Sort::Letter) {
        return;
    }
    if let Some(end) = specification(scan, at) {
        pieces.push((at, end), Meaning::Text, lexicon.codes.specification, 1.0);
    }
    for entry in lexicon.codes.styles.longest(scan, at) {
        let size_at = at + entry.glyphs.len();
        if scan.at(size_at).is_ascii_digit() && scan.at(size_at + 1).is_ascii_digit() {
            let parts = fields(scan, (at, size_at + 2), &entry.meaning, lexicon);
            if let Some(parts) = parts {
                pieces.group(lexicon.named.military, 1.0, &parts);
            }
        }
    }
}

fn specification(scan: &Scan<'_>, at: usize) -> Option<usize> {
    let number = (scan.at(at) == b'M')
        .then(|| scan.whole(at + 1))
        .flatten()?;
    let sheet = (scan.at(number.end) == b'/')
        .then(|| scan.whole(number.end + 1))
        .flatten()?;
    if number.n_whole < 4 || scan.at(sheet.end) != b'-' {
        return None;
    }
    let mut end = sheet.end + 1;
    while matches!(scan.sort(end), Sort::Digit | Sort::Letter) {
        end += 1;
    }
    Some(end)
}

/// Reads the fields behind a style; `None` if they are not those of the style.
fn fields(
    scan: &Scan<'_>,
    head: (usize, usize),
    style: &Style,
    lexicon: &Lexicon,
) -> Option<Vec<Inner>> {
    let word = lexicon.words.get(usize::from(style.word))?;
    let mut parts: Vec<Inner> = vec![(head, Meaning::Word(style.word), word.evidence)];
    let mut cell = head.1;
    let mut value = None;
    let mut voltage_said = false;
    for (n, field) in style.fields.iter().enumerate() {
        let is_over = !matches!(scan.sort(cell), Sort::Digit | Sort::Letter);
        if is_over && n >= style.at_least {
            break;
        }
        let (end, meaning, why) = read(scan, cell, *field, lexicon)?;
        if let Meaning::Value(amount) = meaning {
            value = Some(amount);
        }
        voltage_said |= matches!(meaning, Meaning::Voltage(_));
        parts.push(((cell, end), meaning, why));
        cell = end;
    }
    if matches!(scan.sort(cell), Sort::Digit | Sort::Letter) {
        return None;
    }
    let farads = value?.farads();
    let style_text = scan.rest(head.0).get(..head.1 - head.0)?;
    let by_value = lexicon
        .codes
        .by_value
        .iter()
        .filter(|row| row.style == style_text && farads.get() <= row.up_to.get() * (1.0 + 1e-9))
        .min_by(|a, b| a.up_to.get().total_cmp(&b.up_to.get()));
    if let Some(row) = by_value.filter(|_| !voltage_said) {
        let meaning = Meaning::Voltage(volts(row.volts));
        parts.insert(1, ((head.1, head.1), meaning, lexicon.codes.volts_by_value));
    }
    Some(parts)
}

fn volts(volts: f64) -> Voltage {
    Voltage {
        volts,
        kind: VoltageKind::Dc,
        form: Form::Said,
    }
}

/// Reads one field: the cell behind it, its meaning, and the evidence.
fn read(
    scan: &Scan<'_>,
    at: usize,
    field: Field,
    lexicon: &Lexicon,
) -> Option<(usize, Meaning, u16)> {
    let codes = &lexicon.codes;
    let glyph = scan.at(at);
    let mark = || codes.marks.get(&(field, glyph)).copied();
    let pair = |last: u8| {
        let row = *codes.characteristics.get(&[glyph, scan.at(at + 1), last])?;
        let word = lexicon.words.get(usize::from(row))?;
        Some((at + 2, Meaning::Word(row), word.evidence))
    };
    match field {
        Field::Limits | Field::LimitsRange => pair(b'!'),
        Field::Coefficient => pair(b' '),
        Field::Value => {
            let (amount, end) = value(scan, at, lexicon)?;
            Some((end, Meaning::Value(amount), lexicon.named.code3))
        }
        Field::Tolerance => {
            let row = lexicon.letter_index.starting(glyph).first()?.meaning;
            let letter = lexicon.letters.get(usize::from(row))?;
            Some((at + 1, Meaning::Letter(row), letter.evidence))
        }
        Field::MicaVoltage
        | Field::TantalumVoltage
        | Field::ChipVoltage
        | Field::CeramicVoltage => {
            let mark = mark()?;
            Some((at + 1, Meaning::Voltage(volts(mark.volts?)), mark.evidence))
        }
        Field::Characteristic | Field::Temperature => Some((
            at + 1,
            Meaning::Part(Role::Characteristic),
            mark()?.evidence,
        )),
        Field::Vibration | Field::Finish | Field::FailureRate => {
            Some((at + 1, Meaning::Text, mark()?.evidence))
        }
    }
}

fn value(scan: &Scan<'_>, at: usize, lexicon: &Lexicon) -> Option<(Amount, usize)> {
    let digit = |cell: usize| {
        let glyph = scan.at(cell);
        glyph.is_ascii_digit().then(|| u32::from(glyph - b'0'))
    };
    if scan.at(at + 1) == b'R' {
        let digits = digit(at)? * 10 + digit(at + 2)?;
        return Some((Amount::new(digits, PICOFARAD - 1)?, at + 3));
    }
    let (tens, ones, power) = (digit(at)?, digit(at + 1)?, digit(at + 2)?);
    let mut rows = lexicon.multipliers.iter();
    let row = rows.find(|row| u32::from(row.digit) == power && row.on != Parts::Polar)?;
    let amount = Amount::new(tens * 10 + ones, PICOFARAD + row.exponent)?;
    Some((amount, at + 3))
}

#[cfg(test)]
mod tests {
    use super::super::testing::{check_pieces, check_values};
    use super::*;

    #[test]
    fn fields_of_a_part_number() {
        check_values(propose, "CK05BX104K", &["100 nF"]);
        check_values(propose, "CSR13C226KM", &["22 µF"]);
        check_values(propose, "CDR01BP101BKZM", &["100 pF"]);
        check_values(propose, "CM05ED101JO3", &["100 pF"]);
        check_values(propose, "CWR09JC106KM", &["10 µF"]);
        check_values(propose, "CK05BX104", &[]);
        check_values(propose, "CK05BX104KQQ", &[]);
    }

    #[test]
    fn specification_numbers_say_nothing() {
        check_pieces(propose, "M39014/01-1593", &["M39014/01-1593"]);
        check_pieces(propose, "M25", &[]);
    }
}
