//! Readings in full: what was used for what, what was not, and why.

use super::beam::Beam;
use super::path::NONE;
use super::piece::{Meaning, Piece};
use super::weigh::Ranked;
use super::{Decoding, Reading, Role, Used};
use crate::tables::TABLES;

/// How many readings are given.
const MOST_READINGS: usize = 50;
/// From which factor on an oddity is named.
const ODD: f64 = 0.2;

/// Makes the answer from the ranked paths, most plausible first.
pub(super) fn decoding(marking: &str, beam: &Beam<'_, '_>, ranked: &[Ranked]) -> Decoding {
    let factors = &TABLES.ranking.factors;
    let best = ranked.first().map_or(0.0, |best| best.plausibility);
    let least = factors.least_plausibility.max(best * factors.least_share);
    let n_readings = ranked
        .iter()
        .take_while(|one| one.plausibility >= least)
        .count();
    let shown = n_readings.min(MOST_READINGS);
    let readings: Vec<Reading> = ranked
        .iter()
        .take(shown)
        .map(|one| reading(beam, one))
        .collect();
    let everywhere = ranked
        .iter()
        .take(shown)
        .fold(u128::MAX, |mask, one| mask & one.path.unexplained);
    Decoding {
        marking: marking.to_owned(),
        readings,
        unexplained: tokens(beam, everywhere),
        omitted: n_readings - shown,
    }
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
    let mut used = Vec::with_capacity(pieces.len());
    for piece in &pieces {
        if let Some(role) = role(piece, beam) {
            let text = piece.text(beam.scan).to_owned();
            used.push(Used { text, role });
        }
    }
    let class = match (slots.x, slots.y) {
        (0, 0) => None,
        (x, 0) => Some(format!("X{x}")),
        (0, y) => Some(format!("Y{y}")),
        (x, y) => Some(format!("X{x}/Y{y}")),
    };
    let characteristic = beam
        .piece(slots.characteristic)
        .and_then(|piece| match piece.meaning {
            Meaning::Word(row) => beam.lexicon.words.get(usize::from(row))?.characteristic,
            _ => None,
        });
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
        date: None,
        sections: None,
        plausibility: one.plausibility,
        why: reasons(beam, one, &pieces, &unexplained),
        used,
        unexplained,
    }
}

fn role(piece: &Piece, beam: &Beam<'_, '_>) -> Option<Role> {
    Some(match piece.meaning {
        Meaning::Value(_) => Role::Value,
        Meaning::Limits(_) | Meaning::Letter(_) => Role::Tolerance,
        Meaning::Voltage(_) => Role::Voltage,
        Meaning::Word(row) => {
            let word = beam.lexicon.words.get(usize::from(row))?;
            word.characteristic
                .map_or(Role::Family, |_| Role::Characteristic)
        }
        Meaning::Safety(_) => Role::SafetyClass,
        Meaning::Text | Meaning::Separator => Role::Text,
        Meaning::Unexplained => return None,
    })
}

fn reasons(
    beam: &Beam<'_, '_>,
    one: &Ranked,
    pieces: &[&Piece],
    unexplained: &[String],
) -> Vec<String> {
    let mut found: Vec<String> = Vec::with_capacity(pieces.len() + 2);
    for piece in pieces {
        let reason = beam.lexicon.reason(piece.evidence);
        if let Some(why) = reason
            .map(|reason| reason.why.as_str())
            .filter(|why| !why.is_empty())
        {
            let text = piece.text(beam.scan);
            found.push([text, ": ", why].concat());
        }
    }
    let slots = &one.path.slots;
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

fn contradiction(beam: &Beam<'_, '_>, piece: &Piece) -> String {
    let what = match piece.meaning {
        Meaning::Limits(_) | Meaning::Letter(_) => "a second tolerance",
        Meaning::Voltage(_) => "a second rated voltage",
        Meaning::Word(_) => "another family or characteristic",
        Meaning::Safety(_) => "a second class of its duty",
        _ => "a second value",
    };
    format!(
        "{}: {what}, which contradicts what was taken",
        piece.text(beam.scan)
    )
}
