//! What crosses to the log: plain data, no engine types, so that a change inside never breaks a log.

use chrono::{DateTime, FixedOffset};

/// The number of an entry in the log; counts up, never used twice.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct RecordId(pub i64);

impl std::fmt::Display for RecordId {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}", self.0)
    }
}

/// What kind of thing was measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum RecordKind {
    /// A part of the lot.
    Part,
    /// A known good part kept beside the meter; its label stands in `marking`.
    Check,
    /// The open terminals.
    Zero,
}

/// One entry to be written: what was typed, and what was made of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    /// The lot the entry belongs to.
    pub lot: String,
    /// What was measured.
    pub kind: RecordKind,
    /// What was typed, in the columns of `judge`.
    pub raw: Raw,
    /// What came out, in the columns of `judge`.
    pub outcome: Outcome,
    /// The entry that this one takes the place of, when an earlier one was corrected or something was added to it.
    pub replaces: Option<RecordId>,
}

/// The raw entry: judge's input columns; `None` is an empty cell.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Raw {
    /// The marking as typed.
    pub marking: String,
    /// The family given by the person: group or member.
    pub family: Option<String>,
    /// The label of the switch.
    pub switch: String,
    /// One reading, or repeats with `/` between; the parked place with a dark or lit lamp.
    pub dial: Option<String>,
    /// One dark edge: a reading, repeats, or `stop`.
    pub dark_from: Option<String>,
    /// The other dark edge.
    pub dark_to: Option<String>,
    /// `never`, `always`, `dark` or `lit`.
    pub lamp: Option<String>,
    /// In degrees Celsius.
    pub temperature: Option<String>,
    /// Hours since the part was last heated.
    pub heated_hours: Option<String>,
    /// Insulation resistance: "12 MΩ".
    pub leakage: Option<String>,
    /// The voltage it was measured at: "63 V".
    pub leakage_voltage: Option<String>,
    /// What the part looks like: "cracked".
    pub looks: Option<String>,
    /// Free text.
    pub note: Option<String>,
    /// The number, counted from 1, of the reading of the marking that the person chose; `None` if it was left to the
    /// program.
    pub chosen_reading: Option<u32>,
    /// The entry exactly as typed at the dial prompt.
    pub typed: String,
}

/// What came out: judge's output columns; capacitances in picofarad, uncertainties standard.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Outcome {
    /// Nominal capacitance of the chosen reading.
    pub nominal_pf: Option<f64>,
    /// Lower limit in force.
    pub low_pf: Option<f64>,
    /// Upper limit in force; `None` for a guaranteed minimum.
    pub high_pf: Option<f64>,
    /// marked, house, family or assumed.
    pub limits_from: Option<String>,
    /// Measured capacitance.
    pub capacitance_pf: Option<f64>,
    /// Combined standard uncertainty, common and own part together.
    pub uncertainty_pf: Option<f64>,
    /// The own part of it: what the reading alone contributes.
    pub own_uncertainty_pf: Option<f64>,
    /// Loss (tan δ), only where proven.
    pub loss: Option<f64>,
    /// Upper limit of the loss.
    pub loss_below: Option<f64>,
    /// From nominal.
    pub deviation_percent: Option<f64>,
    /// Posterior probability of being inside the limits.
    pub probability_inside: Option<f64>,
    /// The same with the flat prior.
    pub probability_flat: Option<f64>,
    /// Posterior probability of the chosen reading of the marking.
    pub reading_probability: Option<f64>,
    /// inside, outside, undecided, dead or unread.
    pub finding: String,
    /// The place, `no place`, or `None` when no tray is in force.
    pub compartment: Option<String>,
    /// In words: why, and what to do next.
    pub remark: String,
}

/// An entry as it stands in the log.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// Its number.
    pub id: RecordId,
    /// When it was written, with the offset of the place.
    pub time: DateTime<FixedOffset>,
    /// When it was taken back or replaced, if it was.
    pub voided: Option<DateTime<FixedOffset>>,
    /// CRC-32 of the whole text of the profile in force, eight lower-case hexadecimal digits.
    pub profile: String,
    /// The entry itself.
    pub record: Record,
}

/// Why something could not be written to or read from the log.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LogFailure {
    /// The act and the path: "cannot append to …/parts.db: disk is full".
    pub message: String,
    /// The next thing to try.
    pub hint: String,
}

impl std::fmt::Display for LogFailure {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}; {}", self.message, self.hint)
    }
}

impl std::error::Error for LogFailure {}
