//! Marks for the date of make, words that say nothing of the values, and characters that are taken for each other.

use super::plain::plain_row;
use serde::Deserialize;

plain_row! {
    /// A letter for a year or a character for a month.
    DateMark from RawDateMark {
        /// The mark.
        mark: String,
        /// The month, 1 to 12.
        month: Option<u8>,
        /// The first year it stands for; it comes again every twenty years.
        year: Option<u16>,
    }
    key(row) format!("{} {}", row.mark, if row.month.is_some() { "month" } else { "year" });
    check(row) (row.month.is_some() == row.year.is_some())
        .then(|| "a mark is for a year or for a month".to_owned());
    show(row, f) match (row.year, row.month) {
        (Some(year), _) => write!(f, "{}: {year}, {}, {}", row.mark, year + 20, year + 40),
        (_, month) => write!(f, "{}: month {}", row.mark, month.unwrap_or(0)),
    };
}

plain_row! {
    /// A word that says nothing of the part's values.
    TextWord from RawTextWord {
        /// The word.
        word: String,
        /// What it says.
        says: String,
        /// The kinds of the ranking table that carry it; none: all.
        kinds: Option<Vec<String>>,
    }
    key(row) row.word.clone();
    check(row) row.word.trim().is_empty().then(|| "the word is empty".to_owned());
    show(row, f) write!(f, "{}: {}", row.word, row.says);
}

plain_row! {
    /// A letter of a climatic category in three letters.
    ClimateLetter from RawClimateLetter {
        /// The place, from 1.
        place: u8,
        /// The letter.
        letter: char,
        /// What it says.
        says: String,
    }
    key(row) format!("{} {}", row.place, row.letter);
    check(row) (!(1..=3).contains(&row.place)).then(|| "a place is 1, 2 or 3".to_owned());
    show(row, f) write!(f, "{} in place {}: {}", row.letter, row.place, row.says);
}

/// How a character comes to be read as another.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Mistaken {
    /// It looks like it on a worn part.
    Worn,
    /// The part is held upside down.
    Turned,
}

plain_row! {
    /// A character that is read as another.
    LookAlike from RawLookAlike {
        /// How.
        how: Mistaken,
        /// The character read.
        read: char,
        /// The character printed.
        printed: char,
    }
    key(row) format!("{:?} {} {}", row.how, row.read, row.printed);
    check(row) (row.how == Mistaken::Worn && row.read == row.printed)
        .then(|| "a character is no look-alike of itself".to_owned());
    show(row, f) write!(f, "{} may be {}, {}", row.read, row.printed, match row.how {
        Mistaken::Worn => "on a worn part",
        Mistaken::Turned => "upside down",
    });
}

plain_row! {
    /// Characters tried where one cannot be read.
    Unreadable from RawUnreadable {
        /// Beside what: "figures" or "letters".
        beside: Beside,
        /// The usual characters, each as probable as the others.
        characters: String,
        /// Rare ones.
        rare: String,
    }
    key(row) format!("{:?}", row.beside);
    check(row) row.characters.is_empty().then(|| "no characters".to_owned());
    show(row, f) write!(f, "{}, rarely {}", row.characters, row.rare);
}

/// What stands beside an unreadable character.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Beside {
    /// Anything.
    Anything,
    /// Several unreadable characters: fewer are tried for each.
    Others,
}
