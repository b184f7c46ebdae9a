//! Temperature characteristics: words, and codes put together from one letter or digit a place.

use super::plain::plain_row;
use serde::Deserialize;

/// Where a word may stand.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Stands {
    /// Anywhere, with a bound behind it.
    Anywhere,
    /// With blanks or signs around it.
    Apart,
    /// Apart, with figures behind it: before the value.
    Before,
}

plain_row! {
    /// A word for a temperature characteristic.
    Characteristic from RawCharacteristic {
        /// The word.
        word: String,
        /// The usual name, where it is another.
        name: Option<String>,
        /// What it says: "0 ppm/K".
        says: String,
        /// The kinds of the ranking table that the part can be.
        kinds: Vec<String>,
        /// Where the word may stand; `None` is anywhere.
        stands: Option<Stands>,
    }
    key(row) row.word.clone();
    check(row) row.word.trim().is_empty().then(|| "the word is empty".to_owned());
    show(row, f) write!(f, "{}: {}", row.word, row.says);
}

plain_row! {
    /// One place of a code for a temperature characteristic: every row of a place goes with every row of the others.
    CharacteristicMark from RawCharacteristicMark {
        /// The code.
        system: String,
        /// The place, from 1.
        place: u8,
        /// The letter or digit.
        mark: char,
        /// What it says there.
        says: String,
        /// The kinds of the ranking table that the part can be; stated with the first place.
        kinds: Option<Vec<String>>,
    }
    key(row) format!("{} {} {}", row.system, row.place, row.mark);
    check(row) (!(1..=3).contains(&row.place)).then(|| "a place is 1, 2 or 3".to_owned());
    show(row, f) write!(f, "{}, place {}, {}: {}", row.system, row.place, row.mark, row.says);
}

plain_row! {
    /// A letter of the old British marking of ceramic parts: the first behind the value, or the second.
    BritishLetter from RawBritishLetter {
        /// "coefficient" or "tolerance".
        place: BritishPlace,
        /// The letter.
        letter: char,
        /// The tolerance, or the coefficient in words.
        says: String,
    }
    key(row) format!("{:?} {}", row.place, row.letter);
    check(row) (row.place == BritishPlace::Tolerance)
        .then(|| super::codes::tolerance(&row.says).err()).flatten();
    show(row, f) write!(f, "{}: {}", row.letter, row.says);
}

/// The place of a letter of the old British marking.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum BritishPlace {
    /// The second letter: temperature coefficient.
    Coefficient,
    /// The first letter: tolerance.
    Tolerance,
}
