//! From the tables to the lexicon.

use super::lexicon::{
    ByFirst, ByKind, Letter, Lexicon, NO_VIEW, Named, NamedEvidence, Reason, Unit, View, Volts,
    number, view_of,
};
use super::piece::{Class, WHOLE_UNIT};
use super::{compile_codes, compile_colours};
use crate::quantity::Farad;
use crate::tables::{
    ClimatePlace, Family, KINDS, Place, Ranking, Series, Share, Stands, TABLES, VoltageKind,
    family_facts,
};

/// Builds the lexicon.
pub(super) fn lexicon() -> Lexicon {
    let ranking = &TABLES.ranking;
    let named = NamedEvidence::find(ranking);
    let mut reasons = Reasons::of(ranking);
    let neutral = reasons.add([1.0; KINDS], String::new());
    let limits = reasons.add([1.0; KINDS], "the tolerance is written out".to_owned());
    let climate_text = reasons.add([1.0; KINDS], "a climatic category (IEC 60068-1)".to_owned());
    let views = views(ranking);
    let (letter_index, letters) = letters(&mut reasons);
    let voltage_letters = voltage_letters(&mut reasons, named.voltage_letter);
    let mut words = Words::default();
    family_words(&mut words, &mut reasons, named.family, ranking, &views);
    let codes = compile_codes::codes(&mut words, &mut reasons, &named, &views);
    let colours = compile_colours::colours(&mut words, &mut reasons, &views);
    let limit_words = TABLES.tolerance_words();
    let classes = TABLES.safety_words();
    Lexicon {
        neutral,
        limits,
        climate_text,
        units: units(ranking, neutral),
        points: points(ranking, neutral),
        letter_index,
        letters,
        limit_words: ByFirst::new(
            limit_words.map(|row| (row.word.clone(), (row.limits, row.share))),
        ),
        voltage_codes: voltage_codes(named.voltage_code),
        voltage_letters,
        voltage_words: voltage_words(&named),
        voltage_points: voltage_points(&named),
        word_index: ByFirst::new(words.index),
        words: words.list,
        codes,
        colours,
        classes: ByFirst::new(
            classes.filter_map(|row| Some((row.word.clone(), class(&row.word)?))),
        ),
        climate: climate(),
        multipliers: TABLES.multipliers().copied().collect(),
        rated_volts: rated_volts(),
        series: series(),
        views,
        named,
        reasons: reasons.0,
    }
}

/// The evidence and its reasons, growing while the tables are read.
pub(super) struct Reasons(Vec<Reason>);

/// The words that name something, growing while the tables are read.
#[derive(Default)]
pub(super) struct Words {
    /// Words to be found by their first glyph.
    pub(super) index: Vec<(String, u16)>,
    /// What they mean.
    pub(super) list: Vec<Named>,
}

impl Words {
    /// Adds a meaning; returns its row.
    pub(super) fn add(&mut self, named: Named) -> u16 {
        self.list.push(named);
        number(self.list.len() - 1)
    }
}

impl Reasons {
    fn of(ranking: &Ranking) -> Self {
        let rows = ranking.evidence.iter();
        let reason = |row: &crate::tables::Evidence| Reason {
            on: row.on,
            why: row.why.clone(),
        };
        Self(rows.map(reason).collect())
    }

    /// Adds evidence with its reason.
    pub(super) fn add(&mut self, on: ByKind, why: String) -> u16 {
        self.0.push(Reason { on, why });
        number(self.0.len() - 1)
    }

    /// Returns the figures of a row.
    pub(super) fn figures(&self, evidence: u16) -> ByKind {
        self.0
            .get(usize::from(evidence))
            .map_or([1.0; KINDS], |reason| reason.on)
    }
}

/// Returns what a row says, without the mark that it starts with: the mark is shown anyway.
pub(super) fn said(what: &str, row: &impl std::fmt::Display) -> String {
    let row = row.to_string();
    let meaning = row
        .split_once(": ")
        .map_or(row.as_str(), |(_, meaning)| meaning);
    format!("{what} {meaning}")
}

fn evidence(ranking: &Ranking, notation: &str, neutral: u16) -> u16 {
    ranking.evidence_named(notation).map_or(neutral, number)
}

fn units(ranking: &Ranking, neutral: u16) -> ByFirst<Unit> {
    ByFirst::new(TABLES.unit_words().map(|row| {
        let unit = Unit {
            exponent: row.exponent,
            scale: row.scale.unwrap_or(WHOLE_UNIT),
            evidence: evidence(ranking, &row.notation, neutral),
            share: row.share,
            place: Place::Any,
        };
        (row.word.clone(), unit)
    }))
}

fn points(ranking: &Ranking, neutral: u16) -> ByFirst<Unit> {
    ByFirst::new(TABLES.point_letters().map(|row| {
        let unit = Unit {
            exponent: row.exponent,
            scale: WHOLE_UNIT,
            evidence: evidence(ranking, &row.notation, neutral),
            share: row.share,
            place: row.place,
        };
        (row.letter.to_string(), unit)
    }))
}

fn letters(reasons: &mut Reasons) -> (ByFirst<u16>, Vec<Letter>) {
    let mut letters = Vec::new();
    let mut index = Vec::new();
    for row in TABLES.tolerance_letters() {
        index.push((row.letter.to_string(), number(letters.len())));
        letters.push(Letter {
            limits: row.limits,
            below_ten_picofarads: row.below_ten_picofarads,
            evidence: reasons.add(shares(&row.share), said("tolerance letter for", row)),
        });
    }
    (ByFirst::new(index), letters)
}

fn voltage_codes(evidence: u16) -> ByFirst<Volts> {
    let mut codes = Vec::new();
    for row in TABLES.voltage_codes() {
        for &digit in &row.digits {
            let volts = Volts {
                scale: row.voltage(digit).get(),
                kind: VoltageKind::Dc,
                evidence,
                share: 1.0,
            };
            if digit == 0 {
                // The letter O is printed for the zero now and then.
                let share = TABLES.ranking.factors.letter_for_zero;
                codes.push((format!("O{}", row.letter), Volts { share, ..volts }));
            }
            codes.push((format!("{digit}{}", row.letter), volts));
        }
    }
    ByFirst::new(codes)
}

fn voltage_letters(reasons: &mut Reasons, base: u16) -> ByFirst<Volts> {
    let mut letters = Vec::new();
    for row in TABLES.voltage_letters() {
        let mut on = shares(&row.share);
        for (share, base) in on.iter_mut().zip(reasons.figures(base)) {
            *share *= base;
        }
        let volts = Volts {
            scale: row.volts.get(),
            kind: VoltageKind::Dc,
            evidence: reasons.add(on, said("voltage letter of chip parts for", row)),
            share: 1.0,
        };
        letters.push((row.letter.to_string(), volts));
    }
    ByFirst::new(letters)
}

fn voltage_words(named: &NamedEvidence) -> ByFirst<Volts> {
    ByFirst::new(TABLES.voltage_words().map(|row| {
        let volts = Volts {
            scale: row.scale.get(),
            kind: row.kind,
            evidence: match row.kind {
                VoltageKind::Ac => named.voltage_ac,
                VoltageKind::Dc | VoltageKind::Unstated => named.voltage_word,
            },
            share: 1.0,
        };
        (row.word.clone(), volts)
    }))
}

fn voltage_points(named: &NamedEvidence) -> ByFirst<Volts> {
    ByFirst::new(TABLES.voltage_points().map(|row| {
        let volts = Volts {
            scale: row.scale.get(),
            kind: VoltageKind::Unstated,
            evidence: named.voltage_word,
            share: row.share,
        };
        (row.letter.to_string(), volts)
    }))
}

fn family_words(
    words: &mut Words,
    reasons: &mut Reasons,
    base: u16,
    ranking: &Ranking,
    views: &[[View; KINDS]],
) {
    for row in TABLES.family_words() {
        let evidence = reasons.add(reasons.figures(base), said("word for", row));
        let kinds = kinds_of(row.family, &row.kinds, ranking, views);
        let place = words.add(Named {
            family: row.family,
            characteristic: None,
            stands: Stands::Anywhere,
            kinds,
            evidence,
        });
        words.index.push((row.word.clone(), place));
    }
}

/// Returns which kinds of part a family, narrowed to the kinds named, can be: 1 or 0.
pub(super) fn kinds_of(
    family: Family,
    named: &[String],
    ranking: &Ranking,
    views: &[[View; KINDS]],
) -> ByKind {
    let of_family = views.get(usize::from(view_of(Some(family))));
    let mut kinds: ByKind = of_family.map_or([0.0; KINDS], |views| {
        views.map(|view| if view.prior > 0.0 { 1.0 } else { 0.0 })
    });
    for (kind, fits) in ranking.kinds.iter().zip(&mut kinds) {
        if !named.is_empty() && !named.contains(&kind.name) {
            *fits = 0.0;
        }
    }
    kinds
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
            common: (
                kind.common.low.map_or(0.0, Farad::get),
                kind.common.high.map_or(f64::INFINITY, Farad::get),
            ),
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
        for view in &mut views {
            view.prior /= whole;
        }
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
