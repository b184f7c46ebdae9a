//! What makes one reading of a marking more probable than another.

use super::names::family;
use super::read::{Sourced, TableError, TableRow, head, place, read_toml};
use super::{Family, Series};
use crate::quantity::{Farad, Span};
use serde::Deserialize;
use std::collections::BTreeMap;
use toml::Spanned;

/// How many kinds of parts are told apart in ranking.
pub const KINDS: usize = 10;

/// A kind of parts that are marked alike.
#[derive(Clone, Debug, PartialEq)]
pub struct Kind {
    /// Its name in the tables.
    pub name: String,
    /// The families it is made of.
    pub families: Vec<Family>,
    /// Its share in a lot, 0 to 1.
    pub prior: f64,
    /// Where most of the values lie.
    pub common: Span<Farad>,
    /// How usual a marked tolerance is.
    pub tolerances: ToleranceShares,
}

/// How usual tolerances of each width are on a kind of parts, 0 to 1 each.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ToleranceShares {
    /// Up to 0.5 %.
    pub tight: f64,
    /// Up to 1 %.
    pub one: f64,
    /// Up to 3 %.
    pub three: f64,
    /// Up to 5 %.
    pub five: f64,
    /// Up to 10 %.
    pub ten: f64,
    /// Up to 20 %.
    pub twenty: f64,
    /// More, or unlike sides.
    pub wide: f64,
    /// A capacitance.
    pub absolute: f64,
}

/// How often each kind of part carries a mark of one sort.
#[derive(Clone, Debug, PartialEq)]
pub struct Evidence {
    /// Its name in the tables and in the rules.
    pub name: String,
    /// The reason shown to the person.
    pub why: String,
    /// By kind, 0 to 1.
    pub on: [f64; KINDS],
}

/// How usual values of each series are, 0 to 1 each.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields, rename_all = "PascalCase")]
pub struct SeriesShares {
    e3: f64,
    e6: f64,
    e12: f64,
    e24: f64,
    e48: f64,
    e96: f64,
    e192: f64,
    #[serde(rename = "legacy")]
    legacy: f64,
    #[serde(rename = "none")]
    none: f64,
}

impl SeriesShares {
    /// Returns the share of a series; `None` is a value of no series.
    pub fn of(&self, series: Option<Series>) -> f64 {
        match series {
            Some(Series::E3) => self.e3,
            Some(Series::E6) => self.e6,
            Some(Series::E12) => self.e12,
            Some(Series::E24) => self.e24,
            Some(Series::E48) => self.e48,
            Some(Series::E96) => self.e96,
            Some(Series::E192) => self.e192,
            Some(Series::Legacy) => self.legacy,
            None => self.none,
        }
    }
}

/// Shares of the series for a marked tolerance of at least so many percent.
#[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SeriesRow {
    /// The larger side of the tolerance, percent.
    pub at_least: f64,
    /// The shares.
    pub shares: SeriesShares,
}

macro_rules! factors {
    ($($(#[$meta:meta])* $name:ident: $doc:literal),* $(,)?) => {
        /// Single factors, 0 to 1, each with its meaning in the table.
        #[derive(Clone, Copy, Debug, PartialEq, Deserialize)]
        #[serde(deny_unknown_fields)]
        pub struct Factors { $(#[doc = $doc] $(#[$meta])* pub $name: f64),* }

        impl Factors {
            fn all(&self) -> Vec<(&'static str, f64)> {
                vec![$(($doc, self.$name)),*]
            }
        }
    };
}

factors!(
    outside_common: "A capacitance within the usual range, but not where most values lie.",
    outside_range: "A capacitance within a decade of the usual range.",
    far_outside_range: "A capacitance beyond that.",
    outside_voltage: "A voltage within a factor of three of the usual ones.",
    far_outside_voltage: "A voltage beyond that.",
    odd_voltage: "A voltage that is not a usual rated one, with its unit.",
    odd_bare_voltage: "A voltage that is not a usual rated one, without unit.",
    bare_voltage_first: "A bare voltage before the value.",
    tolerance_first: "A tolerance before the value.",
    tolerance_alone: "A tolerance letter with blanks around it.",
    tolerance_runs_on: "A tolerance letter with another behind it, or a capital before it.",
    unit_letter_decimal: "A capital for the unit behind figures with a point.",
    unit_letter_decimal_one: "The same from 1 up.",
    four_figures: "A value of no series with more than three figures.",
    unit_letter_runs_on: "A unit of one letter with a digit right behind it.",
    idle_zero: "Idle zeros behind a letter for the point.",
    unit_letter_apart: "A blank between the figures and a unit of one letter.",
    word_alone: "A family word apart from the figures behind it.",
    temperature_without_degree: "A temperature without its degree sign.",
    percent_unsigned: "A tolerance in figures without its percent sign.",
    #[serde(rename = "percent_below_10_pF")]
    percent_below_ten_picofarads: "A relative tolerance letter below 10 pF.",
    wide_absolute: "A half width above half the value.",
    contradicts: "Two marks that contradict each other.",
    contradicts_word: "A whole word that contradicts another.",
    repeated: "The same said twice.",
    separator: "A separating sign.",
    unexplained_figures: "Figures left unexplained.",
    unexplained_letters: "A letter left unexplained.",
    unexplained_more_letters: "Each further letter left unexplained.",
    unexplained_touching: "Anything left unexplained that touches letters or figures.",
    unexplained_sign: "A sign left unexplained.",
    lot_figures: "Six figures or more: a lot or type number.",
    rare_character: "A rare character in the place of an unreadable one.",
    lot: "A lot, series or type number.",
    characteristic_touches: "A characteristic that touches letters or figures.",
    maker_before_code: "A maker's letters before a chip code.",
    chip_code_beside: "A chip code with other marks beside it.",
    date_two_characters: "A date of two characters.",
    date_other_order: "A date in another order than the standard's.",
    soviet_voltage: "A voltage letter of Soviet parts.",
    letter_for_zero: "The letter O for the zero of a voltage code.",
    colours_reversed: "Colours read from the other end.",
    slip: "A character taken for its look-alike.",
    turned: "A part read upside down.",
    doubtful: "The plausibility of the best reading below which look-alikes are tried.",
    no_value: "A marking that says nothing of the value.",
    unknown_code: "A marking in a code that is not known here.",
    unknown_code_character: "Each character of such a marking.",
    rival_share: "The share from which a rival a thousandfold away counts.",
    rival_cap: "The highest plausibility beside such a rival.",
    least_plausibility: "The least plausibility of a reading.",
    least_share: "The least share of the best reading that is still shown.",
);

/// The whole ranking table.
pub struct Ranking {
    /// The kinds, in the order of all arrays by kind.
    pub kinds: Vec<Kind>,
    /// The evidence.
    pub evidence: Vec<Evidence>,
    /// Series by tolerance, rising.
    pub series: Vec<SeriesRow>,
    /// Series where no tolerance is marked.
    pub unmarked_series: SeriesShares,
    /// Single factors.
    pub factors: Factors,
    title: String,
    source: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawRanking {
    format: Spanned<u32>,
    title: String,
    source: Spanned<String>,
    kind: Vec<Spanned<RawKind>>,
    evidence: Vec<Spanned<RawEvidence>>,
    series: Vec<Spanned<SeriesRow>>,
    unmarked_series: RawUnmarked,
    factors: Spanned<Factors>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawUnmarked {
    shares: SeriesShares,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawKind {
    name: String,
    families: Vec<String>,
    prior: f64,
    common: String,
    tolerances: ToleranceShares,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawEvidence {
    name: String,
    why: String,
    on: BTreeMap<String, f64>,
}

impl Ranking {
    /// Reads the table.
    pub(super) fn read(file: &str, text: &str) -> Result<Self, TableError> {
        let raw: RawRanking = read_toml(file, text)?;
        head(file, text, &raw.format, &raw.source)?;
        let fail = |at, message| place(file, text, at, message);
        let mut kinds = Vec::with_capacity(KINDS);
        for spanned in raw.kind {
            let at = spanned.span();
            kinds.push(kind(spanned.into_inner()).map_err(|message| fail(at, message))?);
        }
        if kinds.len() != KINDS {
            let message = format!("{} kinds; known to the program: {KINDS}", kinds.len());
            return Err(fail(0..0, message));
        }
        let mut evidence: Vec<Evidence> = Vec::with_capacity(raw.evidence.len());
        for spanned in raw.evidence {
            let at = spanned.span();
            let row = spanned.into_inner();
            if evidence.iter().any(|other| other.name == row.name) {
                return Err(fail(at, format!("a second row `{}`", row.name)));
            }
            let on = by_kind(&row.on, &kinds).map_err(|message| fail(at, message))?;
            evidence.push(Evidence {
                name: row.name,
                why: row.why,
                on,
            });
        }
        let mut series: Vec<SeriesRow> = Vec::with_capacity(raw.series.len());
        for spanned in raw.series {
            let at = spanned.span();
            let row = spanned.into_inner();
            if series
                .last()
                .is_some_and(|last| last.at_least >= row.at_least)
            {
                return Err(fail(at, "the tolerances do not rise".to_owned()));
            }
            series.push(row);
        }
        let at = raw.factors.span();
        let factors = raw.factors.into_inner();
        if let Some((words, _)) = factors.all().iter().find(|(_, value)| !is_share(*value)) {
            return Err(fail(at, format!("not from 0 to 1: {words}")));
        }
        Ok(Self {
            kinds,
            evidence,
            series,
            unmarked_series: raw.unmarked_series.shares,
            factors,
            title: raw.title,
            source: raw.source.into_inner(),
        })
    }

    /// Returns the place of a kind in the arrays by kind.
    pub fn kind_named(&self, name: &str) -> Option<usize> {
        self.kinds.iter().position(|kind| kind.name == name)
    }

    /// Returns the place of a piece of evidence.
    pub fn evidence_named(&self, name: &str) -> Option<usize> {
        self.evidence.iter().position(|row| row.name == name)
    }

    /// Returns every figure in words.
    pub(super) fn listing(&self) -> Vec<TableRow> {
        let mut rows = Vec::new();
        for kind in &self.kinds {
            let families: Vec<_> = kind.families.iter().map(|family| family.name()).collect();
            rows.push(format!(
                "{} ({}): share {}",
                kind.name,
                families.join(", "),
                kind.prior
            ));
        }
        rows.extend(self.evidence.iter().map(|row| row.why.clone()));
        let factors = self.factors.all();
        rows.extend(
            factors
                .iter()
                .map(|(words, value)| format!("{words} {value}")),
        );
        let row = |text| Sourced {
            row: text,
            source: self.source.clone(),
        };
        rows.into_iter()
            .map(row)
            .map(|sourced| TableRow {
                table: self.title.clone(),
                text: sourced.row,
                source: sourced.source,
            })
            .collect()
    }
}

fn kind(raw: RawKind) -> Result<Kind, String> {
    if !is_share(raw.prior) {
        return Err("the prior lies from 0 to 1".to_owned());
    }
    let families: Result<Vec<Family>, String> =
        raw.families.iter().map(|name| family(name)).collect();
    Ok(Kind {
        name: raw.name,
        families: families?,
        prior: raw.prior,
        common: Span::parse(&raw.common).map_err(|refusal| refusal.to_string())?,
        tolerances: raw.tolerances,
    })
}

fn by_kind(on: &BTreeMap<String, f64>, kinds: &[Kind]) -> Result<[f64; KINDS], String> {
    let mut shares = [0.0; KINDS];
    for (name, &share) in on {
        let slot = kinds
            .iter()
            .zip(&mut shares)
            .find(|(kind, _)| &kind.name == name);
        match slot {
            Some((_, slot)) if is_share(share) => *slot = share,
            Some(_) => return Err(format!("the share of {name} lies from 0 to 1")),
            None => return Err(format!("`{name}` is no kind")),
        }
    }
    Ok(shares)
}

fn is_share(value: f64) -> bool {
    (0.0..=1.0).contains(&value)
}
