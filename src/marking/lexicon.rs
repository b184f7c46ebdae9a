//! The tables as the rules want them: words as glyphs, found by their first glyph; evidence by number.

use super::compile_codes::Codes;
use super::compile_colours::Colours;
use super::piece::Class;
use super::scan::{Scan, Sort, glyph, sort};
use crate::quantity::Tolerance;
use crate::tables::{Family, KINDS, Multiplier, Place, Ranking, Series, Stands, VoltageKind};
use std::sync::LazyLock;

/// One figure for each kind of part.
pub(super) type ByKind = [f64; KINDS];

/// What every rule looks things up in.
pub(super) static LEXICON: LazyLock<Lexicon> = LazyLock::new(super::compile::lexicon);

/// Entries found by the first glyph of their word, longer words first.
pub(super) struct ByFirst<T> {
    entries: Vec<Entry<T>>,
    starts: Vec<u16>,
}

/// Meanings of single glyphs.
pub(super) struct ByGlyph<T>(Vec<Option<T>>);

impl<T> ByGlyph<T> {
    /// Returns what a glyph means.
    pub(super) fn get(&self, glyph: u8) -> Option<&T> {
        self.0.get(usize::from(glyph))?.as_ref()
    }
}

impl<T> FromIterator<(u8, T)> for ByGlyph<T> {
    fn from_iter<I: IntoIterator<Item = (u8, T)>>(rows: I) -> Self {
        let mut all: Vec<Option<T>> = (0..=255u8).map(|_| None).collect();
        for (glyph, meaning) in rows {
            if let Some(slot) = all.get_mut(usize::from(glyph)) {
                *slot = Some(meaning);
            }
        }
        Self(all)
    }
}

/// A word and what it means.
pub(super) struct Entry<T> {
    /// The word, folded.
    pub(super) glyphs: Vec<u8>,
    /// What it means.
    pub(super) meaning: T,
}

/// A unit word or a letter for the decimal point.
pub(super) struct Unit {
    /// The power of ten in farad.
    pub(super) exponent: i8,
    /// The evidence.
    pub(super) evidence: u16,
    /// The unit in hundred-thousandths of that power of ten.
    pub(super) scale: u32,
    /// How often it means this.
    pub(super) share: f64,
    /// Where a letter may stand.
    pub(super) place: Place,
}

/// A voltage in the lexicon.
pub(super) struct Volts {
    /// The voltage, or the unit in volt.
    pub(super) scale: f64,
    /// Its kind.
    pub(super) kind: VoltageKind,
    /// The evidence.
    pub(super) evidence: u16,
    /// How often it means this.
    pub(super) share: f64,
}

/// A tolerance letter.
pub(super) struct Letter {
    /// From 10 pF up.
    pub(super) limits: Option<Tolerance>,
    /// Below 10 pF, where it differs.
    pub(super) below_ten_picofarads: Option<Tolerance>,
    /// The evidence.
    pub(super) evidence: u16,
}

/// A family word.
pub(super) struct Named {
    /// The family.
    pub(super) family: Family,
    /// The characteristic.
    pub(super) characteristic: Option<String>,
    /// Where the word may stand.
    pub(super) stands: Stands,
    /// The kinds that the part can be: 1 or 0, or between where only some families of a kind fit.
    pub(super) kinds: ByKind,
    /// The evidence.
    pub(super) evidence: u16,
}

/// How a kind of part looks when the family is known, or when nothing is.
#[derive(Clone, Copy, Default)]
pub(super) struct View {
    /// Its share among the parts in question.
    pub(super) prior: f64,
    /// Lowest and highest usual capacitance, farad.
    pub(super) capacitance: (f64, f64),
    /// Where most capacitances lie, farad.
    pub(super) common: (f64, f64),
    /// Lowest and highest usual voltage, volt.
    pub(super) voltage: (f64, f64),
}

/// A piece of evidence and its reason.
pub(super) struct Reason {
    /// By kind.
    pub(super) on: ByKind,
    /// The reason shown; empty: none.
    pub(super) why: String,
}

macro_rules! named_evidence {
    ($($name:ident)*) => {
        /// Evidence that rules name themselves: rows of the ranking table.
        pub(super) struct NamedEvidence { $(pub(super) $name: u16,)* }

        impl NamedEvidence {
            /// Finds the rows.
            pub(super) fn find(ranking: &Ranking) -> Self {
                let row = |name| number(ranking.evidence_named(name)
                    .expect("the tests find every row named here"));
                Self { $($name: row(stringify!($name)),)* }
            }
        }
    };
}

named_evidence!(
    code3 code3_small code3_polar code4
    plain_pico_short plain_pico_3 plain_pico_4 plain_pico_5
    plain_micro_short plain_micro_3 plain_micro_4 plain_micro_5
    decimal_small_micro decimal_small_pico decimal_one_pico decimal_one_micro decimal_ten_pico decimal_ten_micro
    worn_point
    voltage_code voltage_word voltage_ac voltage_bare voltage_group voltage_letter
    safety family no_voltage no_tolerance
    temperature text characteristic chip_code british sections military date
);

/// The tables, ready for the rules.
pub(super) struct Lexicon {
    /// Evidence, first the rows of the ranking table in their order.
    pub(super) reasons: Vec<Reason>,
    /// The rows that rules name.
    pub(super) named: NamedEvidence,
    /// Evidence that says nothing about the kind.
    pub(super) neutral: u16,
    /// The tolerances in figures and words.
    pub(super) limits: u16,
    /// The temperature and the climatic category.
    pub(super) climate_text: u16,
    /// Unit words.
    pub(super) units: ByFirst<Unit>,
    /// Letters for the decimal point.
    pub(super) points: ByFirst<Unit>,
    /// Tolerance letters, by their place in `letters`.
    pub(super) letter_index: ByFirst<u16>,
    /// Tolerance letters.
    pub(super) letters: Vec<Letter>,
    /// Words for a tolerance.
    pub(super) limit_words: ByFirst<(Tolerance, f64)>,
    /// Digit and letter of the voltage code.
    pub(super) voltage_codes: ByFirst<Volts>,
    /// Single voltage letters.
    pub(super) voltage_letters: ByFirst<Volts>,
    /// Voltage words.
    pub(super) voltage_words: ByFirst<Volts>,
    /// Letters for the decimal point of a voltage.
    pub(super) voltage_points: ByFirst<Volts>,
    /// Family words, by their place in `words`.
    pub(super) word_index: ByFirst<u16>,
    /// Family words.
    pub(super) words: Vec<Named>,
    /// Codes, dates and text.
    pub(super) codes: Codes,
    /// Colours of bands and dots.
    pub(super) colours: Colours,
    /// Classes of interference suppression.
    pub(super) classes: ByFirst<Class>,
    /// Figures of the climatic category: lowest, highest, days.
    pub(super) climate: [Vec<Vec<u8>>; 3],
    /// Multiplier digits.
    pub(super) multipliers: Vec<Multiplier>,
    /// The usual rated voltages, rising.
    pub(super) rated_volts: Vec<f64>,
    /// The coarsest series by mantissa, 0 to 999.
    pub(super) series: Vec<Option<Series>>,
    /// How the kinds look, by the place that [`view_of`] gives.
    pub(super) views: Vec<[View; KINDS]>,
}

impl Lexicon {
    /// Returns how the kinds look, by the place that [`view_of`] gives.
    pub(super) fn view(&self, place: u8) -> &[View; KINDS] {
        self.views
            .get(usize::from(place))
            .unwrap_or(&[NO_VIEW; KINDS])
    }

    /// Returns the coarsest series that has a mantissa from 100 to 999.
    pub(super) fn series_of(&self, mantissa: Option<usize>) -> Option<Series> {
        *self.series.get(mantissa?)?
    }

    /// Returns whether parts are made for this voltage.
    pub(super) fn is_rated(&self, volts: f64) -> bool {
        let close = |rated: &f64| rated.partial_cmp(&volts);
        self.rated_volts
            .binary_search_by(|rated| close(rated).unwrap_or(std::cmp::Ordering::Less))
            .is_ok()
    }

    /// Returns the evidence of a number.
    pub(super) fn reason(&self, evidence: u16) -> Option<&Reason> {
        self.reasons.get(usize::from(evidence))
    }
}

/// A kind that is out of the question.
pub(super) const NO_VIEW: View = View {
    prior: 0.0,
    capacitance: (0.0, 0.0),
    common: (0.0, 0.0),
    voltage: (0.0, 0.0),
};

impl<T> ByFirst<T> {
    /// Makes the index of words and what they mean.
    pub(super) fn new(words: impl IntoIterator<Item = (String, T)>) -> Self {
        let mut entries: Vec<Entry<T>> = words
            .into_iter()
            .map(|(word, meaning)| Entry {
                glyphs: word.chars().map(glyph).collect(),
                meaning,
            })
            .collect();
        let first = |entry: &Entry<T>| entry.glyphs.first().copied().unwrap_or(0);
        entries.sort_by_key(|entry| (first(entry), std::cmp::Reverse(entry.glyphs.len())));
        let starts = (0..=256u16)
            .map(|glyph| number(entries.partition_point(|entry| u16::from(first(entry)) < glyph)))
            .collect();
        Self { entries, starts }
    }

    /// Returns the entries whose word starts with a glyph, longer words first.
    pub(super) fn starting(&self, first: u8) -> &[Entry<T>] {
        let start = |glyph: usize| self.starts.get(glyph).copied().map_or(0, usize::from);
        let first = usize::from(first);
        self.entries
            .get(start(first)..start(first + 1))
            .unwrap_or_default()
    }

    /// Returns the entries of the longest word that stands at a cell.
    pub(super) fn longest<'a>(
        &'a self,
        scan: &Scan<'_>,
        cell: usize,
    ) -> impl Iterator<Item = &'a Entry<T>> {
        let rest = scan.rest(cell);
        let found = self.starting(scan.at(cell));
        let longest = found
            .iter()
            .find(|entry| rest.starts_with(&entry.glyphs))
            .map_or(&[][..], |entry| entry.glyphs.as_slice());
        found
            .iter()
            .filter(move |entry| !longest.is_empty() && entry.glyphs == longest)
    }
}

impl<T> Entry<T> {
    /// Returns whether the word ends with a letter, so that a letter behind it would run on.
    pub(super) fn ends_with_letter(&self) -> bool {
        self.glyphs
            .last()
            .is_some_and(|&last| sort(last) == Sort::Letter)
    }
}

/// Returns the place of a family among the views; `None` is a part of which nothing is known.
pub(super) fn view_of(family: Option<Family>) -> u8 {
    let place = |family| Family::all().position(|other| other == family);
    let place = family
        .and_then(place)
        .and_then(|place| u8::try_from(place + 1).ok());
    place.unwrap_or(0)
}

/// Returns whether a family is a member of the group or the group itself of the other.
pub(super) fn agree(one: Family, other: Family) -> bool {
    one.is_one_of(other) || other.is_one_of(one)
}

/// Returns the family that says more.
pub(super) fn more_precise(one: Family, other: Family) -> Family {
    if other.member().is_some() { other } else { one }
}

/// Returns a place as the number kept in pieces.
pub(super) fn number(place: usize) -> u16 {
    u16::try_from(place).expect("the tables have far fewer than 65536 rows")
}
