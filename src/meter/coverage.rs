//! Where a meter can be trusted: the span of each switch, how well it measures along it, and what would better it most.
//!
//! All figures are for a part without loss whose loss is trusted to ±0.005, as of a family not known. The span is that of
//! the textbook law, R·C2/R1 from one end of the dial to the other; everything else is computed from the model.

use super::balance::{DialLaw, part_from_dimmest};
use super::circuit::Load;
use super::improve::{Improvement, improvements};
use super::predict::uncertainty;
use super::{Cut, DialReading, Edge, Meter, Part, Repeats, Seen, Switch, measure, null};
use crate::quantity::{Farad, Fraction, Volt};

/// Values looked at along each span, evenly by their logarithms.
const N_VALUES: usize = 121;

/// Places of the dial looked at for whether the lamp can go dark.
const N_PLACES: usize = 201;

/// Halvings of the step between two values or places.
const N_HALVINGS: usize = 24;

/// How well a loss is trusted of which nothing is known.
const LOSS_UNCERTAINTY: f64 = 0.005;

/// What a meter can measure.
#[derive(Clone, Debug, PartialEq)]
pub struct Coverage {
    /// Each switch, in the order on the panel.
    pub switches: Vec<SwitchCoverage>,
    /// What single changes would bring, the best first; those that bring less than 1 % are left out.
    pub changes: Vec<Improvement>,
}

/// What one switch can measure.
#[derive(Clone, Debug, PartialEq)]
pub struct SwitchCoverage {
    /// The switch.
    pub switch: Switch,
    /// The smallest and the largest capacitance that null within the travel.
    pub span: (Farad, Farad),
    /// The part of the span, around its best value, where the better of one reading and both edges stays within the
    /// limit; `None` if it does nowhere.
    pub useful: Option<(Farad, Farad)>,
    /// The least relative standard uncertainty along the span; `None` if nothing can be measured.
    pub best: Option<Fraction>,
    /// The part of the dial, by printed numbers, where the lamp stays lit on a part without loss, because of the load on
    /// the dial leg or the loss of the reference; the widest, if there are several.
    pub never_dark: Option<(DialReading, DialReading)>,
    /// Values along the span, rising.
    pub values: Vec<Covered>,
}

/// How well a value is measured on a switch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Covered {
    /// The capacitance.
    pub capacitance: Farad,
    /// Where it nulls.
    pub balance: DialReading,
    /// Relative standard uncertainty of one reading; `None` if it gives no value.
    pub one_reading: Option<Fraction>,
    /// Relative standard uncertainty of both edges; `None` if they cannot both be seen.
    pub both_edges: Option<Fraction>,
    /// Voltage on the part at balance, peak.
    pub part_voltage: Volt,
}

impl Covered {
    /// Returns the better of one reading and both edges.
    pub fn best(&self) -> Option<Fraction> {
        match (self.one_reading, self.both_edges) {
            (Some(one), Some(both)) => Some(if one <= both { one } else { both }),
            (one, both) => one.or(both),
        }
    }
}

/// Returns where each switch measures to the relative standard uncertainty given, or better, and what would better the
/// meter most.
pub fn coverage(meter: &Meter, limit: Fraction) -> Coverage {
    Coverage {
        switches: meter
            .switches()
            .map(|switch| switch_coverage(meter, switch, limit))
            .collect(),
        changes: improvements(meter),
    }
}

fn switch_coverage(meter: &Meter, switch: Switch, limit: Fraction) -> SwitchCoverage {
    let span = span(meter, switch);
    let values: Vec<Covered> = along(span, N_VALUES)
        .map(|c| covered(meter, switch, c))
        .collect();
    let best = values
        .iter()
        .enumerate()
        .filter_map(|(i, value)| Some((i, value.best()?)))
        .min_by(|(_, x), (_, y)| x.get().total_cmp(&y.get()));
    let useful = best
        .filter(|(_, u)| *u <= limit)
        .map(|(best, _)| useful_around(meter, switch, &values, best, limit));
    SwitchCoverage {
        switch,
        span: (Farad::new(span.0), Farad::new(span.1)),
        useful,
        best: best.map(|(_, u)| u),
        never_dark: never_dark(meter, switch),
        values,
    }
}

/// Capacitances of the textbook law at the two ends of the dial.
pub(super) fn span(meter: &Meter, switch: Switch) -> (f64, f64) {
    let k = meter.model().constants(switch);
    let dial = meter.dial.span(k);
    // A dial without end resistance starts at nothing; a thousandth of its end is as good.
    let low = dial.low.max(1e-3 * dial.high);
    (low * k.c2 / k.r1, dial.high * k.c2 / k.r1)
}

pub(super) fn along((low, high): (f64, f64), n_values: usize) -> impl Iterator<Item = f64> {
    let ratio = high / low;
    (0..n_values).map(move |i| low * ratio.powf(i as f64 / (n_values - 1) as f64))
}

fn part_of(capacitance: f64) -> Part {
    let mut part = Part::without_loss(Farad::new(capacitance));
    part.loss.standard_uncertainty = LOSS_UNCERTAINTY;
    part
}

pub(super) fn covered(meter: &Meter, switch: Switch, capacitance: f64) -> Covered {
    let part = part_of(capacitance);
    let found = null(meter, switch, &part);
    let both_edges = found
        .arc
        .filter(|arc| arc.cut == Cut::Neither)
        .and_then(|arc| {
            let edge = |place| Edge::At(Repeats::once(place));
            let seen = Seen::Edges {
                from: edge(arc.from),
                to: edge(arc.to),
            };
            measure(meter, switch, seen, &part).estimate()
        });
    Covered {
        capacitance: part.capacitance,
        balance: found.balance,
        one_reading: uncertainty(meter, switch, &found, &part),
        both_edges: both_edges.map(|e| e.combined().relative()),
        part_voltage: found.part_voltage,
    }
}

/// The values around the best one that keep to the limit, the ends refined.
fn useful_around(
    meter: &Meter,
    switch: Switch,
    values: &[Covered],
    best: usize,
    limit: Fraction,
) -> (Farad, Farad) {
    let keeps = |value: &Covered| value.best().is_some_and(|u| u <= limit);
    let end = |last_good: usize, first_bad: Option<&Covered>| -> Farad {
        let good = values[last_good].capacitance.get();
        let Some(bad) = first_bad else {
            return Farad::new(good);
        };
        let (good, _) = halve(good, bad.capacitance.get(), |c| {
            keeps(&covered(meter, switch, c))
        });
        Farad::new(good)
    };
    let above = values[best..].iter().take_while(|v| keeps(v)).count();
    let below = values[..=best]
        .iter()
        .rev()
        .take_while(|v| keeps(v))
        .count();
    let (lowest, highest) = (best + 1 - below.max(1), best + above.max(1) - 1);
    (
        end(lowest, lowest.checked_sub(1).and_then(|i| values.get(i))),
        end(highest, values.get(highest + 1)),
    )
}

/// Halves the step between a value for which something holds and one for which it does not.
fn halve(good: f64, bad: f64, holds: impl Fn(f64) -> bool) -> (f64, f64) {
    let (mut good, mut bad) = (good, bad);
    for _ in 0..N_HALVINGS {
        let middle = 0.5 * (good + bad);
        if holds(middle) {
            good = middle;
        } else {
            bad = middle;
        }
    }
    (good, bad)
}

/// The widest part of the dial where a part without loss that balances there leaves the lamp lit.
fn never_dark(meter: &Meter, switch: Switch) -> Option<(DialReading, DialReading)> {
    let k = meter.model().constants(switch);
    let circuit = meter.model().circuit();
    let stays_lit = |reading: f64| {
        let r = meter.dial.resistance(reading, k);
        part_from_dimmest(circuit, k, 0.0, r)
            .is_some_and(|c| k.vth < DialLaw::of(circuit, k, Load { c, d: 0.0 }).difference(r))
    };
    let (low, high) = (meter.dial.low.get(), meter.dial.high.get());
    let place = |i: usize| low + (high - low) * i as f64 / (N_PLACES - 1) as f64;
    let lit: Vec<bool> = (0..N_PLACES).map(|i| stays_lit(place(i))).collect();
    let mut widest: Option<(usize, usize)> = None;
    let mut first = 0;
    for piece in lit.chunk_by(|x, y| x == y) {
        let last = first + piece.len() - 1;
        let is_wider = widest.is_none_or(|(from, to)| to - from < last - first);
        if piece[0] && is_wider {
            widest = Some((first, last));
        }
        first = last + 1;
    }
    let (first, last) = widest?;
    let end = |lit: usize, dark: Option<usize>| {
        let found = dark.map_or(place(lit), |dark| {
            halve(place(lit), place(dark), stays_lit).0
        });
        DialReading::new(found)
    };
    let after = Some(last + 1).filter(|i| *i < N_PLACES);
    Some((end(first, first.checked_sub(1)), end(last, after)))
}
