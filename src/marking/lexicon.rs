//! The tables as the rules want them: words as glyphs, found by their first glyph; evidence by number.

use super::piece::Class;
use super::scan::{Scan, Sort, glyph, sort};
use crate::quantity::Tolerance;
use crate::tables::{
    ClimatePlace, Dielectric, Family, FamilyWord, KINDS, Multiplier, Place, Ranking, Series, Share,
    TABLES, ToleranceLetter, VoltageKind, family_facts,
};
use std::sync::LazyLock;

/// One figure for each kind of part.
pub(super) type ByKind = [f64; KINDS];

/// What every rule looks things up in.
pub(super) static LEXICON: LazyLock<Lexicon> = LazyLock::new(Lexicon::build);

/// Entries found by the first glyph of their word, longer words first.
pub(super) struct ByFirst<T> {
    entries: Vec<Entry<T>>,
    starts: Vec<u16>,
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
    /// How often it means this.
    pub(super) share: f64,
    /// Where a letter may stand.
    pub(super) place: Place,
}

/// A voltage in the lexicon.
pub(super) struct Volts {
    /// The voltage, or the unit in volt.
    pub(super) volts: f64,
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
    pub(super) characteristic: Option<&'static str>,
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
            fn find(ranking: &Ranking) -> Self {
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
    /// Classes of interference suppression.
    pub(super) classes: ByFirst<Class>,
    /// Figures of the climatic category: lowest, highest, days.
    pub(super) climate: [Vec<Vec<u8>>; 3],
    /// Multiplier digits.
    pub(super) multipliers: Vec<Multiplier>,
    rated_volts: Vec<f64>,
    series: Vec<Option<Series>>,
    views: Vec<[View; KINDS]>,
}

impl Lexicon {
    /// Returns how the kinds look for a family; `None` is a part of which nothing is known.
    pub(super) fn view(&self, family: Option<Family>) -> &[View; KINDS] {
        let place = family.map_or(0, |family| place_of(family) + 1);
        self.views.get(place).unwrap_or(&[NO_VIEW; KINDS])
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

    fn build() -> Self {
        let ranking = &TABLES.ranking;
        let named = NamedEvidence::find(ranking);
        let mut reasons = Reasons(
            ranking
                .evidence
                .iter()
                .map(|row| Reason {
                    on: row.on,
                    why: row.why.clone(),
                })
                .collect(),
        );
        let neutral = reasons.add([1.0; KINDS], String::new());
        let limits = reasons.add([1.0; KINDS], "the tolerance is written out".to_owned());
        let climate_text = reasons.add(
            [1.0; KINDS],
            "a temperature or climatic category (IEC 60068-1)".to_owned(),
        );
        let of = |notation: &str| {
            number(
                ranking
                    .evidence_named(notation)
                    .unwrap_or(usize::from(neutral)),
            )
        };
        let units = TABLES.unit_words().map(|row| {
            let unit = Unit {
                exponent: row.exponent,
                evidence: of(&row.notation),
                share: row.share,
                place: Place::Any,
            };
            (row.word.clone(), unit)
        });
        let points = TABLES.point_letters().map(|row| {
            let unit = Unit {
                exponent: row.exponent,
                evidence: of(&row.notation),
                share: row.share,
                place: row.place,
            };
            (row.letter.to_string(), unit)
        });
        let (units, points) = (ByFirst::new(units), ByFirst::new(points));
        let mut letters = Vec::new();
        let mut letter_index = Vec::new();
        for row in TABLES.tolerance_letters() {
            let evidence = reasons.add(shares(&row.share), format!("letter {row}"));
            letter_index.push((row.letter.to_string(), number(letters.len())));
            letters.push(letter(row, evidence));
        }
        let mut voltage_codes = Vec::new();
        for row in TABLES.voltage_codes() {
            for &digit in &row.digits {
                let volts = Volts {
                    volts: row.voltage(digit).get(),
                    kind: VoltageKind::Dc,
                    evidence: named.voltage_code,
                    share: 1.0,
                };
                voltage_codes.push((format!("{digit}{}", row.letter), volts));
            }
        }
        let mut voltage_letters = Vec::new();
        for row in TABLES.voltage_letters() {
            let mut on = shares(&row.share);
            if let Some(base) = reasons.0.get(usize::from(named.voltage_letter)) {
                on.iter_mut()
                    .zip(base.on)
                    .for_each(|(share, base)| *share *= base);
            }
            let why = format!("letter {row}, as on chip parts");
            let volts = Volts {
                volts: row.volts.get(),
                kind: VoltageKind::Dc,
                evidence: reasons.add(on, why),
                share: 1.0,
            };
            voltage_letters.push((row.letter.to_string(), volts));
        }
        let voltage_words = ByFirst::new(TABLES.voltage_words().map(|row| {
            let volts = Volts {
                volts: row.scale.get(),
                kind: row.kind,
                evidence: if row.kind == VoltageKind::Ac {
                    named.voltage_ac
                } else {
                    named.voltage_word
                },
                share: 1.0,
            };
            (row.word.clone(), volts)
        }));
        let voltage_points = ByFirst::new(TABLES.voltage_points().map(|row| {
            let volts = Volts {
                volts: row.scale.get(),
                kind: VoltageKind::Unstated,
                evidence: named.voltage_word,
                share: row.share,
            };
            (row.letter.to_string(), volts)
        }));
        let views = views(ranking);
        let mut words = Vec::new();
        let mut word_index = Vec::new();
        for row in TABLES.family_words() {
            let evidence = reasons.add(
                reasons
                    .0
                    .get(usize::from(named.family))
                    .map_or([1.0; KINDS], |r| r.on),
                format!("word {row}"),
            );
            word_index.push((row.word.clone(), number(words.len())));
            words.push(name(row, evidence, ranking, &views));
        }
        Self {
            named,
            neutral,
            limits,
            climate_text,
            units,
            points,
            letter_index: ByFirst::new(letter_index.into_iter()),
            letters,
            limit_words: ByFirst::new(
                TABLES
                    .tolerance_words()
                    .map(|row| (row.word.clone(), (row.limits, row.share))),
            ),
            voltage_codes: ByFirst::new(voltage_codes.into_iter()),
            voltage_letters: ByFirst::new(voltage_letters.into_iter()),
            voltage_words,
            voltage_points,
            word_index: ByFirst::new(word_index.into_iter()),
            words,
            classes: ByFirst::new(
                TABLES
                    .safety_words()
                    .filter_map(|row| Some((row.word.clone(), class(&row.word)?))),
            ),
            climate: climate(),
            multipliers: TABLES.multipliers().copied().collect(),
            rated_volts: rated_volts(),
            series: series(),
            views,
            reasons: reasons.0,
        }
    }
}

const NO_VIEW: View = View {
    prior: 0.0,
    capacitance: (0.0, 0.0),
    voltage: (0.0, 0.0),
};

struct Reasons(Vec<Reason>);

impl Reasons {
    fn add(&mut self, on: ByKind, why: String) -> u16 {
        self.0.push(Reason { on, why });
        number(self.0.len() - 1)
    }
}

impl<T> ByFirst<T> {
    fn new(words: impl Iterator<Item = (String, T)>) -> Self {
        let mut entries: Vec<Entry<T>> = words
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

fn letter(row: &ToleranceLetter, evidence: u16) -> Letter {
    Letter {
        limits: row.limits,
        below_ten_picofarads: row.below_ten_picofarads,
        evidence,
    }
}

fn name(
    row: &'static FamilyWord,
    evidence: u16,
    ranking: &Ranking,
    views: &[[View; KINDS]],
) -> Named {
    let of_family = views.get(place_of(row.family) + 1);
    let mut kinds: ByKind = of_family.map_or([0.0; KINDS], |views| {
        views.map(|view| if view.prior > 0.0 { 1.0 } else { 0.0 })
    });
    for (kind, fits) in ranking.kinds.iter().zip(&mut kinds) {
        if !row.kinds.is_empty() && !row.kinds.contains(&kind.name) {
            *fits = 0.0;
        }
    }
    Named {
        family: row.family,
        characteristic: row.characteristic.as_deref(),
        kinds,
        evidence,
    }
}

/// The place of a family among all.
fn place_of(family: Family) -> usize {
    Family::all().position(|other| other == family).unwrap_or(0)
}

fn views(ranking: &Ranking) -> Vec<[View; KINDS]> {
    let families = Family::all().map(Some);
    std::iter::once(None)
        .chain(families)
        .map(|family| view(ranking, family))
        .collect()
}

fn view(ranking: &Ranking, family: Option<Family>) -> [View; KINDS] {
    let mut views = [NO_VIEW; KINDS];
    for (kind, view) in ranking.kinds.iter().zip(&mut views) {
        let fits = |&&member: &&Family| {
            family.is_none_or(|family| member.is_one_of(family) || family.is_one_of(member))
        };
        let members: Vec<Family> = kind.families.iter().filter(fits).copied().collect();
        let facts: Vec<_> = members.iter().map(|&member| family_facts(member)).collect();
        let part = members.len() as f64 / kind.families.len() as f64;
        let least = |ends: &mut dyn Iterator<Item = f64>| ends.fold(f64::INFINITY, f64::min);
        let most = |ends: &mut dyn Iterator<Item = f64>| ends.fold(0.0, f64::max);
        *view = View {
            prior: kind.prior * part,
            capacitance: (
                least(&mut facts.iter().filter_map(|f| Some(f.usual_range.low?.get()))),
                most(&mut facts.iter().filter_map(|f| Some(f.usual_range.high?.get()))),
            ),
            voltage: (
                least(
                    &mut facts
                        .iter()
                        .filter_map(|f| Some(f.usual_voltage.low?.get())),
                ),
                most(
                    &mut facts
                        .iter()
                        .filter_map(|f| Some(f.usual_voltage.high?.get())),
                ),
            ),
        };
    }
    let whole: f64 = views.iter().map(|view| view.prior).sum();
    if whole > 0.0 {
        views.iter_mut().for_each(|view| view.prior /= whole);
    }
    views
}

fn shares(share: &Share) -> ByKind {
    let mut on = [share.usual; KINDS];
    for (kind, slot) in TABLES.ranking.kinds.iter().zip(&mut on) {
        if let Some(&share) = share.on.get(&kind.name) {
            *slot = share;
        }
    }
    on
}

fn class(word: &str) -> Option<Class> {
    let mut characters = word.chars();
    let duty = characters.next()?;
    let digit = u8::try_from(characters.next()?.to_digit(10)?).ok()?;
    Some(if duty == 'X' {
        Class::X(digit)
    } else {
        Class::Y(digit)
    })
}

fn climate() -> [Vec<Vec<u8>>; 3] {
    [
        ClimatePlace::Lowest,
        ClimatePlace::Highest,
        ClimatePlace::Days,
    ]
    .map(|place| {
        let rows = TABLES.climate_figures().filter(|row| row.figure == place);
        rows.flat_map(|row| row.values.iter().map(|value| value.clone().into_bytes()))
            .collect()
    })
}

fn rated_volts() -> Vec<f64> {
    let mut volts: Vec<f64> = TABLES
        .rated_voltages()
        .flat_map(|row| row.volts.clone())
        .collect();
    volts.sort_by(f64::total_cmp);
    volts
}

/// The coarsest series by mantissa.
fn series() -> Vec<Option<Series>> {
    let mut table = vec![None; 1000];
    for row in TABLES.value_series() {
        for &mantissa in &row.mantissas {
            if let Some(slot @ None) = table.get_mut(usize::from(mantissa)) {
                *slot = Some(row.series);
            }
        }
    }
    table
}

fn number(place: usize) -> u16 {
    u16::try_from(place).expect("the tables have far fewer than 65536 rows")
}

/// Returns whether a family is a member of the group or the group itself of the other.
pub(super) fn agree(one: Family, other: Family) -> bool {
    one.is_one_of(other) || other.is_one_of(one)
}

/// Returns the family that says more.
pub(super) fn more_precise(one: Family, other: Family) -> Family {
    let member: Option<Dielectric> = other.member();
    if member.is_some() { other } else { one }
}
