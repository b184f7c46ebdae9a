//! From paths to probabilities: what is usual for each kind of part decides between them.
//!
//! For each kind of part: its prior (or 1 for a family given), times how often such a part carries each of the marks, times
//! how usual the value, the tolerance and the voltage are. The sum over the kinds is the mass of the reading. Paths that say
//! nothing of the value have a mass too, and so has a code that is not known here: "none of these". Dividing by the sum of all makes plausibilities.
//!
//! A marking may be looked at in several ways (`variants`); their masses come together before they are divided.

use super::beam::Beam;
use super::path::Path;
use super::weigh::{Ranked, weigh};
use crate::tables::{Factors, TABLES};

/// How far two values must lie apart to be a trap.
const TRAP: f64 = 999.0;

/// The readings found so far with their masses, and the mass of "none of these".
#[derive(Default)]
pub(super) struct Masses {
    /// The readings.
    pub(super) found: Vec<Ranked>,
    /// The mass of "none of these".
    pub(super) nothing: f64,
    /// The best way of explaining the marking without a value, with its mass.
    pub(super) without: Option<Path>,
}

impl Masses {
    /// Adds the mass of a code that is not known here.
    pub(super) fn add_unknown(&mut self, n_visible: usize) {
        let factors = &TABLES.ranking.factors;
        let power = i32::try_from(n_visible).unwrap_or(i32::MAX);
        self.nothing += factors.unknown_code * factors.unknown_code_character.powi(power);
    }

    /// Adds the finished paths of a beam; `weight` is what the way of looking is worth.
    pub(super) fn add(&mut self, beam: &Beam<'_, '_>, variant: u16, weight: f64) {
        let ranking = &TABLES.ranking;
        for path in &beam.finished {
            if let Some(value) = beam.value(path.slots.value) {
                let mut one = weigh(beam, path, value, ranking, variant);
                one.plausibility *= weight;
                self.found.push(one);
            } else if variant == 0 {
                self.nothing += path.mass * ranking.factors.no_value;
                if self.without.is_none_or(|other| other.mass < path.mass) {
                    self.without = Some(*path);
                }
            }
        }
    }

    /// Returns whether the marking makes little sense as it was read so far.
    pub(super) fn is_doubtful(&self) -> bool {
        let mass = |one: &Ranked| one.plausibility;
        let best = self.found.iter().max_by(|a, b| mass(a).total_cmp(&mass(b)));
        let whole = self.nothing + self.found.iter().map(mass).sum::<f64>();
        best.is_none_or(|best| {
            mass(best) < TABLES.ranking.factors.doubtful * whole || best.path.unexplained != 0
        })
    }

    /// Makes plausibilities of the masses, most plausible first.
    pub(super) fn rank(&mut self) {
        let factors = &TABLES.ranking.factors;
        merge(&mut self.found);
        self.found
            .sort_by(|a, b| b.plausibility.total_cmp(&a.plausibility));
        drop_idle(&mut self.found);
        let readings: f64 = self.found.iter().map(|one| one.plausibility).sum();
        let whole = self.nothing + readings;
        if whole > 0.0 {
            self.nothing /= whole;
            for one in &mut self.found {
                one.plausibility /= whole;
            }
        }
        mind_the_trap(&mut self.found, factors);
    }
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
        && (a.family, a.x, a.y) == (b.family, b.x, b.y)
        && one.characteristic == other.characteristic
        && one.date == other.date
        && one.sections == other.sections
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
