//! From text to a quantity.

use super::engineering::exponent_of;
use super::{Quantity, Refusal};

const PREFIXES_ACCEPTED: &str = "a prefix p n u µ m k M G";

/// Reads one quantity, the whole text: "220 nF", "4k7", "0R5", "820" (base unit).
///
/// # Errors
/// Refuses what does not follow the grammar of the module page, and numbers that are not finite, with the place and with
/// what would have been accepted.
pub fn parse<Q: Quantity>(text: &str) -> Result<Q, Refusal> {
    let lead = text.len() - text.trim_start().len();
    let body = text.trim();
    let (value, used) = number(body, lead, Q::NAME)?;
    let rest = body.get(used..).unwrap_or_default();
    let (exponent, value) = match infix_letter::<Q>(rest) {
        Some((exponent, decimals, tail)) => {
            let whole = body.get(..used).unwrap_or_default();
            if whole.contains(['.', ',', 'e', 'E']) {
                let at = lead + used..text.trim_end().len();
                return Err(Refusal::found(
                    at,
                    Q::NAME,
                    rest,
                    "one decimal mark: either a point or the letter",
                ));
            }
            unit::<Q>(tail, text, Q::NAME)?;
            let joined: f64 = format!("{whole}.{decimals}").parse().unwrap_or(value);
            (exponent, joined)
        }
        None => (suffix::<Q>(rest.trim_start(), text)?, value),
    };
    // Powers of ten by division where the exponent is negative: 220 / 1e9 is the nearest double to 220e-9.
    let scaled = if exponent < 0 {
        value / 10f64.powi(-exponent)
    } else {
        value * 10f64.powi(exponent)
    };
    if scaled.is_finite() {
        Ok(Q::from_base(scaled))
    } else {
        Err(Refusal::out_of_range(
            lead..text.trim_end().len(),
            Q::NAME,
            body.to_owned(),
            "a number up to 1e308",
        ))
    }
}

/// Reads the number at the start of a text; returns it with the bytes used. `offset` is where the text stands in the
/// whole, `reading` what it is, both for the refusal.
///
/// # Errors
/// Refuses a text that does not start with a finite decimal number.
pub fn number(text: &str, offset: usize, reading: &'static str) -> Result<(f64, usize), Refusal> {
    let bytes = text.as_bytes();
    let mut end = usize::from(matches!(bytes.first(), Some(b'-' | b'+')));
    let mut n_digits = 0;
    let mut has_point = false;
    while let Some(byte) = bytes.get(end) {
        match byte {
            b'0'..=b'9' => n_digits += 1,
            b'.' | b',' if !has_point => has_point = true,
            _ => break,
        }
        end += 1;
    }
    if n_digits == 0 {
        let end = text.char_indices().nth(1).map_or(text.len(), |(i, _)| i);
        let found = text.get(..end).unwrap_or_default();
        return Err(Refusal::found(
            offset..offset + end,
            reading,
            found,
            "a number",
        ));
    }
    if let Some(b'e' | b'E') = bytes.get(end) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'-' | b'+')));
        let digits = bytes.get(end + 1 + sign..).unwrap_or_default();
        let n_exponent = digits.iter().take_while(|b| b.is_ascii_digit()).count();
        if n_exponent > 0 {
            end += 1 + sign + n_exponent;
        }
    }
    let plain = text.get(..end).unwrap_or_default().replace(',', ".");
    match plain.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok((value, end)),
        _ => Err(Refusal::out_of_range(
            offset..offset + end,
            reading,
            plain,
            "a number up to 1e308",
        )),
    }
}

/// A letter with digits behind it stands for the decimal point: a prefix, or `R` for ohms.
fn infix_letter<Q: Quantity>(rest: &str) -> Option<(i32, &str, &str)> {
    let letter = rest.chars().next()?;
    let exponent = match exponent_of(letter) {
        Some(exponent) => exponent,
        None if letter == 'R' || Q::SYMBOL.chars().eq([letter]) => 0,
        None => return None,
    };
    let after = rest.get(letter.len_utf8()..)?;
    let n_digits = after.bytes().take_while(u8::is_ascii_digit).count();
    (n_digits > 0)
        .then(|| after.split_at(n_digits))
        .map(|(decimals, tail)| (exponent, decimals, tail))
}

/// Reads the optional prefix and unit behind a number; returns the power of ten.
fn suffix<Q: Quantity>(rest: &str, text: &str) -> Result<i32, Refusal> {
    if rest.is_empty() || is_unit::<Q>(rest) {
        return Ok(0);
    }
    let letter = rest.chars().next().unwrap_or_default();
    let Some(exponent) = exponent_of(letter) else {
        return Err(refuse::<Q>(rest, text, Q::NAME));
    };
    unit::<Q>(
        rest.get(letter.len_utf8()..).unwrap_or_default(),
        text,
        "the unit",
    )?;
    Ok(exponent)
}

/// Accepts the end of the text or a spelling of the unit.
fn unit<Q: Quantity>(rest: &str, text: &str, reading: &'static str) -> Result<(), Refusal> {
    if rest.is_empty() || is_unit::<Q>(rest.trim_start()) {
        Ok(())
    } else {
        Err(refuse::<Q>(rest, text, reading))
    }
}

fn is_unit<Q: Quantity>(word: &str) -> bool {
    Q::SPELLINGS.contains(&word)
}

fn refuse<Q: Quantity>(rest: &str, text: &str, reading: &'static str) -> Refusal {
    let end = text.trim_end().len();
    let start = end - rest.len();
    let mut accepted = format!("{PREFIXES_ACCEPTED}, the unit");
    for spelling in Q::SPELLINGS {
        accepted.push(' ');
        accepted.push_str(spelling);
    }
    Refusal::found(start..end, reading, rest, accepted)
}

#[cfg(test)]
mod tests {
    use super::super::{Farad, Hertz, Ohm, Volt};
    use super::*;

    #[track_caller]
    fn check<Q: Quantity + std::fmt::Display>(text: &str, expected: &str) {
        let shown = parse::<Q>(text).map_or_else(|refusal| refusal.to_string(), |q| q.to_string());
        assert_eq!(shown, expected, "reading {text:?}");
    }

    #[test]
    fn numbers_with_prefix_and_unit() {
        check::<Farad>("220 nF", "220 nF");
        check::<Farad>("0.1uF", "100 nF");
        check::<Farad>("4,7 µF", "4.7 µF");
        check::<Farad>("4.7 μF", "4.7 µF");
        check::<Farad>("1e-9", "1 nF");
        check::<Farad>("2.2e-7 F", "220 nF");
        check::<Hertz>("1.25 kHz", "1.25 kHz");
        check::<Ohm>("820", "820 Ω");
        check::<Ohm>("4.7 kohm", "4.7 kΩ");
        check::<Ohm>("150k", "150 kΩ");
        check::<Ohm>("20R", "20 Ω");
        check::<Volt>(" 50 mV ", "50 mV");
    }

    #[test]
    fn the_letter_may_stand_for_the_point() {
        check::<Ohm>("4k7", "4.7 kΩ");
        check::<Farad>("2n2", "2.2 nF");
        check::<Farad>("2n2F", "2.2 nF");
        check::<Ohm>("0R5", "500 mΩ");
        check::<Volt>("6V3", "6.3 V");
    }

    #[test]
    fn refusals_say_what_was_found_and_what_is_accepted() {
        check::<Farad>(
            "",
            "found the end after position 0 while reading capacitance; accepted here: a number",
        );
        check::<Farad>(
            "nF",
            "found `n` at position 1 while reading capacitance; accepted here: a number",
        );
        check::<Farad>(
            "22 xF",
            "found `xF` at position 4 while reading capacitance; accepted here: a prefix p n u µ m k M G, the unit F",
        );
        check::<Farad>(
            "22 nV",
            "found `V` at position 5 while reading the unit; accepted here: a prefix p n u µ m k M G, the unit F",
        );
        check::<Ohm>(
            "4.7k5",
            "found `k5` at position 4 while reading resistance; accepted here: one decimal mark: either a point or the letter",
        );
        check::<Ohm>(
            "1e999",
            "resistance 1e999 is out of range; accepted here: a number up to 1e308",
        );
        check::<Ohm>(
            "nan",
            "found `n` at position 1 while reading resistance; accepted here: a number",
        );
    }
}
