//! From the text of a tray file to a tray, every mistake reported with its place.

use toml::Spanned;
use toml::de::DeValue;

use super::{Compartment, Place, Takes, Test, Tray, VoltageKind};
use crate::finding::{HouseRules, PriorKind, Word};
use crate::quantity::{Fraction, Quantity, Span, Tolerance, Volt, harmless};
use crate::tables::Family;
use crate::tables::document::{Bound, Complaint, Document, Need, Placed, Section, nearest, tree};

const MOST_COMPARTMENTS: usize = 10_000;
const MOST_ROWS: u32 = 1000;
const MOST_PARTS: u32 = 1_000_000;
const TAKES: [&str; 11] = [
    "finding",
    "value",
    "nominal",
    "family",
    "tolerance",
    "voltage",
    "voltage_kind",
    "loss",
    "safety_class",
    "characteristic",
    "tested",
];

impl Tray {
    /// Reads a tray file; a file with mistakes gives all of them.
    ///
    /// # Errors
    /// Every mistake found, each with its place. What is merely unwise (a compartment without `finding`) is a warning
    /// among `Ok`'s.
    pub fn read(text: &str) -> Result<(Self, Vec<Complaint>), Vec<Complaint>> {
        let (table, mut document) = tree(text);
        let root = Document::root(&table);
        document.check_keys(&root, &["name", "rows", "columns", "compartment", "rules"]);
        let name = document.text_of(&root, "name", Need::Required);
        let rows = read_count(&mut document, &root, "rows");
        let columns = read_count(&mut document, &root, "columns");
        let size = rows.zip(columns);
        let sections = document.sections(&root, "compartment", MOST_COMPARTMENTS, Need::Required);
        let mut compartments: Vec<Compartment> = Vec::new();
        let mut without_finding = Vec::new();
        for section in &sections {
            if let Some(compartment) = read_compartment(&mut document, section, size) {
                if compartment.takes.finding.is_none() {
                    let place = section
                        .place_of("takes")
                        .unwrap_or_else(|| section.at.clone());
                    without_finding.push((place, compartment.at));
                }
                compartments.push(compartment);
            }
        }
        let rules = document
            .section(&root, "rules", Need::Optional)
            .map_or_else(HouseRules::default, |section| {
                read_rules(&mut document, &section)
            });
        if !document.is_clean() {
            return Err(document.into_complaints());
        }
        let (Some(name), Some((rows, columns))) = (name, size) else {
            return Err(document.into_complaints());
        };
        for (place, at) in without_finding {
            document.complain(
                place,
                format!("compartment {at} has no `finding`: it takes parts that are outside too"),
            );
        }
        Ok((
            Self {
                name: name.value,
                rows,
                columns,
                compartments,
                rules,
            },
            document.into_complaints(),
        ))
    }
}

fn read_count(document: &mut Document<'_>, section: &Section<'_>, key: &str) -> Option<u16> {
    let count = document.count(section, key, 1..=MOST_ROWS, Need::Required)?;
    u16::try_from(count).ok()
}

fn read_compartment(
    document: &mut Document<'_>,
    section: &Section<'_>,
    size: Option<(u16, u16)>,
) -> Option<Compartment> {
    document.check_keys(section, &["at", "label", "takes"]);
    let at = document.text_of(section, "at", Need::Required);
    let label = document
        .text_of(section, "label", Need::Optional)
        .map_or(String::new(), |label| label.value);
    let takes = document
        .section(section, "takes", Need::Required)
        .map(|takes| read_takes(document, &takes));
    let at = at?;
    let Some(place) = Place::parse(&at.value) else {
        let found = harmless(&at.value);
        document.complain(
            at.at,
            format!("`at` is `{found}`; accepted here: row letter and column number, as in B3"),
        );
        return None;
    };
    if let Some((rows, columns)) = size
        && (place.row >= rows || place.column >= columns)
    {
        let last = Place {
            row: rows - 1,
            column: columns - 1,
        };
        document.complain(
            at.at,
            format!("the tray has no {place}; accepted here: A1 to {last}"),
        );
        return None;
    }
    Some(Compartment {
        at: place,
        label,
        takes: takes?,
    })
}

fn read_takes(document: &mut Document<'_>, section: &Section<'_>) -> Takes {
    document.check_keys(section, &TAKES);
    Takes {
        finding: read_word(document, section, "finding", &FINDINGS),
        value: read_span(document, section, "value"),
        nominal: read_span(document, section, "nominal"),
        family: read_words(document, section, "family", family_named, &family_names()),
        tolerance: read_most(document, section, "tolerance"),
        voltage: document
            .quantity::<Volt>(section, "voltage", Bound::Positive, Need::Optional)
            .map(|v| v.value),
        voltage_kind: read_word(document, section, "voltage_kind", &KINDS),
        loss: document
            .number(section, "loss", Bound::NotNegative, Need::Optional)
            .map(|loss| loss.value),
        safety_class: document
            .text_of(section, "safety_class", Need::Optional)
            .map(|class| class.value),
        characteristic: document
            .text_of(section, "characteristic", Need::Optional)
            .map(|c| c.value),
        tested: read_words(
            document,
            section,
            "tested",
            |word| named(word, &TESTS),
            &names(&TESTS),
        )
        .unwrap_or_default(),
    }
}

const FINDINGS: [(&str, Word); 4] = [
    ("inside", Word::Inside),
    ("outside", Word::Outside),
    ("undecided", Word::Undecided),
    ("dead", Word::Dead),
];
const KINDS: [(&str, VoltageKind); 2] = [("dc", VoltageKind::Dc), ("ac", VoltageKind::Ac)];
const PRIORS: [(&str, PriorKind); 2] = [("salvage", PriorKind::Salvage), ("flat", PriorKind::Flat)];
const TESTS: [(&str, Test); 3] = [
    ("loss", Test::Loss),
    ("leakage", Test::Leakage),
    ("looks", Test::Looks),
];

fn named<T: Copy>(word: &str, table: &[(&'static str, T)]) -> Option<T> {
    table
        .iter()
        .find(|(name, _)| *name == word)
        .map(|(_, value)| *value)
}

fn names<T>(table: &[(&'static str, T)]) -> Vec<&'static str> {
    table.iter().map(|(name, _)| *name).collect()
}

fn family_named(word: &str) -> Option<Family> {
    Family::named(word)
}

fn family_names() -> Vec<&'static str> {
    Family::all().map(Family::name).collect()
}

/// Reads one of the words of a table.
fn read_word<T: Copy>(
    document: &mut Document<'_>,
    section: &Section<'_>,
    key: &str,
    table: &[(&'static str, T)],
) -> Option<T> {
    let word = document.text_of(section, key, Need::Optional)?;
    let found = named(&word.value, table);
    if found.is_none() {
        complain_of_word(document, &word, key, &names(table));
    }
    found
}

fn complain_of_word(
    document: &mut Document<'_>,
    word: &Placed<String>,
    key: &str,
    accepted: &[&str],
) {
    let hint = nearest(&word.value, accepted)
        .map_or(String::new(), |near| format!("did you mean `{near}`? "));
    let found = harmless(&word.value);
    document.complain(
        word.at.clone(),
        format!(
            "`{key}` is `{found}`; {hint}Accepted here: {}",
            accepted.join(", ")
        ),
    );
}

/// Reads a list of words; a single word in quotes counts as a list of one.
fn read_words<T>(
    document: &mut Document<'_>,
    section: &Section<'_>,
    key: &str,
    named: impl Fn(&str) -> Option<T>,
    accepted: &[&str],
) -> Option<Vec<T>> {
    const MOST_WORDS: usize = 100;
    let value = document.get(section, key, Need::Optional)?;
    let items: Vec<&Spanned<DeValue<'_>>> = match value.get_ref() {
        DeValue::String(_) => vec![value],
        _ => {
            document
                .items(section, key, MOST_WORDS, Need::Optional)?
                .value
        }
    };
    let mut words = Vec::new();
    for item in items {
        let word = item.get_ref().as_str().unwrap_or_default();
        match named(word) {
            Some(found) => words.push(found),
            None => complain_of_word(
                document,
                &Placed {
                    value: word.to_owned(),
                    at: item.span(),
                },
                key,
                accepted,
            ),
        }
    }
    Some(words)
}

fn read_span<Q: Quantity>(
    document: &mut Document<'_>,
    section: &Section<'_>,
    key: &str,
) -> Option<Span<Q>> {
    let text = document.text_of(section, key, Need::Optional)?;
    match Span::parse(&text.value) {
        Ok(span) => Some(span),
        Err(refusal) => {
            document.refuse(&text.at, key, &refusal);
            None
        }
    }
}

/// Reads a percentage that is a most.
fn read_most(document: &mut Document<'_>, section: &Section<'_>, key: &str) -> Option<Fraction> {
    document
        .fraction(section, key, Need::Optional)
        .map(|fraction| fraction.value)
}

fn read_rules(document: &mut Document<'_>, section: &Section<'_>) -> HouseRules {
    document.check_keys(
        section,
        &[
            "confidence",
            "prior",
            "drifted_share",
            "tolerance",
            "check_every",
        ],
    );
    let usual = HouseRules::default();
    let mut share = |key, usual, low| {
        let Some(found) = document.number(section, key, Bound::Any, Need::Optional) else {
            return usual;
        };
        if !(low..1.0).contains(&found.value) {
            document.complain(
                found.at,
                format!(
                    "`{key}` is {}; accepted here: {low} up to, not including, 1",
                    found.value
                ),
            );
        }
        found.value
    };
    let confidence = share("confidence", usual.confidence, 0.5);
    let drifted_share = share("drifted_share", usual.drifted_share, 0.0);
    let prior = read_word(document, section, "prior", &PRIORS).unwrap_or(usual.prior);
    let check_every = document.count(section, "check_every", 1..=MOST_PARTS, Need::Optional);
    let (tolerances, any_tolerance) = document
        .section(section, "tolerance", Need::Optional)
        .map_or_else(Default::default, |section| {
            read_tolerances(document, &section)
        });
    HouseRules {
        confidence,
        prior,
        drifted_share,
        tolerances,
        any_tolerance,
        check_every,
    }
}

fn read_tolerances(
    document: &mut Document<'_>,
    section: &Section<'_>,
) -> (Vec<(Family, Tolerance)>, Option<Tolerance>) {
    let mut known = family_names();
    known.push("any");
    document.check_keys(section, &known);
    let mut tolerances = Vec::new();
    let mut any = None;
    for key in known {
        let Some(text) = document.text_of(section, key, Need::Optional) else {
            continue;
        };
        match (Tolerance::parse(&text.value), Family::named(key)) {
            (Ok(tolerance), Some(family)) => tolerances.push((family, tolerance)),
            (Ok(tolerance), None) => any = Some(tolerance),
            (Err(refusal), _) => document.refuse(&text.at, key, &refusal),
        }
    }
    (tolerances, any)
}
