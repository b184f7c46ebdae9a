//! From the tables to codes that are put together: characteristics, dates, chip and military codes, text.

use super::compile::{Reasons, Words, kinds_of, said};
use super::lexicon::{ByFirst, ByGlyph, ByKind, Named, NamedEvidence, View};
use super::scan::glyph;
use crate::quantity::{Farad, Tolerance, parse};
use crate::tables::{
    BritishPlace, CharacteristicMark, Family, Field, Group, KINDS, MilitaryMark, MilitaryVoltage,
    Stands, TABLES,
};
use std::collections::HashMap;

/// Codes that are put together from single marks, and text.
pub(super) struct Codes {
    /// Characteristics of three characters, or of two with a blank behind: rows of the words.
    pub(super) characteristics: HashMap<[u8; 3], u16>,
    /// Their first characters.
    pub(super) characteristic_starts: ByGlyph<()>,
    /// One letter behind a tolerance letter (IEC 60384-8): rows of the words.
    pub(super) coefficients: ByGlyph<u16>,
    /// The tolerance letters of old British parts, with their evidence.
    pub(super) british_tolerances: ByGlyph<(Tolerance, u16)>,
    /// The coefficients of old British parts: rows of the words.
    pub(super) british_coefficients: ByGlyph<u16>,
    /// Years by their letter.
    pub(super) years: ByGlyph<u16>,
    /// Months by one character.
    pub(super) months: ByGlyph<u8>,
    /// Months in Roman figures.
    pub(super) roman_months: ByFirst<u8>,
    /// Text, with its evidence.
    pub(super) texts: ByFirst<u16>,
    /// Climatic categories of three letters, with their evidence.
    pub(super) climates: HashMap<[u8; 3], u16>,
    /// Mantissas of chip parts in tenths.
    pub(super) chip_mantissas: ByGlyph<u32>,
    /// Styles of military part numbers.
    pub(super) styles: ByFirst<Style>,
    /// Marks of military part numbers.
    pub(super) marks: HashMap<(Field, u8), Mark>,
    /// Rated voltages by style with its size and by value, rising.
    pub(super) by_value: Vec<ByValue>,
    /// Rated voltages by letter on Soviet parts.
    pub(super) soviet_volts: ByGlyph<(f64, u16)>,
    /// Text of a maker.
    pub(super) lot: u16,
    /// A maker's mark before a chip code.
    pub(super) maker: u16,
    /// A specification number.
    pub(super) specification: u16,
    /// A voltage that follows from style and value.
    pub(super) volts_by_value: u16,
}

/// A style of military part numbers.
pub(super) struct Style {
    /// The family: a row of the words.
    pub(super) word: u16,
    /// The fields in order.
    pub(super) fields: Vec<Field>,
    /// How many of them are always there.
    pub(super) at_least: usize,
}

/// A mark of a field.
#[derive(Clone, Copy)]
pub(super) struct Mark {
    /// The evidence.
    pub(super) evidence: u16,
    /// The voltage.
    pub(super) volts: Option<f64>,
}

/// A rated voltage that holds up to a value.
pub(super) struct ByValue {
    /// The style with its size.
    pub(super) style: Vec<u8>,
    /// Up to this value.
    pub(super) up_to: Farad,
    /// The voltage.
    pub(super) volts: f64,
}

/// Builds the codes; what they mean goes to the words.
pub(super) fn codes(
    words: &mut Words,
    reasons: &mut Reasons,
    named: &NamedEvidence,
    views: &[[View; KINDS]],
) -> Codes {
    let on = reasons.figures(named.characteristic);
    let mut making = Making {
        words,
        reasons,
        views,
        on,
    };
    let mut characteristics = characteristic_words(&mut making);
    let coefficients = characteristic_codes(&mut making, &mut characteristics);
    limits(&mut making, &mut characteristics);
    let (british_tolerances, british_coefficients) = british(&mut making);
    let styles = styles(&mut making);
    let neutral = [1.0; KINDS];
    let reasons = making.reasons;
    Codes {
        characteristic_starts: characteristics.keys().map(|key| (key[0], ())).collect(),
        characteristics,
        coefficients,
        british_tolerances,
        british_coefficients,
        years: TABLES
            .date_marks()
            .filter_map(|row| Some((single(&row.mark)?, row.year?)))
            .collect(),
        months: TABLES
            .date_marks()
            .filter_map(|row| Some((single(&row.mark)?, row.month?)))
            .collect(),
        roman_months: ByFirst::new(TABLES.date_marks().filter_map(|row| {
            let is_roman = row.mark.chars().all(|c| "IVX".contains(c));
            Some((row.mark.clone(), row.month.filter(|_| is_roman)?))
        })),
        texts: texts(reasons, named.text),
        climates: climates(reasons),
        chip_mantissas: TABLES
            .chip_mantissas()
            .map(|row| (glyph(row.letter), row.tenths))
            .collect(),
        styles,
        marks: military_marks(reasons),
        by_value: by_value(),
        soviet_volts: TABLES
            .soviet_voltages()
            .map(|row| {
                let why = format!("voltage letter of Soviet parts for {row}");
                (glyph(row.letter), (row.volts, reasons.add(neutral, why)))
            })
            .collect(),
        lot: reasons.add(
            neutral,
            "text of a maker: series, type or lot, no value".to_owned(),
        ),
        maker: reasons.add(neutral, "a maker's mark before the code".to_owned()),
        specification: reasons.add(
            neutral,
            "a specification number, which does not say the value".to_owned(),
        ),
        volts_by_value: reasons.add(
            neutral,
            "the rated voltage follows from style and value (from memory)".to_owned(),
        ),
    }
}

/// Reads the words; those of two letters go to the codes, because a value may follow them.
fn characteristic_words(making: &mut Making<'_>) -> HashMap<[u8; 3], u16> {
    let mut codes = HashMap::new();
    for row in TABLES.characteristics() {
        let name = row.name.as_ref().unwrap_or(&row.word);
        let stands = row.stands.unwrap_or(Stands::Anywhere);
        let place = making.word(name, &row.says, &row.kinds, stands);
        let glyphs: Vec<u8> = row.word.chars().map(glyph).collect();
        match glyphs.as_slice() {
            &[first, second] if stands == Stands::Anywhere => {
                codes.insert([first, second, b' '], place);
            }
            _ => making.words.index.push((row.word.clone(), place)),
        }
    }
    codes
}

/// Puts the codes together; returns the coefficients by their letter.
fn characteristic_codes(
    making: &mut Making<'_>,
    codes: &mut HashMap<[u8; 3], u16>,
) -> ByGlyph<u16> {
    let mut coefficients = Vec::new();
    for (system, marks) in systems() {
        let at = |place: u8| {
            marks
                .iter()
                .copied()
                .filter(move |mark| mark.place == place)
        };
        let is_pair = at(3).next().is_none();
        for first in at(1) {
            let kinds = first.kinds.clone().unwrap_or_default();
            if is_pair {
                let name = first.mark.to_string();
                let place = making.word(&name, &first.says, &kinds, Stands::Anywhere);
                coefficients.push((glyph(first.mark), place));
            }
            for second in at(2) {
                let thirds: Vec<Option<&CharacteristicMark>> = if is_pair {
                    vec![None]
                } else {
                    at(3).map(Some).collect()
                };
                for third in thirds {
                    let marks = [Some(first), Some(second), third];
                    let key = marks.map(|mark| mark.map_or(b' ', |mark| glyph(mark.mark)));
                    // A pair that is also a word is the word.
                    if codes.contains_key(&key) {
                        continue;
                    }
                    let chosen = || marks.iter().flatten();
                    let name: String = chosen().map(|mark| mark.mark).collect();
                    let says: Vec<&str> = chosen().map(|mark| mark.says.as_str()).collect();
                    let says = format!("{} ({system})", says.join(", "));
                    codes.insert(key, making.word(&name, &says, &kinds, Stands::Apart));
                }
            }
        }
    }
    coefficients.into_iter().collect()
}

struct Making<'a> {
    words: &'a mut Words,
    reasons: &'a mut Reasons,
    views: &'a [[View; KINDS]],
    on: ByKind,
}

impl Making<'_> {
    fn word(&mut self, name: &str, says: &str, kinds: &[String], stands: Stands) -> u16 {
        let family = Family::Group(Group::Ceramic);
        let kinds = kinds_of(family, kinds, &TABLES.ranking, self.views);
        let evidence = self.reasons.add(self.on, format!("characteristic {says}"));
        self.words.add(Named {
            family,
            characteristic: Some(name.to_owned()),
            stands,
            kinds,
            evidence,
        })
    }
}

fn single(mark: &str) -> Option<u8> {
    let mut characters = mark.chars();
    let first = characters.next()?;
    characters.next().is_none().then(|| glyph(first))
}

/// Returns the rows of each code, code by code.
fn systems() -> Vec<(&'static str, Vec<&'static CharacteristicMark>)> {
    let mut systems: Vec<(&str, Vec<&CharacteristicMark>)> = Vec::new();
    for row in TABLES.characteristic_marks() {
        match systems.last_mut() {
            Some((system, rows)) if *system == row.system => rows.push(row),
            _ => systems.push((&row.system, vec![row])),
        }
    }
    systems
}

/// The two letters of military limits: temperature range, then limits. They are read inside of part numbers only, so that
/// their keys end in a glyph of their own.
fn limits(making: &mut Making<'_>, codes: &mut HashMap<[u8; 3], u16>) {
    let of = |field: Field| {
        TABLES
            .military_marks()
            .filter(move |row| row.field == field)
    };
    for range in of(Field::LimitsRange) {
        for limits in of(Field::Limits) {
            let name = format!("{}{}", range.mark, limits.mark);
            let says = format!("{}, {}", range.says, limits.says);
            let place = making.word(&name, &says, &[], Stands::Apart);
            codes.insert([glyph(range.mark), glyph(limits.mark), b'!'], place);
        }
    }
}

type British = (ByGlyph<(Tolerance, u16)>, ByGlyph<u16>);

fn british(making: &mut Making<'_>) -> British {
    let mut tolerances = Vec::new();
    let mut coefficients = Vec::new();
    let class1 = ["class1".to_owned()];
    for row in TABLES.british_letters() {
        match row.place {
            BritishPlace::Tolerance => {
                let why = said("old British tolerance letter for", row);
                let evidence = making.reasons.add([1.0; KINDS], why);
                if let Ok(limits) = Tolerance::parse(&row.says) {
                    tolerances.push((glyph(row.letter), (limits, evidence)));
                }
            }
            BritishPlace::Coefficient => {
                let name = row.says.clone();
                let says = format!("{} on old British parts", row.says);
                let place = making.word(&name, &says, &class1, Stands::Anywhere);
                coefficients.push((glyph(row.letter), place));
            }
        }
    }
    (
        tolerances.into_iter().collect(),
        coefficients.into_iter().collect(),
    )
}

fn styles(making: &mut Making<'_>) -> ByFirst<Style> {
    let mut styles = Vec::new();
    for row in TABLES.military_styles() {
        let Some(family) = row.family() else { continue };
        let kinds = row.kinds.clone().unwrap_or_default();
        let evidence = making
            .reasons
            .add([1.0; KINDS], said("military style,", row));
        let word = making.words.add(Named {
            family,
            characteristic: None,
            stands: Stands::Anywhere,
            kinds: kinds_of(family, &kinds, &TABLES.ranking, making.views),
            evidence,
        });
        let style = Style {
            word,
            fields: row.fields.clone(),
            at_least: row.at_least,
        };
        styles.push((row.style.clone(), style));
    }
    ByFirst::new(styles)
}

fn military_marks(reasons: &mut Reasons) -> HashMap<(Field, u8), Mark> {
    let mark = |row: &MilitaryMark| {
        let evidence = reasons.add([1.0; KINDS], row.says.clone());
        let volts = row.volts;
        ((row.field, glyph(row.mark)), Mark { evidence, volts })
    };
    TABLES.military_marks().map(mark).collect()
}

fn by_value() -> Vec<ByValue> {
    let row = |row: &MilitaryVoltage| {
        Some(ByValue {
            style: row.style.bytes().collect(),
            up_to: parse(&row.up_to).ok()?,
            volts: row.volts,
        })
    };
    TABLES.military_voltages().filter_map(row).collect()
}

fn texts(reasons: &mut Reasons, text: u16) -> ByFirst<u16> {
    let usual = reasons.figures(text);
    ByFirst::new(TABLES.text_words().map(|row| {
        let mut on = usual;
        for (kind, share) in TABLES.ranking.kinds.iter().zip(&mut on) {
            if row
                .kinds
                .as_ref()
                .is_some_and(|kinds| !kinds.contains(&kind.name))
            {
                *share = 0.0;
            }
        }
        (row.word.clone(), reasons.add(on, said("no value:", row)))
    }))
}

fn climates(reasons: &mut Reasons) -> HashMap<[u8; 3], u16> {
    let at = |place: u8| {
        TABLES
            .climate_letters()
            .filter(move |row| row.place == place)
    };
    let mut climates = HashMap::new();
    for first in at(1) {
        for second in at(2) {
            for third in at(3) {
                let says = [first, second, third]
                    .map(|row| row.says.as_str())
                    .join(", ");
                let why = format!("a climatic category, {says} (DIN 40040)");
                let key = [first, second, third].map(|row| glyph(row.letter));
                climates.insert(key, reasons.add([1.0; KINDS], why));
            }
        }
    }
    climates
}
