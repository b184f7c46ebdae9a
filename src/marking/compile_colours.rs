//! From the tables to the colours of bands and dots.

use super::compile::{Reasons, Words, kinds_of};
use super::lexicon::{Named, View};
use crate::quantity::Tolerance;
use crate::tables::{BandUse, ColourMeaning, Dielectric, Family, KINDS, Stands, TABLES};
use std::collections::HashMap;

/// The longest word for a colour.
pub(super) const LONGEST: usize = 8;

/// A word padded with zeros.
pub(super) type Key = [u8; LONGEST];

/// Colours of bands and dots.
pub(super) struct Colours {
    /// Colours by their word.
    pub(super) words: HashMap<Key, u8>,
    /// What a colour says in a column.
    pub(super) says: HashMap<(u8, u8), Says>,
    /// The orders of bands.
    pub(super) systems: Vec<System>,
    /// How many colours there are.
    pub(super) count: u8,
    /// The colour of a band that is not there.
    pub(super) none: u8,
    /// The column of coloured tips.
    pub(super) tip: u8,
    /// The word for a wide band.
    pub(super) wide: u8,
    /// Words between bands.
    pub(super) between: u8,
}

/// An order of bands.
pub(super) struct System {
    /// The family: a row of the words.
    pub(super) word: u16,
    /// What each band is for, with its column.
    pub(super) uses: Vec<(BandUse, u8)>,
    /// The unit as a power of ten in farad.
    pub(super) exponent: i8,
    /// How usual it is.
    pub(super) share: f64,
    /// The evidence, which names the order.
    pub(super) evidence: u16,
}

/// What a colour says in a column.
pub(super) struct Says {
    /// A digit, a power of ten or a voltage.
    pub(super) number: Option<f64>,
    /// A tolerance.
    pub(super) limits: Option<Tolerance>,
    /// A tolerance below 10 pF.
    pub(super) small: Option<Tolerance>,
    /// A coefficient: a row of the words.
    pub(super) word: u16,
    /// How often it says this.
    pub(super) share: f64,
    /// The reason.
    pub(super) evidence: u16,
}

/// Builds the colours.
pub(super) fn colours(
    words: &mut Words,
    reasons: &mut Reasons,
    views: &[[View; KINDS]],
) -> Colours {
    let mut names: Vec<&str> = TABLES
        .colour_words()
        .map(|row| row.colour.as_str())
        .collect();
    names.sort_unstable();
    names.dedup();
    let mut columns: Vec<&str> = TABLES.colours().map(|row| row.column.as_str()).collect();
    columns.dedup();
    let place = |list: &[&str], name: &str| {
        let place = list.iter().position(|other| *other == name);
        place
            .and_then(|place| u8::try_from(place).ok())
            .unwrap_or(u8::MAX)
    };
    let base = TABLES.ranking.evidence_named("colour").map(|row| {
        let row = TABLES.ranking.evidence.get(row);
        row.map_or([1.0; KINDS], |row| row.on)
    });
    let systems = TABLES.colour_systems().filter_map(|row| {
        let family = row.family()?;
        let evidence = reasons.add(base.unwrap_or([1.0; KINDS]), row.name.clone());
        let word = words.add(Named {
            family,
            characteristic: None,
            stands: Stands::Anywhere,
            kinds: kinds_of(family, &[], &TABLES.ranking, views),
            evidence,
        });
        Some(System {
            word,
            uses: row
                .uses()
                .map(|(band, column)| (band, place(&columns, column)))
                .collect(),
            exponent: row.exponent,
            share: row.share,
            evidence,
        })
    });
    let systems = systems.collect();
    let says = TABLES.colours().map(|row| {
        let key = (place(&columns, &row.column), place(&names, &row.colour));
        (key, says(row, words, reasons, views))
    });
    let says = says.collect();
    Colours {
        words: TABLES
            .colour_words()
            .map(|row| (key(row.word.as_bytes()), place(&names, &row.colour)))
            .collect(),
        says,
        systems,
        count: u8::try_from(names.len()).unwrap_or(0),
        none: place(&names, "none"),
        tip: place(&columns, "tip"),
        wide: place(&names, "wide"),
        between: place(&names, "between the bands"),
    }
}

/// Returns a word as the key of the index.
pub(super) fn key(word: &[u8]) -> Key {
    let mut key = [0; LONGEST];
    for (slot, &glyph) in key.iter_mut().zip(word) {
        *slot = glyph;
    }
    key
}

fn says(
    row: &ColourMeaning,
    words: &mut Words,
    reasons: &mut Reasons,
    views: &[[View; KINDS]],
) -> Says {
    let evidence = reasons.add(
        [1.0; KINDS],
        format!("as {}: {}", row.column, row.in_words()),
    );
    let family = Family::Member(Dielectric::Disc1);
    Says {
        number: row.says.parse().ok(),
        limits: Tolerance::parse(&row.says).ok(),
        small: row
            .small
            .as_deref()
            .and_then(|small| Tolerance::parse(small).ok()),
        word: words.add(Named {
            family,
            characteristic: Some(row.says.clone()),
            stands: Stands::Anywhere,
            kinds: kinds_of(family, &[], &TABLES.ranking, views),
            evidence,
        }),
        share: row.share.unwrap_or(1.0),
        evidence,
    }
}
