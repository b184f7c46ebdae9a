//! Readings in full: what was used for what, what was not, and why.

use super::beam::{self, Beam};
use super::path::{NONE, Path};
use super::piece::{Date, Meaning, Piece};
use super::rank::Masses;
use super::variants::Variant;
use super::weigh::Ranked;
use super::{Decoding, Reading, Role, Used, WithoutValue};
use crate::tables::{Family, Kind, TABLES};
use std::sync::LazyLock;

/// How many readings are given.
const MOST_READINGS: usize = 50;
/// From which factor on an oddity is named.
const ODD: f64 = 0.2;
/// From which share on the family that a reading looks like is named.
const LIKELY: f64 = 0.5;

/// Makes the answer from the ranked paths, most plausible first. `beam` is that of the marking as typed; those of other ways
/// of looking at it are searched again where one of their readings is shown.
pub(super) fn decoding(
    marking: &str,
    beam: &Beam<'_, '_>,
    family: Option<Family>,
    variants: &[Variant],
    masses: &Masses,
) -> Decoding {
    let factors = &TABLES.ranking.factors;
    let ranked = &masses.found;
    let best = ranked.first().map_or(0.0, |best| best.plausibility);
    let least = factors.least_plausibility.max(best * factors.least_share);
    let n_readings = ranked
        .iter()
        .take_while(|one| one.plausibility >= least)
        .count();
    let shown = n_readings.min(MOST_READINGS);
    let mut readings: Vec<Reading> = Vec::with_capacity(shown);
    for one in ranked.iter().take(shown) {
        let variant = variants.get(usize::from(one.variant));
        readings.push(match variant {
            None | Some(Variant::AsTyped) => reading(beam, one),
            Some(variant) => {
                let changed = variant.of(beam.scan);
                let beam_of_variant = beam::search(&changed, beam.lexicon, family);
                let mut reading = reading(&beam_of_variant, one);
                reading.why.splice(0..0, variant.in_words(beam.scan));
                reading
            }
        });
    }
    let everywhere = ranked
        .iter()
        .take(shown)
        .fold(u128::MAX, |mask, one| mask & one.path.unexplained);
    Decoding {
        marking: marking.to_owned(),
        readings,
        unexplained: tokens(beam, everywhere),
        omitted: n_readings - shown,
        without_value: masses
            .without
            .as_ref()
            .and_then(|path| without_value(beam, path, masses.nothing)),
    }
}

/// Returns what the marking says if it says nothing of the value; `None` where that is nothing at all.
fn without_value(beam: &Beam<'_, '_>, path: &Path, plausibility: f64) -> Option<WithoutValue> {
    if plausibility < TABLES.ranking.factors.least_plausibility {
        return None;
    }
    let pieces = beam.pieces_of(path);
    let used = used(beam, &pieces);
    (!used.is_empty()).then(|| WithoutValue {
        plausibility,
        why: said(beam, &pieces),
        used,
    })
}

/// Returns the text of the cells of a mask, run by run; blanks end a run.
fn tokens(beam: &Beam<'_, '_>, mask: u128) -> Vec<String> {
    let scan = beam.scan;
    let is_in = |cell: usize| mask >> cell.min(127) & 1 == 1 && scan.at(cell) != b' ';
    let mut found = Vec::new();
    let mut cell = 0;
    while cell < scan.len() {
        if !is_in(cell) {
            cell += 1;
            continue;
        }
        let start = cell;
        while cell < scan.len() && is_in(cell) {
            cell += 1;
        }
        found.push(scan.text(start, cell).to_owned());
    }
    found.extend(beyond(beam));
    found
}

/// Returns what stands behind the part of the text that is looked at.
fn beyond(beam: &Beam<'_, '_>) -> Option<String> {
    let text = beam.scan.beyond().trim();
    (!text.is_empty()).then(|| text.to_owned())
}

fn reading(beam: &Beam<'_, '_>, one: &Ranked) -> Reading {
    let slots = &one.path.slots;
    let pieces = beam.pieces_of(&one.path);
    let class = match (slots.x, slots.y) {
        (0, 0) => None,
        (x, 0) => Some(format!("X{x}")),
        (0, y) => Some(format!("Y{y}")),
        (x, y) => Some(format!("X{x}/Y{y}")),
    };
    let words = &beam.lexicon.words;
    let characteristic = one
        .characteristic
        .and_then(|row| words.get(usize::from(row))?.characteristic.as_deref());
    let unexplained = if one.path.unexplained == 0 {
        beyond(beam).into_iter().collect()
    } else {
        tokens(beam, one.path.unexplained)
    };
    Reading {
        capacitance: one.value.farads(),
        tolerance: one.tolerance,
        voltage: one.voltage,
        family: slots.family,
        characteristic: characteristic.map(str::to_owned),
        safety_class: class,
        date: one.date.map(Date::in_words),
        sections: (!one.sections.is_empty()).then(|| {
            one.sections
                .iter()
                .map(|section| section.farads())
                .collect()
        }),
        plausibility: one.plausibility,
        why: reasons(beam, one, &pieces, &unexplained),
        used: used(beam, &pieces),
        unexplained,
    }
}

/// Returns what each piece was used for; two bands that were typed as one word are shown once.
fn used(beam: &Beam<'_, '_>, pieces: &[&Piece]) -> Vec<Used> {
    let mut used = Vec::with_capacity(pieces.len());
    let mut last = (u8::MAX, u8::MAX);
    for piece in pieces {
        let cells = (piece.start, piece.end);
        if let Some(role) = role(piece, beam).filter(|_| cells != last && cells.0 < cells.1) {
            let text = piece.text(beam.scan).to_owned();
            used.push(Used { text, role });
            last = cells;
        }
    }
    used
}

fn role(piece: &Piece, beam: &Beam<'_, '_>) -> Option<Role> {
    Some(match piece.meaning {
        Meaning::Value(_) | Meaning::Sections(_) => Role::Value,
        Meaning::Date(_) => Role::Date,
        Meaning::Part(role) => role,
        Meaning::Limits(_) | Meaning::Letter(_) => Role::Tolerance,
        Meaning::Voltage(_) => Role::Voltage,
        Meaning::Word(row) => {
            let word = beam.lexicon.words.get(usize::from(row))?;
            word.characteristic
                .as_ref()
                .map_or(Role::Family, |_| Role::Characteristic)
        }
        Meaning::Safety(_) => Role::SafetyClass,
        Meaning::Text | Meaning::Separator => Role::Text,
        Meaning::Unexplained | Meaning::Group(..) => return None,
    })
}

fn reasons(
    beam: &Beam<'_, '_>,
    one: &Ranked,
    pieces: &[&Piece],
    unexplained: &[String],
) -> Vec<String> {
    let mut found = said(beam, pieces);
    found.reserve(4);
    let slots = &one.path.slots;
    if slots.family.is_none() {
        found.extend(likely_family(one));
    }
    if one.sections.len() > 1 {
        found.push(format!(
            "{} sections; the value is that of the first",
            one.sections.len()
        ));
    }
    if slots.contradicts != NONE {
        found.extend(
            beam.piece(slots.contradicts)
                .map(|piece| contradiction(beam, piece)),
        );
    }
    if one.oddities.series < ODD {
        found.push("not a preferred value for this tolerance (IEC 60063)".to_owned());
    }
    if one.oddities.range < ODD {
        found.push("an unusual capacitance for such a part".to_owned());
    }
    if one.oddities.voltage < ODD {
        found.push("an unusual voltage for such a part".to_owned());
    }
    if !unexplained.is_empty() {
        found.push(["leaves unexplained: ", &unexplained.join(" ")].concat());
    }
    found
}

/// Returns the reasons that the pieces carry.
fn said(beam: &Beam<'_, '_>, pieces: &[&Piece]) -> Vec<String> {
    let mut found: Vec<String> = Vec::with_capacity(pieces.len() + 4);
    for piece in pieces {
        let reason = beam.lexicon.reason(piece.evidence);
        if let Some(why) = reason
            .map(|reason| reason.why.as_str())
            .filter(|why| !why.is_empty())
        {
            let text = match piece.meaning {
                Meaning::Group(..) => "the whole",
                _ if piece.start == piece.end => "not printed",
                _ => piece.text(beam.scan),
            };
            found.push([text, ": ", why].concat());
            if let Meaning::Date(date) = piece.meaning {
                found.push([text, ": ", &date.in_words()].concat());
            }
        }
    }
    found
}

/// The families of each kind in words.
static LOOKS_LIKE: LazyLock<Vec<String>> = LazyLock::new(|| {
    let words = |kind: &Kind| {
        let families: Vec<&str> = kind.families.iter().map(|family| family.name()).collect();
        format!("looks like {} (", families.join(" or "))
    };
    TABLES.ranking.kinds.iter().map(words).collect()
});

/// Returns what kind of part the reading looks like, and how sure that is.
fn likely_family(one: &Ranked) -> Option<String> {
    let (kind, share) = one.likely;
    let words = LOOKS_LIKE.get(kind).filter(|_| share >= LIKELY)?;
    let percent = (0..100u8).rev().find(|&n| f64::from(n) / 100.0 <= share)?;
    Some(
        [
            words,
            percent.to_string().as_str(),
            " of 100 such markings)",
        ]
        .concat(),
    )
}

fn contradiction(beam: &Beam<'_, '_>, piece: &Piece) -> String {
    let what = match piece.meaning {
        Meaning::Limits(_) | Meaning::Letter(_) => "a second tolerance",
        Meaning::Voltage(_) => "a second rated voltage",
        Meaning::Word(_) => "another family or characteristic",
        Meaning::Safety(_) => "a second class of its duty",
        Meaning::Date(_) => "a second date",
        _ => "a second value",
    };
    format!(
        "{}: {what}, which contradicts what was taken",
        piece.text(beam.scan)
    )
}
