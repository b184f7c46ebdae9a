//! What a rule proposes: a piece of the text with a meaning.

use super::scan::{Figures, Scan};
use crate::quantity::{Farad, Tolerance};
use crate::tables::VoltageKind;

/// A piece of the text and what it may mean.
#[derive(Clone, Copy, Debug)]
pub(super) struct Piece {
    /// The first cell.
    pub(super) start: u8,
    /// The cell behind the last.
    pub(super) end: u8,
    /// How often a kind of part carries such a mark: a row of the lexicon, which also holds the reason shown.
    pub(super) evidence: u16,
    /// What speaks against this meaning whatever the kind, 0 to 1.
    pub(super) weight: f64,
    /// The meaning.
    pub(super) meaning: Meaning,
}

/// The meaning of a piece.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Meaning {
    /// The capacitance.
    Value(Amount),
    /// A tolerance in figures or as a word.
    Limits(Tolerance),
    /// A tolerance letter: a row of the lexicon.
    Letter(u16),
    /// A rated voltage.
    Voltage(Voltage),
    /// A family or a characteristic: a row of the lexicon.
    Word(u16),
    /// A class of interference suppression.
    Safety(Class),
    /// Text that says nothing of the part's values.
    Text,
    /// A sign between others.
    Separator,
    /// Nothing that is known.
    Unexplained,
}

/// A rated voltage as marked.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Voltage {
    /// In volt.
    pub(super) volts: f64,
    /// Direct, alternating, or not stated.
    pub(super) kind: VoltageKind,
    /// Whether the text says that it is a voltage.
    pub(super) form: Form,
}

/// Whether a mark says itself what it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Form {
    /// By a unit, a sign or a code.
    Said,
    /// A mere number.
    Bare,
}

/// A class of interference suppression: the duty and the digit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Class {
    /// Line to line.
    X(u8),
    /// Line to earth.
    Y(u8),
}

/// A capacitance as decimal digits, so that equal values compare equal however they were written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Amount {
    digits: u32,
    exponent: i8,
}

impl Amount {
    /// Makes a capacitance of digits times a power of ten in farad; `None` for zero.
    pub(super) fn new(digits: u32, exponent: i8) -> Option<Self> {
        let (mut digits, mut exponent) = (digits, exponent);
        if digits == 0 {
            return None;
        }
        while digits.is_multiple_of(10) {
            digits /= 10;
            exponent = exponent.saturating_add(1);
        }
        Some(Self { digits, exponent })
    }

    /// Makes a capacitance of figures in a unit that is a power of ten of the farad.
    pub(super) fn of(figures: Figures, unit: i8) -> Option<Self> {
        let n_decimals = i8::try_from(figures.n_decimals).ok()?;
        Self::new(figures.digits, unit.saturating_sub(n_decimals))
    }

    /// Returns the capacitance, the nearest double to the decimal number.
    pub(super) fn farads(self) -> Farad {
        let digits = f64::from(self.digits);
        let exponent = i32::from(self.exponent);
        Farad::new(if exponent < 0 {
            digits / 10f64.powi(-exponent)
        } else {
            digits * 10f64.powi(exponent)
        })
    }

    /// Returns the first three figures as a number from 100 to 999; `None` if there are more than three.
    pub(super) fn mantissa(self) -> Option<usize> {
        let mut digits = self.digits;
        while digits < 100 {
            digits *= 10;
        }
        (digits < 1000).then(|| usize::try_from(digits).unwrap_or(0))
    }
}

/// The pieces proposed so far.
#[derive(Default)]
pub(super) struct Pieces {
    /// All of them, those of one place side by side.
    pub(super) list: Vec<Piece>,
}

impl Pieces {
    /// Adds a piece; one that cannot be (weight 0) is left out.
    pub(super) fn push(
        &mut self,
        (start, end): (usize, usize),
        meaning: Meaning,
        evidence: u16,
        weight: f64,
    ) {
        let cells = u8::try_from(start).ok().zip(u8::try_from(end).ok());
        if let Some((start, end)) = cells.filter(|_| weight > 0.0) {
            self.list.push(Piece {
                start,
                end,
                evidence,
                weight,
                meaning,
            });
        }
    }

    /// Adds a value, unless it is zero.
    pub(super) fn value(
        &mut self,
        cells: (usize, usize),
        amount: Option<Amount>,
        evidence: u16,
        weight: f64,
    ) {
        if let Some(amount) = amount {
            self.push(cells, Meaning::Value(amount), evidence, weight);
        }
    }
}

impl Piece {
    /// Returns the text of the piece.
    pub(super) fn text<'t>(&self, scan: &Scan<'t>) -> &'t str {
        scan.text(usize::from(self.start), usize::from(self.end))
    }

    /// Returns a mask of the cells of the piece.
    pub(super) fn mask(&self) -> u128 {
        let below = |cell: u8| (1u128 << cell.min(127)) - 1;
        below(self.end) & !below(self.start)
    }
}
