//! Chip ceramic mantissas and military part numbers.

use super::family::Family;
use super::names::family;
use super::plain::plain_row;
use serde::Deserialize;

plain_row! {
    /// A letter of the two-character code of chip ceramic parts.
    ChipMantissa from RawChipMantissa {
        /// The letter.
        letter: char,
        /// The figures in tenths: 47 for 4.7.
        tenths: u32,
    }
    key(row) row.letter.to_string();
    check(row) (!(10..100).contains(&row.tenths)).then(|| "a mantissa is 1.0 to 9.9".to_owned());
    show(row, f) write!(f, "{}: {}.{}", row.letter, row.tenths / 10, row.tenths % 10);
}

/// What a field of a military part number says.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Field {
    /// Two letters: temperature range, limits with temperature and voltage.
    Limits,
    /// The first of these two letters: the temperature range.
    LimitsRange,
    /// Two letters: coefficient and its tolerance.
    Coefficient,
    /// Three digits, or R for the point.
    Value,
    /// A tolerance letter.
    Tolerance,
    /// A voltage letter of mica parts.
    MicaVoltage,
    /// A voltage letter of leaded tantalum parts.
    TantalumVoltage,
    /// A voltage letter of chip tantalum parts.
    ChipVoltage,
    /// A voltage letter of chip ceramic parts.
    CeramicVoltage,
    /// The characteristic of mica and glass parts.
    Characteristic,
    /// The temperature range of mica parts.
    Temperature,
    /// Vibration.
    Vibration,
    /// A letter for the finish or the terminals.
    Finish,
    /// The failure rate.
    FailureRate,
}

plain_row! {
    /// A style of military part numbers and the fields behind it; the last ones may be missing.
    MilitaryStyle from RawMilitaryStyle {
        /// The letters; two digits of size stand behind them.
        style: String,
        /// The family.
        family: String,
        /// The kinds of the ranking table that the part can be; none: those of the family.
        kinds: Option<Vec<String>>,
        /// The fields in order.
        fields: Vec<Field>,
        /// How many of them are always there.
        at_least: usize,
    }
    key(row) row.style.clone();
    check(row) family(&row.family).err();
    show(row, f) write!(f, "{}: {}", row.style, row.family);
}

impl MilitaryStyle {
    /// Returns the family.
    pub fn family(&self) -> Option<Family> {
        Family::named(&self.family)
    }
}

plain_row! {
    /// A letter or digit of a field of a military part number.
    MilitaryMark from RawMilitaryMark {
        /// The field.
        field: Field,
        /// The letter or digit.
        mark: char,
        /// What it says.
        says: String,
        /// The rated voltage, in the fields of voltages.
        volts: Option<f64>,
    }
    key(row) format!("{:?} {}", row.field, row.mark);
    check(row) row.volts.filter(|volts| !(0.0..1e5).contains(volts)).map(|volts| format!("{volts} V"));
    show(row, f) write!(f, "{}: {}", row.mark, row.says);
}

plain_row! {
    /// A rated voltage that follows from a military style with its size and the value.
    MilitaryVoltage from RawMilitaryVoltage {
        /// The style with its size.
        style: String,
        /// The highest value for which it holds.
        up_to: String,
        /// The rated voltage.
        volts: f64,
    }
    key(row) format!("{} {:.0}", row.style, 999.0 - row.volts);
    check(row) crate::quantity::parse::<crate::quantity::Farad>(&row.up_to).err().map(|refusal| refusal.to_string());
    show(row, f) write!(f, "{}: {} V up to {}", row.style, row.volts, row.up_to);
}

plain_row! {
    /// A letter for the rated voltage of Soviet parts.
    SovietVoltage from RawSovietVoltage {
        /// The letter.
        letter: char,
        /// The rated voltage.
        volts: f64,
    }
    key(row) row.letter.to_string();
    check(row) (row.volts < 1.0).then(|| "a rated voltage is 1 V or more".to_owned());
    show(row, f) write!(f, "{}: {} V", row.letter, row.volts);
}
