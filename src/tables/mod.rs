//! The facts: what stands in `data/`, parsed once into typed rows, every row with its published source.
//!
//! A table is one file; [`TABLES`] holds all of them. Code that uses a fact takes it from there, so that a new code letter
//! is a row and no code. [`rows`] lists every fact in words, [`check`] reads one file and says what is wrong with it.

mod characteristics;
mod codes;
mod colours;
mod dates;
pub mod document;
mod facts;
mod family;
mod military;
mod names;
mod plain;
mod ranking;
mod read;
mod values;
mod without_bias;
mod words;

pub use characteristics::{
    BritishLetter, BritishPlace, Characteristic, CharacteristicMark, Stands,
};
pub use codes::{
    Multiplier, Parts, Share, Standing, ToleranceLetter, ToleranceWord, VoltageCode, VoltageLetter,
};
pub use colours::{BandUse, ColourMeaning, ColourSystem, ColourWord};
pub use dates::{Beside, ClimateLetter, DateMark, LookAlike, Mistaken, TextWord, Unreadable};
pub use facts::{FamilyFacts, FamilyRow, LossLimit, family_facts};
pub use family::{Dielectric, Family, Group};
pub use military::{
    ChipMantissa, Field, MilitaryMark, MilitaryStyle, MilitaryVoltage, SovietVoltage,
};
pub use names::{ClimateFigure, ClimatePlace, FamilyWord, SafetyWord};
pub use ranking::{
    Evidence, Factors, KINDS, Kind, Ranking, SeriesRow, SeriesShares, ToleranceShares,
};
pub use read::{TableError, TableRow};
pub use values::{RatedVoltages, Series, ValueSeries};
pub use without_bias::{WithoutBias, peak_without_bias};
pub use words::{Place, PointLetter, UnitWord, VoltageKind, VoltagePoint, VoltageWord};

use read::{RawRow, Table, read_rows};
use std::sync::LazyLock;

/// Every table, parsed.
pub static TABLES: LazyLock<Tables> = LazyLock::new(|| {
    let read = Tables::read();
    read.expect("every table of data/ is read by the tests")
});

macro_rules! tables {
    ($($field:ident: $raw:ty => $typed:ty, $file:literal, $doc:literal;)*) => {
        /// Every table, parsed; made only by [`TABLES`].
        pub struct Tables {
            $($field: Table<$typed>,)*
            /// What makes one reading more probable than another.
            pub ranking: Ranking,
            facts: Vec<FamilyRow>,
        }

        impl Tables {
            fn read() -> Result<Self, TableError> {
                $(let $field = read_rows::<$raw>($file, include_str!(concat!("../../data/", $file)))?;)*
                let mut tables = Self {
                    ranking: Ranking::read(RANKING, include_str!("../../data/ranking.toml"))?,
                    facts: Vec::new(),
                    $($field,)*
                };
                let rows: Vec<FamilyRow> = tables.families().copied().collect();
                tables.facts = facts::all_facts(&rows);
                Ok(tables)
            }

            $(
                #[doc = $doc]
                pub fn $field(&self) -> impl Iterator<Item = &$typed> {
                    self.$field.iter()
                }
            )*

            fn listing(&self) -> Vec<TableRow> {
                let mut rows = Vec::new();
                $(rows.extend(self.$field.listing());)*
                rows.extend(self.ranking.listing());
                rows
            }
        }

        /// Reads one table from the text given, by the name of its file in `data/`, and lists its rows; `None` where no
        /// table has that name.
        pub fn check(file: &str, text: &str) -> Option<Result<Vec<TableRow>, TableError>> {
            match file {
                $($file => Some(listed::<$raw>(file, text)),)*
                RANKING => Some(Ranking::read(file, text).map(|ranking| ranking.listing())),
                _ => None,
            }
        }
    };
}

const RANKING: &str = "ranking.toml";

tables! {
    tolerance_letters: codes::RawToleranceLetter => ToleranceLetter, "tolerance-letters.toml", "Returns the tolerance letters.";
    tolerance_words: codes::RawToleranceWord => ToleranceWord, "tolerance-words.toml", "Returns the words for a tolerance.";
    voltage_codes: codes::RawVoltageCode => VoltageCode, "voltage-codes.toml", "Returns the letters of the voltage code.";
    voltage_letters: codes::RawVoltageLetter => VoltageLetter, "voltage-letters.toml", "Returns the single voltage letters.";
    voltage_words: words::RawVoltageWord => VoltageWord, "voltage-words.toml", "Returns the words for a voltage.";
    voltage_points: words::RawVoltagePoint => VoltagePoint, "voltage-points.toml", "Returns the letters for the decimal point of a voltage.";
    rated_voltages: values::RawRatedVoltages => RatedVoltages, "rated-voltages.toml", "Returns the usual rated voltages.";
    value_series: values::RawValueSeries => ValueSeries, "preferred-values.toml", "Returns the series of preferred values.";
    multipliers: codes::RawMultiplier => Multiplier, "multipliers.toml", "Returns the multiplier digits.";
    unit_words: words::RawUnitWord => UnitWord, "unit-words.toml", "Returns the words for a unit of capacitance.";
    point_letters: words::RawPointLetter => PointLetter, "point-letters.toml", "Returns the letters that stand for the decimal point.";
    family_words: names::RawFamilyWord => FamilyWord, "family-words.toml", "Returns the words for families and characteristics.";
    safety_words: names::RawSafetyWord => SafetyWord, "safety-classes.toml", "Returns the classes of interference suppression.";
    climate_figures: names::RawClimateFigure => ClimateFigure, "climate.toml", "Returns the figures of climatic categories.";
    characteristics: characteristics::RawCharacteristic => Characteristic, "characteristics.toml", "Returns the words for temperature characteristics.";
    characteristic_marks: characteristics::RawCharacteristicMark => CharacteristicMark, "characteristic-codes.toml", "Returns the places of codes for temperature characteristics.";
    british_letters: characteristics::RawBritishLetter => BritishLetter, "british-letters.toml", "Returns the letters of the old British marking.";
    date_marks: dates::RawDateMark => DateMark, "date-marks.toml", "Returns the marks for years and months.";
    text_words: dates::RawTextWord => TextWord, "text-words.toml", "Returns the words that say nothing of the values.";
    climate_letters: dates::RawClimateLetter => ClimateLetter, "climate-letters.toml", "Returns the letters of climatic categories.";
    look_alikes: dates::RawLookAlike => LookAlike, "look-alikes.toml", "Returns the characters that are read as others.";
    unreadables: dates::RawUnreadable => Unreadable, "unreadable.toml", "Returns the characters tried where one cannot be read.";
    chip_mantissas: military::RawChipMantissa => ChipMantissa, "chip-mantissas.toml", "Returns the letters of chip ceramic parts.";
    military_styles: military::RawMilitaryStyle => MilitaryStyle, "military-styles.toml", "Returns the styles of military part numbers.";
    military_marks: military::RawMilitaryMark => MilitaryMark, "military-marks.toml", "Returns the letters of military part numbers.";
    military_voltages: military::RawMilitaryVoltage => MilitaryVoltage, "military-voltages.toml", "Returns the voltages that follow from style and value.";
    soviet_voltages: military::RawSovietVoltage => SovietVoltage, "soviet-voltages.toml", "Returns the voltage letters of Soviet parts.";
    colour_words: colours::RawColourWord => ColourWord, "colour-words.toml", "Returns the words for colours.";
    colours: colours::RawColourMeaning => ColourMeaning, "colours.toml", "Returns what colours say.";
    colour_systems: colours::RawColourSystem => ColourSystem, "colour-systems.toml", "Returns the orders of bands and dots.";
    without_bias: without_bias::RawWithoutBias => WithoutBias, "without-bias.toml", "Returns the voltages for polarised families.";
    families: facts::RawFamilyRow => FamilyRow, "families.toml", "Returns the members of families, and the groups without named ones.";
}

/// Lists every row of every table in words with its source, table by table: for the code reference and its look-up.
pub fn rows() -> Vec<TableRow> {
    TABLES.listing()
}

fn listed<R: RawRow>(file: &str, text: &str) -> Result<Vec<TableRow>, TableError> {
    read_rows::<R>(file, text).map(|table| table.listing())
}
