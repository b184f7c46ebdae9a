//! A calibration as the table `[calibration]` of a profile.

use std::fmt::Write;

use crate::meter::model::stored_names;
use crate::meter::read::{calibration_starts, profile_hash};
use crate::meter::{Calibration, Meter};

impl Calibration {
    /// Writes the table as it stands in a profile, its head line first. `profile_hash` is that of the bytes before it;
    /// numbers are written with all their digits.
    pub fn table(&self, meter: &Meter, profile_hash: &str) -> String {
        let mut text = String::from("[calibration]\n");
        let names: Vec<String> = stored_names(meter)
            .iter()
            .map(|name| quoted(name))
            .collect();
        let date = if is_date(&self.date) {
            self.date.clone()
        } else {
            quoted(&self.date)
        };
        // Writing to a string cannot fail.
        let _ = writeln!(text, "date = {date}");
        let _ = writeln!(text, "profile_hash = \"{profile_hash}\"");
        let _ = writeln!(text, "observations = {}", self.observations);
        let _ = writeln!(text, "reduced_chi_square = {:?}", self.reduced_chi_square);
        let _ = writeln!(text, "names = [{}]", names.join(", "));
        let _ = writeln!(text, "estimate = [{}]", numbers(&self.fit.estimate));
        text.push_str("covariance = [\n");
        for row in &self.fit.covariance {
            let _ = writeln!(text, "  [{}],", numbers(row));
        }
        text.push_str("]\n");
        text
    }

    /// Returns the text of the profile, byte for byte, with the table appended, or put in the place of the one that is
    /// there.
    pub fn written_into(&self, meter: &Meter, profile: &str) -> String {
        let starts = calibration_starts(profile);
        let (before, old) = profile.split_at(starts);
        let mut text = before.to_owned();
        if old.is_empty() {
            if !text.ends_with('\n') {
                text.push('\n');
            }
            text.push('\n');
        }
        let hash = profile_hash(&text);
        text.push_str(&self.table(meter, &hash));
        text.push_str(after_table(old));
        text
    }
}

/// What follows the first table of a text: from the next head line on.
fn after_table(text: &str) -> &str {
    let mut n_passed = 0;
    for (i, line) in text.split_inclusive('\n').enumerate() {
        if i > 0 && is_head(line) {
            return text.get(n_passed..).unwrap_or_default();
        }
        n_passed += line.len();
    }
    ""
}

/// A head line names a table; a row of the covariance holds numbers.
fn is_head(line: &str) -> bool {
    let name = line.trim_start().trim_start_matches('[');
    line.trim_start().starts_with('[')
        && name
            .trim_start()
            .starts_with(|c: char| c.is_ascii_alphabetic() || c == '"')
}

fn numbers(row: &[f64]) -> String {
    let shown: Vec<String> = row.iter().map(|x| format!("{x:?}")).collect();
    shown.join(", ")
}

/// An RFC 3339 date with a time, as TOML takes it without quotes.
fn is_date(text: &str) -> bool {
    let bytes = text.as_bytes();
    bytes.len() >= 19
        && bytes[4] == b'-'
        && bytes[10] == b'T'
        && bytes
            .iter()
            .all(|b| b.is_ascii_digit() || b"-:.+TZ".contains(b))
}

/// A TOML basic string.
fn quoted(text: &str) -> String {
    let mut shown = String::from("\"");
    for c in text.chars() {
        match c {
            '"' | '\\' => {
                shown.push('\\');
                shown.push(c);
            }
            c if c.is_control() => {
                let _ = write!(shown, "\\u{:04x}", u32::from(c));
            }
            c => shown.push(c),
        }
    }
    shown.push('"');
    shown
}
