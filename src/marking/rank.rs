//! From paths to probabilities: what is usual for each kind of part decides between them.
//!
//! For each kind of part: its prior (or 1 for a family given), times how often such a part carries each of the marks, times
//! how usual the value, the tolerance and the voltage are. The sum over the kinds is the mass of the reading. Paths that say
//! nothing of the value have a mass too: "none of these". Dividing by the sum of all makes plausibilities.

use super::beam::{Beam, NONE, Path};
use super::lexicon::{Lexicon, View};
use super::piece::{Amount, Form, Meaning, Voltage};
use crate::quantity::{Tolerance, Volt};
use crate::tables::{Factors, KINDS, Ranking, SeriesShares, TABLES, ToleranceShares, VoltageKind};

use super::RatedVoltage;

/// A path with what it says.
pub(super) struct Ranked {
    /// The path.
    pub(super) path: Path,
    /// The value.
    pub(super) value: Amount,
    /// The tolerance.
    pub(super) tolerance: Option<Tolerance>,
    /// The voltage.
    pub(super) voltage: Option<RatedVoltage>,
    /// Its share of all.
    pub(super) plausibility: f64,
    /// What makes it odd.
    pub(super) oddities: Oddities,
}

/// What speaks against a reading, as factors; 1 is nothing.
#[derive(Clone, Copy, Debug)]
pub(super) struct Oddities {
    /// The value in the series of preferred values.
    pub(super) series: f64,
    /// The value in the usual range.
    pub(super) range: f64,
    /// The voltage in the usual range.
    pub(super) voltage: f64,
}

/// Picofarads below which a tolerance letter says a capacitance.
const SMALL_FARADS: f64 = 10e-12;
/// How far two values must lie apart to be a trap.
const TRAP: f64 = 999.0;

/// Ranks the finished paths of a beam, most plausible first.
pub(super) fn rank(beam: &Beam<'_, '_>) -> Vec<Ranked> {
    let ranking = &TABLES.ranking;
    let factors = &ranking.factors;
    let mut found: Vec<Ranked> = Vec::with_capacity(beam.finished.len());
    let mut nothing = 0.0;
    for path in &beam.finished {
        match beam.piece(path.slots.value).map(|piece| piece.meaning) {
            Some(Meaning::Value(value)) => found.push(weigh(beam, path, value, ranking)),
            _ => nothing += path.mass() * factors.no_value,
        }
    }
    merge(&mut found);
    found.sort_by(|a, b| b.plausibility.total_cmp(&a.plausibility));
    drop_idle(&mut found);
    let whole: f64 = nothing + found.iter().map(|one| one.plausibility).sum::<f64>();
    if whole > 0.0 {
        found.iter_mut().for_each(|one| one.plausibility /= whole);
    }
    mind_the_trap(&mut found, factors);
    found
}

/// Computes the mass of a path.
fn weigh(beam: &Beam<'_, '_>, path: &Path, value: Amount, ranking: &Ranking) -> Ranked {
    let (lexicon, factors) = (beam.lexicon, &ranking.factors);
    let capacitance = value.farads().get();
    let mut weight = path.weight;
    let tolerance = tolerance(beam, path, capacitance, factors, &mut weight);
    let is_marked = path.slots.tolerance != NONE;
    let shares = series_shares(ranking, tolerance.filter(|_| is_marked), capacitance);
    let series = shares.of(lexicon.series_of(value.mantissa()));
    weight *= series;
    let voltages = path.slots.voltages.map(|place| beam.voltage(place));
    let row = |evidence: u16| {
        lexicon
            .reason(evidence)
            .map_or([1.0; KINDS], |reason| reason.on)
    };
    let no_tolerance = row(lexicon.named.no_tolerance);
    let no_voltage = row(lexicon.named.no_voltage);
    let views = lexicon.view(path.slots.family);
    let (mut mass, mut in_range, mut in_voltage) = (0.0, 0.0, 0.0);
    for (kind, facts) in ranking.kinds.iter().enumerate() {
        let at = |figures: &[f64; KINDS]| figures.get(kind).copied().unwrap_or(0.0);
        let mut share = weight * at(&path.kinds);
        let Some(view) = views.get(kind).filter(|_| share > 0.0) else {
            continue;
        };
        share *= if is_marked {
            (1.0 - at(&no_tolerance)) * width_share(&facts.tolerances, tolerance)
        } else {
            at(&no_tolerance)
        };
        share *= if path.slots.voltages[0] == NONE {
            at(&no_voltage)
        } else {
            1.0 - at(&no_voltage)
        };
        let range = range_factor(view, capacitance, factors);
        let voltage = voltages
            .iter()
            .flatten()
            .map(|v| voltage_factor(view, v.volts, factors))
            .product::<f64>();
        mass += share * range * voltage;
        in_range += share * voltage;
        in_voltage += share * range;
    }
    let part = |with: f64, without: f64| if without > 0.0 { with / without } else { 1.0 };
    Ranked {
        path: *path,
        value,
        tolerance,
        voltage: rated(path, voltages),
        plausibility: mass,
        oddities: Oddities {
            series,
            range: part(mass, in_range),
            voltage: part(mass, in_voltage),
        },
    }
}

/// Returns the tolerance that is marked, and puts into the weight how odd it is for the value.
fn tolerance(
    beam: &Beam<'_, '_>,
    path: &Path,
    capacitance: f64,
    factors: &Factors,
    weight: &mut f64,
) -> Option<Tolerance> {
    let is_small = capacitance < SMALL_FARADS;
    let tolerance = match beam.piece(path.slots.tolerance)?.meaning {
        Meaning::Limits(limits) => Some(limits),
        Meaning::Letter(row) => {
            let letter = beam.lexicon.letters.get(usize::from(row))?;
            match letter.below_ten_picofarads {
                Some(below) if is_small => Some(below),
                _ => letter.limits,
            }
        }
        _ => None,
    };
    match tolerance {
        Some(Tolerance::Absolute(half_width)) if half_width.get() * 2.0 > capacitance => {
            *weight *= factors.wide_absolute;
        }
        Some(Tolerance::Relative { .. }) if is_small => {
            *weight *= factors.percent_below_ten_picofarads;
        }
        _ => {}
    }
    tolerance
}

fn series_shares(
    ranking: &Ranking,
    tolerance: Option<Tolerance>,
    capacitance: f64,
) -> SeriesShares {
    let Some(tolerance) = tolerance else {
        return ranking.unmarked_series;
    };
    let nominal = crate::quantity::Farad::new(capacitance);
    let percent = tolerance.larger_side(nominal).percent();
    let rows = ranking.series.iter().rev();
    let row = rows.into_iter().find(|row| row.at_least <= percent);
    row.map_or(ranking.unmarked_series, |row| row.shares)
}

fn width_share(shares: &ToleranceShares, tolerance: Option<Tolerance>) -> f64 {
    match tolerance {
        Some(Tolerance::Absolute(_)) => shares.absolute,
        Some(Tolerance::Relative { minus, plus }) if minus == plus => match plus.percent() {
            ..0.51 => shares.tight,
            ..1.01 => shares.one,
            ..3.01 => shares.three,
            ..5.01 => shares.five,
            ..10.01 => shares.ten,
            ..20.01 => shares.twenty,
            _ => shares.wide,
        },
        Some(Tolerance::Relative { .. } | Tolerance::Minimum) | None => shares.wide,
    }
}

fn range_factor(view: &View, capacitance: f64, factors: &Factors) -> f64 {
    const SLACK: f64 = 1.0 + 1e-9;
    let (low, high) = view.capacitance;
    if low <= capacitance * SLACK && capacitance <= high * SLACK {
        1.0
    } else if low / 10.0 <= capacitance && capacitance <= high * 10.0 {
        factors.outside_range
    } else {
        factors.far_outside_range
    }
}

fn voltage_factor(view: &View, volts: f64, factors: &Factors) -> f64 {
    let (low, high) = view.voltage;
    if low <= volts && volts <= high {
        1.0
    } else if low / 3.0 <= volts && volts <= high * 3.0 {
        factors.outside_voltage
    } else {
        factors.far_outside_voltage
    }
}

/// Puts the voltages together; on a suppression part a voltage of no stated kind is an alternating one.
fn rated(path: &Path, voltages: [Option<Voltage>; 2]) -> Option<RatedVoltage> {
    let is_suppression = path.slots.x > 0 || path.slots.y > 0;
    let is_ac = |voltage: Voltage| match voltage.kind {
        VoltageKind::Ac => true,
        VoltageKind::Dc => false,
        VoltageKind::Unstated => is_suppression && voltage.form != Form::Said || is_suppression,
    };
    let mut rated = RatedVoltage::default();
    for voltage in voltages.into_iter().flatten() {
        let volts = Volt::new(voltage.volts);
        if !is_ac(voltage) {
            rated.dc = Some(volts);
        } else if let Some(first) = rated.ac {
            let (low, high) = if first < volts {
                (first, volts)
            } else {
                (volts, first)
            };
            (rated.ac, rated.y) = (Some(high), Some(low));
        } else {
            rated.ac = Some(volts);
        }
    }
    (rated != RatedVoltage::default()).then_some(rated)
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

/// Returns whether the lexicon has the row (used where a reading is put into words).
pub(super) fn why<'l>(lexicon: &'l Lexicon, evidence: u16) -> Option<&'l str> {
    lexicon
        .reason(evidence)
        .map(|reason| reason.why.as_str())
        .filter(|why| !why.is_empty())
}
