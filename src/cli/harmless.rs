//! Text of others made fit for terminals, spreadsheets and JSON.
//!
//! - A control character or direction mark is shown as its number, `\u{1b}`; in JSON it is escaped, `\u001b`, which keeps
//!   it. Line breaks and tabs inside a cell stay.
//! - A text cell that a spreadsheet would take for a formula (it starts with `=`, `+`, `-`, `@`, a tab or a carriage
//!   return, and is no plain number) gets an apostrophe in front: `'-20+80%`. [`unarmed`] takes it off again, so that what
//!   `judge` wrote can be judged again.

use std::borrow::Cow;
use std::io::{self, Write};

use serde::Serialize;
use serde_json::ser::{CharEscape, CompactFormatter, Formatter};

/// Returns whether a text is plain ASCII, as most are: then there is no need to look at it character by character.
fn is_plain_ascii(text: &str) -> bool {
    text.bytes().all(|byte| (b' '..=b'~').contains(&byte))
}

/// Returns whether a character may reach a terminal or a file as it is.
fn is_hunarmed(character: char) -> bool {
    !character.is_control()
        && !matches!(character, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{206f}' | '\u{feff}')
}

/// Returns the text for one line of a terminal: line breaks as ` | `, other control characters by their number.
pub(super) fn line(text: &str) -> Cow<'_, str> {
    let text = text.trim_matches(['\n', '\r', ' ']);
    if text.chars().all(is_hunarmed) {
        return Cow::Borrowed(text);
    }
    let mut shown = String::with_capacity(text.len());
    for (n, row) in text.lines().enumerate() {
        shown.push_str(if n == 0 { "" } else { " | " });
        shown.push_str(&escaped(row, |_| false));
    }
    Cow::Owned(shown)
}

/// Returns the text for a terminal, its line breaks kept.
pub(super) fn lines(text: &str) -> Cow<'_, str> {
    escaped(text, |c| c == '\n')
}

/// Returns the text as a cell of a CSV file.
pub(super) fn cell(text: &str) -> Cow<'_, str> {
    let shown = escaped(text, |c| matches!(c, '\n' | '\t'));
    if starts_a_formula(text) && plain_number(text).is_none() {
        Cow::Owned(format!("'{shown}"))
    } else {
        shown
    }
}

/// Returns a cell as it was before [`cell`] put an apostrophe in front.
pub(super) fn unarmed(cell: &str) -> &str {
    match cell.strip_prefix('\'') {
        Some(rest) if starts_a_formula(rest) => rest,
        _ => cell,
    }
}

/// Writes a value as JSON on one line, every control character escaped.
pub(super) fn write_json<T: Serialize + ?Sized>(to: &mut dyn Write, value: &T) -> io::Result<()> {
    let mut serializer = serde_json::Serializer::with_formatter(to, Escaping(CompactFormatter));
    value.serialize(&mut serializer).map_err(io::Error::from)
}

/// Returns the number that the text is, if it is nothing else: `-3.5`, `+5`, `21,8`, `1e-9`.
pub(super) fn plain_number(text: &str) -> Option<f64> {
    let looks_like_one = text
        .bytes()
        .all(|b| b.is_ascii_digit() || matches!(b, b'+' | b'-' | b'.' | b',' | b'e' | b'E'));
    if !looks_like_one {
        return None;
    }
    let plain = text.replacen(',', ".", 1);
    plain.parse().ok().filter(|value: &f64| value.is_finite())
}

fn starts_a_formula(text: &str) -> bool {
    text.starts_with(['=', '+', '-', '@', '\t', '\r'])
}

fn escaped(text: &str, stays: impl Fn(char) -> bool) -> Cow<'_, str> {
    if text.chars().all(|c| is_hunarmed(c) || stays(c)) {
        return Cow::Borrowed(text);
    }
    let mut shown = String::with_capacity(text.len() + 8);
    for character in text.chars() {
        if is_hunarmed(character) || stays(character) {
            shown.push(character);
        } else {
            shown.extend(character.escape_unicode());
        }
    }
    Cow::Owned(shown)
}

/// JSON on one line, with the control characters escaped that the format itself would let through.
struct Escaping(CompactFormatter);

impl Formatter for Escaping {
    fn write_string_fragment<W: ?Sized + Write>(
        &mut self,
        writer: &mut W,
        fragment: &str,
    ) -> io::Result<()> {
        if is_plain_ascii(fragment) {
            return writer.write_all(fragment.as_bytes());
        }
        let mut rest = fragment;
        while let Some((at, character)) = rest.char_indices().find(|(_, c)| !is_hunarmed(*c)) {
            let (before, after) = rest.split_at(at);
            writer.write_all(before.as_bytes())?;
            write!(writer, "\\u{:04x}", u32::from(character))?;
            rest = after.get(character.len_utf8()..).unwrap_or_default();
        }
        writer.write_all(rest.as_bytes())
    }

    fn write_char_escape<W: ?Sized + Write>(
        &mut self,
        writer: &mut W,
        escape: CharEscape,
    ) -> io::Result<()> {
        self.0.write_char_escape(writer, escape)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check_cell(text: &str, expected: &str) {
        assert_eq!(cell(text), expected, "writing {text:?}");
    }

    #[test]
    fn formulas_are_defused_and_numbers_are_not() {
        check_cell("=1+2", "'=1+2");
        check_cell("@SUM(A1)", "'@SUM(A1)");
        check_cell("\tx", "'\tx");
        check_cell("-20+80%", "'-20+80%");
        check_cell("-3.5", "-3.5");
        check_cell("+5", "+5");
        check_cell("-3,5", "-3,5");
        check_cell("-1-2", "'-1-2");
        check_cell("-inf", "'-inf");
        check_cell("1E104K", "1E104K");
        check_cell("224J | 100V", "224J | 100V");
        assert_eq!(unarmed("'-20+80%"), "-20+80%");
        assert_eq!(unarmed("'t was"), "'t was");
    }

    #[test]
    fn control_characters_are_shown() {
        check_cell("a\u{1b}[31mb", "a\\u{1b}[31mb");
        check_cell("a\nb", "a\nb");
        assert_eq!(line("224J\r\n100V\u{9b}"), "224J | 100V\\u{9b}");
        let mut json = Vec::new();
        write_json(&mut json, "a\u{1b}\u{9b}\u{202e}\"µ").expect("writing to memory");
        assert_eq!(
            String::from_utf8_lossy(&json),
            r#""a\u001b\u009b\u202e\"µ""#
        );
    }
}
