//! The tray: which compartment takes a part.
//!
//! Compartments are asked in the order of the file and the first that takes the part wins. A key of `takes` whose fact is
//! not known does not match. A part with a safety class goes only where `takes` names that class, so that it never lies
//! among ordinary parts; what nothing takes has no place and is said to have none.

mod place;
mod read;

use std::fmt;

pub use place::place;

use crate::finding::{HouseRules, Verdict, Word};
use crate::marking::Reading;
use crate::meter::Measured;
use crate::quantity::{Farad, Fraction, Span, Volt};
use crate::tables::Family;

/// A place in the tray: row and column, counted from 0; prints "B3".
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Place {
    /// The row: A is 0, past Z comes AA.
    pub row: u16,
    /// The column: 1 is 0.
    pub column: u16,
}

impl fmt::Display for Place {
    /// Writes "B3"; past row Z come AA, AB, …
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut letters = Vec::new();
        let mut rest = u32::from(self.row) + 1;
        while rest > 0 {
            letters.push(char::from(
                b'A' + u8::try_from((rest - 1) % 26).unwrap_or(0),
            ));
            rest = (rest - 1) / 26;
        }
        let row: String = letters.iter().rev().collect();
        write!(f, "{row}{}", u32::from(self.column) + 1)
    }
}

impl Place {
    /// Reads "B3" or "AA12"; `None` for anything else.
    pub fn parse(text: &str) -> Option<Self> {
        let n_letters = text.bytes().take_while(u8::is_ascii_alphabetic).count();
        let (letters, digits) = text.split_at_checked(n_letters)?;
        if letters.is_empty()
            || letters.len() > 3
            || digits.starts_with('0')
            || !digits.bytes().all(|b| b.is_ascii_digit())
        {
            return None;
        }
        let row = letters.bytes().fold(0u32, |row, letter| {
            row * 26 + u32::from(letter.to_ascii_uppercase() - b'A') + 1
        });
        let column: u16 = digits.parse().ok()?;
        Some(Self {
            row: u16::try_from(row - 1).ok()?,
            column: column.checked_sub(1)?,
        })
    }
}

/// A tray with its house rules.
#[derive(Clone, Debug, PartialEq)]
pub struct Tray {
    /// Its name.
    pub name: String,
    /// Number of rows.
    pub rows: u16,
    /// Number of columns.
    pub columns: u16,
    /// The compartments, in the order they are asked.
    pub compartments: Vec<Compartment>,
    /// The house rules.
    pub rules: HouseRules,
}

/// One compartment.
#[derive(Clone, Debug, PartialEq)]
pub struct Compartment {
    /// Where it is.
    pub at: Place,
    /// What is written on it.
    pub label: String,
    /// What it takes.
    pub takes: Takes,
}

/// What a compartment takes; every key that is given must match.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Takes {
    /// The finding.
    pub finding: Option<Word>,
    /// The measured capacitance.
    pub value: Option<Span<Farad>>,
    /// The nominal capacitance.
    pub nominal: Option<Span<Farad>>,
    /// One of these families.
    pub family: Option<Vec<Family>>,
    /// The larger side of the tolerance made to, at most.
    pub tolerance: Option<Fraction>,
    /// Rated voltage, at least.
    pub voltage: Option<Volt>,
    /// The kind of rated voltage.
    pub voltage_kind: Option<VoltageKind>,
    /// Loss, at most, by its upper limit.
    pub loss: Option<f64>,
    /// The interference-suppression class.
    pub safety_class: Option<String>,
    /// The temperature characteristic.
    pub characteristic: Option<String>,
    /// What was tested and is ok.
    pub tested: Vec<Test>,
}

/// The kind of a rated voltage.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum VoltageKind {
    /// Direct.
    Dc,
    /// Alternating.
    Ac,
}

/// Something besides the value that can be tested.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Test {
    /// The loss.
    Loss,
    /// The leakage.
    Leakage,
    /// The looks.
    Looks,
}

/// A part with all that is known of it.
#[derive(Clone, Copy, Debug)]
pub struct Judged<'a> {
    /// The reading of the marking that was judged; `None` if there is none.
    pub reading: Option<&'a Reading>,
    /// The family given by the person or found in the marking.
    pub family: Option<Family>,
    /// What was measured.
    pub measured: &'a Measured,
    /// The finding.
    pub verdict: &'a Verdict,
}

/// Where a part goes.
#[derive(Clone, Debug, PartialEq)]
pub enum Placement {
    /// In this compartment (index into [`Tray::compartments`]).
    At(usize),
    /// Nowhere, and why.
    Unplaced {
        /// The reason: the compartment that came nearest and what it asked for.
        why: String,
    },
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_print_and_read_back() {
        for (row, column, text) in [
            (0, 0, "A1"),
            (1, 2, "B3"),
            (25, 9, "Z10"),
            (26, 0, "AA1"),
            (701, 0, "ZZ1"),
            (702, 0, "AAA1"),
        ] {
            let place = Place { row, column };
            assert_eq!(place.to_string(), text);
            assert_eq!(Place::parse(text), Some(place));
        }
        for text in ["", "A", "1", "A0", "A01", "A1x", "É1", "ABCD1", "A99999"] {
            assert_eq!(Place::parse(text), None, "{text}");
        }
        assert_eq!(Place::parse("b3"), Place::parse("B3"));
    }
}
