//! Colours of bands and dots: the words for them, what they say in each column, and the order of the bands by system.

use super::codes::tolerance;
use super::family::Family;
use super::names::family;
use super::plain::plain_row;
use serde::Deserialize;

plain_row! {
    /// A word or an abbreviation for a colour.
    ColourWord from RawColourWord {
        /// The word, in lower case or as the standard's two capitals.
        word: String,
        /// The colour it names.
        colour: String,
    }
    key(row) row.word.clone();
    check(row) row.word.trim().is_empty().then(|| "the word is empty".to_owned());
    show(row, f) write!(f, "{}: the colour {}", row.word, row.colour);
}

plain_row! {
    /// What a colour says in a column; a column is one quantity in one system.
    ColourMeaning from RawColourMeaning {
        /// The column.
        column: String,
        /// The colour.
        colour: String,
        /// A digit, a power of ten, volts, or the tolerance or coefficient in words.
        says: String,
        /// The tolerance below 10 pF, where it is another.
        small: Option<String>,
        /// How often it says this where published lists differ, 0 to 1.
        share: Option<f64>,
    }
    key(row) format!("{} {}", row.column, row.colour);
    check(row) row.small.as_deref().and_then(|small| tolerance(small).err());
    show(row, f) match &row.small {
        Some(small) => write!(f, "{} as {}: {}, below 10 pF {small}", row.colour, row.column, row.in_words()),
        None => write!(f, "{} as {}: {}", row.colour, row.column, row.in_words()),
    };
}

impl ColourMeaning {
    /// Returns what the colour says, a power of ten or a voltage written out.
    pub fn in_words(&self) -> String {
        let is_number = self.says.parse::<f64>().is_ok();
        match self.column.rsplit(' ').next() {
            Some("multiplier") if is_number => format!("times 10^{}", self.says),
            Some("voltage") if is_number => format!("{} V", self.says),
            _ => self.says.clone(),
        }
    }
}

/// What a band or dot is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum BandUse {
    /// A digit of the value.
    Digit,
    /// The power of ten.
    Multiplier,
    /// The tolerance.
    Tolerance,
    /// The rated voltage.
    Voltage,
    /// The temperature coefficient.
    Coefficient,
    /// The type of the part: says the system.
    Type,
    /// The characteristic of a mica part.
    Characteristic,
}

plain_row! {
    /// One order of bands or dots.
    ColourSystem from RawColourSystem {
        /// Its name.
        name: String,
        /// The family of such parts.
        family: String,
        /// The bands in the order they are read, each with its column: "digit: digit".
        bands: Vec<String>,
        /// The unit as a power of ten in farad.
        exponent: i8,
        /// How usual the system is among parts with so many colours, 0 to 1.
        share: f64,
        /// Tolerance where no band says it.
        unmarked: Option<String>,
    }
    key(row) row.name.clone();
    check(row) family(&row.family).err()
        .or_else(|| row.bands.iter().find(|band| band_use(band).is_none()).map(|band| format!("`{band}` is no band")));
    show(row, f) write!(f, "{} ({}): {}", row.name, row.family, row.bands.join(", "));
}

impl ColourSystem {
    /// Returns the family of such parts.
    pub fn family(&self) -> Option<Family> {
        Family::named(&self.family)
    }

    /// Returns what each band is for and its column.
    pub fn uses(&self) -> impl Iterator<Item = (BandUse, &str)> {
        self.bands.iter().filter_map(|band| band_use(band))
    }
}

fn band_use(band: &str) -> Option<(BandUse, &str)> {
    let (name, column) = band.split_once(": ")?;
    let used = match name {
        "digit" => BandUse::Digit,
        "multiplier" => BandUse::Multiplier,
        "tolerance" => BandUse::Tolerance,
        "voltage" => BandUse::Voltage,
        "coefficient" => BandUse::Coefficient,
        "type" => BandUse::Type,
        "characteristic" => BandUse::Characteristic,
        _ => return None,
    };
    Some((used, column))
}
