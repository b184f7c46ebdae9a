//! From paths to probabilities: what is usual for each kind of part decides between them.
//!
//! For each kind of part: its prior (or 1 for a family given), times how often such a part carries each of the marks, times
//! how usual the value, the tolerance and the voltage are. The sum over the kinds is the mass of the reading. Paths that say
//! nothing of the value have a mass too, and so has a code that is not known here: "none of these". Dividing by the sum of all makes plausibilities.

use super::beam::Beam;
use super::piece::Meaning;
use super::weigh::{Ranked, weigh};
use crate::tables::{Factors, TABLES};

/// How far two values must lie apart to be a trap.
const TRAP: f64 = 999.0;

/// Ranks the finished paths of a beam, most plausible first.
pub(super) fn rank(beam: &Beam<'_, '_>) -> Vec<Ranked> {
    let ranking = &TABLES.ranking;
    let factors = &ranking.factors;
    let mut found: Vec<Ranked> = Vec::with_capacity(beam.finished.len());
    let unknown =
        |n: usize| i32::try_from(n).map_or(0.0, |n| factors.unknown_code_character.powi(n));
    let mut nothing = factors.unknown_code * unknown(beam.scan.n_visible());
    for path in &beam.finished {
        match beam.piece(path.slots.value).map(|piece| piece.meaning) {
            Some(Meaning::Value(value)) => found.push(weigh(beam, path, value, ranking)),
            _ => nothing += path.mass * factors.no_value,
        }
    }
    merge(&mut found);
    found.sort_by(|a, b| b.plausibility.total_cmp(&a.plausibility));
    drop_idle(&mut found);
    let whole: f64 = nothing + found.iter().map(|one| one.plausibility).sum::<f64>();
    if whole > 0.0 {
        for one in &mut found {
            one.plausibility /= whole;
        }
    }
    mind_the_trap(&mut found, factors);
    found
}

/// Puts readings of the same meaning together; the more probable way of getting there is kept.
fn merge(found: &mut Vec<Ranked>) {
    let mut kept: Vec<Ranked> = Vec::with_capacity(found.len());
    for one in found.drain(..) {
        match kept.iter_mut().find(|other| same_meaning(&one, other)) {
            Some(other) if other.plausibility < one.plausibility => {
                let sum = other.plausibility + one.plausibility;
                *other = one;
                other.plausibility = sum;
            }
            Some(other) => other.plausibility += one.plausibility,
            None => kept.push(one),
        }
    }
    *found = kept;
}

fn same_meaning(one: &Ranked, other: &Ranked) -> bool {
    let (a, b) = (&one.path.slots, &other.path.slots);
    one.value == other.value
        && one.tolerance == other.tolerance
        && one.voltage == other.voltage
        && a.family == b.family
        && (a.x, a.y, a.characteristic) == (b.x, b.y, b.characteristic)
}

/// Drops readings that a more probable one of the same value explains better.
fn drop_idle(found: &mut Vec<Ranked>) {
    let mut place = 0;
    while let Some(one) = found.get(place) {
        let explains_more = |other: &Ranked| {
            other.value == one.value
                && other.path.unexplained != one.path.unexplained
                && other.path.unexplained & !one.path.unexplained == 0
        };
        if found.iter().take(place).any(explains_more) {
            found.remove(place);
        } else {
            place += 1;
        }
    }
}

/// Keeps the best reading at the cap where a rival lies a thousandfold away: the priors are not good enough to say more.
fn mind_the_trap(found: &mut [Ranked], factors: &Factors) {
    let Some((best, others)) = found.split_first_mut() else {
        return;
    };
    let value = best.value.farads();
    let is_rival = |other: &Ranked| {
        let ratio = other.value.farads() / value;
        other.plausibility >= factors.rival_share * best.plausibility
            && other.path.unexplained & !best.path.unexplained == 0
            && (ratio >= TRAP || ratio <= 1.0 / TRAP)
    };
    let rivals: f64 = others
        .iter()
        .filter(|o| is_rival(o))
        .map(|o| o.plausibility)
        .sum();
    let excess = best.plausibility - factors.rival_cap;
    if rivals <= 0.0 || excess <= 0.0 {
        return;
    }
    let up = 1.0 + excess / rivals;
    let chosen: Vec<bool> = others.iter().map(is_rival).collect();
    for (other, is_rival) in others.iter_mut().zip(chosen) {
        if is_rival {
            other.plausibility *= up;
        }
    }
    best.plausibility = factors.rival_cap;
    found.sort_by(|a, b| b.plausibility.total_cmp(&a.plausibility));
}
