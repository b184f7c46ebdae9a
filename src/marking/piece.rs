//! What a rule proposes: a piece of the text with a meaning.

use super::Role;
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
    /// Whether the piece stands for itself.
    pub(super) place: Standing,
}

/// Whether a piece stands for itself or is a part of a group.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Standing {
    /// For itself.
    Alone,
    /// As a part of a group only.
    Inner,
}

/// The meaning of a piece.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Meaning {
    /// The capacitance.
    Value(Amount),
    /// The capacitances of several sections: a row of [`Pieces::sections`].
    Sections(u16),
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
    /// A date of make.
    Date(Date),
    /// Text that says nothing of the part's values.
    Text,
    /// A further band or dot of what another piece says.
    Part(Role),
    /// Pieces that only stand together: the first of them and how many.
    Group(u16, u8),
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

/// A date of make; 0 is not stated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Date {
    /// The year, or the first of those in question.
    pub(super) year: u16,
    /// After how many years the mark comes again; 0 for never.
    pub(super) cycle: u16,
    /// The month.
    pub(super) month: u8,
    /// The week.
    pub(super) week: u8,
    /// The day.
    pub(super) day: u8,
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
    /// The unit in hundred-thousandths, for units that are no power of ten of the farad.
    unit: u32,
}

/// The powers of ten that a double holds exactly: more than any notation has.
const EXACT_POWERS: [f64; 23] = [
    1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16,
    1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
];

/// Farads below which a tolerance letter says a capacitance (IEC 60062).
pub(super) const SMALL_FARADS: f64 = 10e-12;

/// A unit that is a power of ten of the farad.
pub(super) const WHOLE_UNIT: u32 = 100_000;

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
        Some(Self {
            digits,
            exponent,
            unit: WHOLE_UNIT,
        })
    }

    /// Makes a capacitance of figures in a unit that is a power of ten of the farad.
    pub(super) fn of(figures: Figures, unit: i8) -> Option<Self> {
        let n_decimals = i8::try_from(figures.n_decimals).ok()?;
        Self::new(figures.digits, unit.saturating_sub(n_decimals))
    }

    /// Returns the same figures in a unit of so many hundred-thousandths.
    pub(super) fn in_units(self, unit: u32) -> Self {
        Self { unit, ..self }
    }

    /// Returns the capacitance, the nearest double to the decimal number.
    pub(super) fn farads(self) -> Farad {
        let mut digits = f64::from(self.digits);
        if self.unit != WHOLE_UNIT {
            digits *= f64::from(self.unit) / f64::from(WHOLE_UNIT);
        }
        let power = |n: u8| {
            EXACT_POWERS
                .get(usize::from(n))
                .copied()
                .unwrap_or(f64::INFINITY)
        };
        Farad::new(if self.exponent < 0 {
            digits / power(self.exponent.unsigned_abs())
        } else {
            digits * power(self.exponent.unsigned_abs())
        })
    }

    /// Returns whether a tolerance letter says a capacitance (IEC 60062).
    pub(super) fn is_below_ten_picofarads(self) -> bool {
        self.farads().get() < SMALL_FARADS
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
#[derive(Clone, Default)]
pub(super) struct Pieces {
    /// All of them, those of one place side by side.
    pub(super) list: Vec<Piece>,
    /// The sections of parts with several capacitors.
    pub(super) sections: Vec<Vec<Amount>>,
}

/// A part of a group: its cells, its meaning, and the evidence that holds the reason shown.
pub(super) type Inner = ((usize, usize), Meaning, u16);

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
                place: Standing::Alone,
            });
        }
    }

    /// Adds pieces that only stand together; `evidence` and `weight` are those of the whole.
    pub(super) fn group(&mut self, evidence: u16, weight: f64, parts: &[Inner]) {
        let first = u16::try_from(self.list.len()).unwrap_or(u16::MAX);
        let ends = parts.first().zip(parts.last());
        let Some((&(start, ..), &(end, ..))) = ends.filter(|_| weight > 0.0) else {
            return;
        };
        for &(cells, meaning, evidence) in parts {
            self.push(cells, meaning, evidence, 1.0);
            if let Some(piece) = self.list.last_mut() {
                piece.place = Standing::Inner;
            }
        }
        let n = u8::try_from(parts.len()).unwrap_or(u8::MAX);
        self.push((start.0, end.1), Meaning::Group(first, n), evidence, weight);
    }

    /// Adds the capacitances of several sections.
    pub(super) fn sections(&mut self, cells: (usize, usize), amounts: Vec<Amount>, evidence: u16) {
        let row = u16::try_from(self.sections.len()).unwrap_or(u16::MAX);
        self.sections.push(amounts);
        self.push(cells, Meaning::Sections(row), evidence, 1.0);
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

impl Date {
    /// Returns the date in words: "August 1977, 1997 or 2017".
    pub(super) fn in_words(self) -> String {
        const MONTHS: [&str; 13] = [
            "",
            "January ",
            "February ",
            "March ",
            "April ",
            "May ",
            "June ",
            "July ",
            "August ",
            "September ",
            "October ",
            "November ",
            "December ",
        ];
        let month = MONTHS
            .get(usize::from(self.month))
            .copied()
            .unwrap_or_default();
        let day = match (self.day, self.week) {
            (0, 0) => String::new(),
            (0, week) => format!("week {week} of "),
            (day, _) => format!("{day} "),
        };
        let (first, cycle) = (self.year, self.cycle);
        let years = match cycle {
            0 => first.to_string(),
            10 => format!("a year ending in {}", first % 10),
            _ => format!("{first}, {} or {}", first + cycle, first + 2 * cycle),
        };
        [day.as_str(), month, &years].concat()
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
