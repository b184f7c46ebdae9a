//! What one finished path is worth: how usual the value, the tolerance and the voltage are, kind of part by kind of part.

use super::RatedVoltage;
use super::beam::Beam;
use super::lexicon::View;
use super::path::{NONE, Path};
use super::piece::{Amount, Date, Meaning, SMALL_FARADS, Voltage};
use crate::quantity::{Farad, Tolerance, Volt};
use crate::tables::{Factors, KINDS, Ranking, SeriesShares, ToleranceShares, VoltageKind};

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
    /// The sections; none on a part with one capacitor.
    pub(super) sections: Vec<Amount>,
    /// The date.
    pub(super) date: Option<Date>,
    /// The characteristic: a row of the words.
    pub(super) characteristic: Option<u16>,
    /// The kind of part that it looks like most, and how sure that is.
    pub(super) likely: (usize, f64),
    /// The way the marking was read.
    pub(super) variant: u16,
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

/// Computes the mass of a path; it stands in `plausibility` until all are known.
pub(super) fn weigh(
    beam: &Beam<'_, '_>,
    path: &Path,
    value: Amount,
    ranking: &Ranking,
    variant: u16,
) -> Ranked {
    let (lexicon, factors) = (beam.lexicon, &ranking.factors);
    let capacitance = value.farads().get();
    let mut weight = path.weight;
    let tolerance = tolerance(beam, path, capacitance, factors, &mut weight);
    let is_marked = path.slots.tolerance != NONE;
    let shares = series_shares(ranking, tolerance.filter(|_| is_marked), capacitance);
    let mut series = shares.of(lexicon.series_of(value.mantissa()));
    if value.mantissa().is_none() {
        series *= factors.four_figures;
    }
    weight *= series;
    let voltages = path.slots.voltages.map(|place| beam.voltage(place));
    let mut path = *path;
    let voltage = rated(&mut path, voltages, factors, &mut weight);
    let marks = Marks {
        tolerance: if is_marked {
            ToleranceMark::Present(tolerance)
        } else {
            ToleranceMark::Absent
        },
        voltages,
        capacitance,
    };
    let usual = usual(beam, &path, &marks, ranking);
    let part = |with: f64, without: f64| if without > 0.0 { with / without } else { 1.0 };
    Ranked {
        value,
        tolerance,
        voltage,
        plausibility: weight * usual.all,
        oddities: Oddities {
            series,
            range: part(usual.all, usual.but_range),
            voltage: part(usual.all, usual.but_voltage),
        },
        sections: beam.sections(path.slots.value).unwrap_or_default().to_vec(),
        date: match beam.piece(path.slots.date).map(|piece| piece.meaning) {
            Some(Meaning::Date(date)) => Some(date),
            _ => None,
        },
        characteristic: match beam
            .piece(path.slots.characteristic)
            .map(|piece| piece.meaning)
        {
            Some(Meaning::Word(row)) => Some(row),
            _ => None,
        },
        likely: (usual.likely.0, part(usual.likely.1, usual.all)),
        variant,
        path,
    }
}

/// What is marked on a part, as far as it is more or less usual.
struct Marks {
    tolerance: ToleranceMark,
    voltages: [Option<Voltage>; 2],
    capacitance: f64,
}

/// Whether a tolerance is marked.
enum ToleranceMark {
    Absent,
    /// `None`: a mark that says nothing of the limits.
    Present(Option<Tolerance>),
}

/// Sums over the kinds of part.
#[derive(Default)]
struct Usual {
    all: f64,
    /// The value taken as usual.
    but_range: f64,
    /// The voltage taken as usual.
    but_voltage: f64,
    /// The most probable kind and its part of the sum.
    likely: (usize, f64),
}

/// Kinds with less than this part of the sum are left out of it.
const LEAST_KIND: f64 = 1e-7;

/// Returns how usual the marks are together, summed over the kinds.
fn usual(beam: &Beam<'_, '_>, path: &Path, marks: &Marks, ranking: &Ranking) -> Usual {
    let (lexicon, factors) = (beam.lexicon, &ranking.factors);
    let row = |evidence: u16| {
        let reason = lexicon.reason(evidence);
        reason.map_or(&[1.0; KINDS], |reason| &reason.on)
    };
    let no_tolerance = row(lexicon.named.no_tolerance);
    let no_voltage = row(lexicon.named.no_voltage);
    let views = lexicon.view(path.slots.view);
    let mut sums = Usual::default();
    let least = LEAST_KIND * path.kinds.iter().sum::<f64>();
    for (kind, facts) in ranking.kinds.iter().enumerate() {
        let at = |figures: &[f64; KINDS]| figures.get(kind).copied().unwrap_or(0.0);
        let mut share = at(&path.kinds);
        let Some(view) = views.get(kind).filter(|_| share > least) else {
            continue;
        };
        share *= match marks.tolerance {
            ToleranceMark::Absent => at(no_tolerance),
            ToleranceMark::Present(limits) => {
                (1.0 - at(no_tolerance)) * width_share(&facts.tolerances, limits)
            }
        };
        share *= marks.voltages[0].map_or(at(no_voltage), |_| 1.0 - at(no_voltage));
        let range = range_factor(view, marks.capacitance, factors);
        let each = marks.voltages.iter().flatten();
        let voltage: f64 = each
            .map(|v| voltage_factor(view, v.volts, factors))
            .product();
        if share * range * voltage > sums.likely.1 {
            sums.likely = (kind, share * range * voltage);
        }
        sums.all += share * range * voltage;
        sums.but_range += share * voltage;
        sums.but_voltage += share * range;
    }
    sums
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
) -> &SeriesShares {
    let Some(tolerance) = tolerance else {
        return &ranking.unmarked_series;
    };
    let nominal = Farad::new(capacitance);
    let percent = tolerance.larger_side(nominal).percent();
    let rows = ranking.series.iter().rev();
    let row = rows.into_iter().find(|row| row.at_least <= percent);
    row.map_or(&ranking.unmarked_series, |row| &row.shares)
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

/// Returns how usual a capacitance is for a kind of part.
pub(super) fn range_factor(view: &View, capacitance: f64, factors: &Factors) -> f64 {
    const SLACK: f64 = 1.0 + 1e-9;
    let (low, high) = view.capacitance;
    if low <= capacitance * SLACK && capacitance <= high * SLACK {
        let (low, high) = view.common;
        let is_common = low <= capacitance * SLACK && capacitance <= high * SLACK;
        if is_common {
            1.0
        } else {
            factors.outside_common
        }
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

/// Puts the voltages together. On a suppression part a voltage of no stated kind is an alternating one; two alternating
/// voltages belong to the duties of a part of classes X and Y, and contradict each other elsewhere.
fn rated(
    path: &mut Path,
    voltages: [Option<Voltage>; 2],
    factors: &Factors,
    weight: &mut f64,
) -> Option<RatedVoltage> {
    let slots = &mut path.slots;
    let is_suppression = slots.x > 0 || slots.y > 0;
    let is_ac = |voltage: Voltage| match voltage.kind {
        VoltageKind::Ac => true,
        VoltageKind::Dc => false,
        VoltageKind::Unstated => is_suppression,
    };
    let mut rated = RatedVoltage::default();
    for voltage in voltages.into_iter().flatten() {
        let volts = Volt::new(voltage.volts);
        match rated.ac {
            _ if !is_ac(voltage) => rated.dc = Some(volts),
            None => rated.ac = Some(volts),
            Some(first) if slots.x > 0 && slots.y > 0 => {
                let (low, high) = if first < volts {
                    (first, volts)
                } else {
                    (volts, first)
                };
                (rated.ac, rated.y) = (Some(high), Some(low));
            }
            Some(_) => {
                *weight *= factors.contradicts;
                slots.contradicts = slots.voltages[1];
            }
        }
    }
    (rated != RatedVoltage::default()).then_some(rated)
}
