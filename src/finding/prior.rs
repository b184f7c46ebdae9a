//! What is known of a salvaged part before it is measured, and what is known after.
//!
//! A part was made to its tolerance; a share q of what is salvaged has drifted since. With m and t the middle and the half
//! width of the tolerance it was *made to* (a house rule moves limits, not what was made):
//!
//! ```text
//! prior(C) = (1-q)·Normal(m, (t/2)²) + q·[½·Flat(max(m-3t, 0.01m), m+3t) + ½·Tail]
//! Tail     = twelve steps with edges 0.01m·10^(k/4), k = 0…12, probability 1/12 each, flat inside a step
//! ```
//!
//! A guaranteed minimum of N has m = 1.5N, t = 0.5N. The measured value c is normal with standard uncertainty u about the
//! true one, so that evidence and posterior need only Φ (JCGM 106:2012, 7, treats deciding with a prior).

use std::sync::LazyLock;

use super::normal::{between, cumulative, density};
use super::{HouseRules, Limits};
use crate::quantity::{Farad, Tolerance};

/// The prior of one reading of the marking.
#[derive(Clone, Copy, Debug)]
pub(super) struct Prior {
    m: f64,
    t: f64,
    drifted: f64,
}

/// A piece of a prior.
#[derive(Clone, Copy, Debug)]
pub(super) enum Piece {
    Normal {
        weight: f64,
        mean: f64,
        deviation: f64,
    },
    Flat {
        weight: f64,
        low: f64,
        high: f64,
    },
}

/// How well a hypothesis explains the measured value.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Evidence {
    /// Density of the measured value under the hypothesis.
    pub(super) total: f64,
    /// The part of it from capacitances inside the limits.
    pub(super) inside: f64,
}

/// An interval of capacitance in farad; the upper end may be infinite.
#[derive(Clone, Copy, Debug)]
pub(super) struct Interval {
    pub(super) low: f64,
    pub(super) high: f64,
}

const N_TAIL_STEPS: usize = 12;
/// The smallest capacitance of a part whose marking is not read, and how many quarter decades go up from there.
const SMALLEST: f64 = 0.1e-12;
const N_UNMARKED_STEPS: usize = 52;

/// A step farther from the measured value than so many standard uncertainties holds less than 1e-30 of it.
const REACH: f64 = 12.0;

impl Prior {
    pub(super) fn of(nominal: Farad, made_to: Tolerance, rules: &HouseRules) -> Self {
        let nominal = nominal.get();
        let (m, t) = match made_to.limits(Farad::new(nominal)) {
            (low, Some(high)) => (
                0.5 * (low.get() + high.get()),
                0.5 * (high.get() - low.get()),
            ),
            (_, None) => (1.5 * nominal, 0.5 * nominal),
        };
        // A tolerance of nothing would leave no room for any measured value.
        Self {
            m,
            t: t.max(1e-6 * m),
            drifted: rules.drifted_share,
        }
    }

    /// The pieces, the normal one first.
    pub(super) fn pieces(self) -> impl Iterator<Item = Piece> {
        let Self { m, t, drifted } = self;
        let made = Piece::Normal {
            weight: 1.0 - drifted,
            mean: m,
            deviation: 0.5 * t,
        };
        let (from, to) = self.wide();
        let wide = Piece::Flat {
            weight: 0.5 * drifted,
            low: from,
            high: to,
        };
        let tail = steps(0.01 * m, 0.5 * drifted, N_TAIL_STEPS);
        [made, wide].into_iter().chain(tail)
    }

    /// The ends of the flat piece: three half widths to either side, but well above nothing.
    fn wide(self) -> (f64, f64) {
        (
            (self.m - 3.0 * self.t).max(0.01 * self.m),
            self.m + 3.0 * self.t,
        )
    }

    /// Weighs a measured value.
    pub(super) fn evidence(self, c: f64, u: f64, limits: Interval) -> Evidence {
        let view = View::of(c, u, limits);
        let Self { m, t, drifted } = self;
        let mut sum = view.of_normal(1.0 - drifted, m, 0.5 * t);
        let (from, to) = self.wide();
        view.add_flat(
            0.5 * drifted / (to - from),
            (view.edge(from), view.edge(to)),
            &mut sum,
        );
        view.add_steps(0.01 * m, 0.5 * drifted, N_TAIL_STEPS, &mut sum);
        sum
    }
}

/// A measured value among limits, with what of it lies beyond each edge: an edge costs one Φ, however often it is used.
struct View {
    c: f64,
    u: f64,
    low: Edge,
    high: Edge,
    limits: Interval,
}

/// A place as seen from the measured value: its distance in standard uncertainties, and what lies beyond it.
#[derive(Clone, Copy)]
struct Edge {
    z: f64,
    /// Φ(-|z|); nothing past [`REACH`].
    tail: f64,
}

impl Edge {
    fn at(z: f64) -> Self {
        Self {
            z,
            tail: if z.abs() > REACH {
                0.0
            } else {
                cumulative(-z.abs())
            },
        }
    }

    /// The part of the measured value's distribution between two edges, taken on the side where both are small.
    fn mass_to(self, upper: Self) -> f64 {
        if upper.z <= self.z {
            0.0
        } else if self.z > 0.0 || upper.z < 0.0 {
            (self.tail - upper.tail).abs()
        } else {
            1.0 - self.tail - upper.tail
        }
    }
}

impl View {
    fn of(c: f64, u: f64, limits: Interval) -> Self {
        let edge = |place: f64| Edge::at((place - c) / u);
        Self {
            c,
            u,
            low: edge(limits.low),
            high: edge(limits.high),
            limits,
        }
    }

    fn edge(&self, place: f64) -> Edge {
        Edge::at((place - self.c) / self.u)
    }

    fn of_normal(&self, weight: f64, mean: f64, deviation: f64) -> Evidence {
        let (c, u) = (self.c, self.u);
        let spread = deviation.hypot(u);
        let total = weight * density(c, mean, spread);
        if total == 0.0 {
            return Evidence::default();
        }
        let posterior_mean = (deviation * deviation * c + u * u * mean) / (spread * spread);
        let posterior_deviation = deviation * u / spread;
        let low = (self.limits.low - posterior_mean) / posterior_deviation;
        let high = (self.limits.high - posterior_mean) / posterior_deviation;
        Evidence {
            total,
            inside: total * between(low, high),
        }
    }

    /// Adds a flat piece of this height.
    fn add_flat(&self, height: f64, (from, to): (Edge, Edge), sum: &mut Evidence) {
        let inner = |one: Edge, other: Edge| if one.z < other.z { other } else { one };
        let outer = |one: Edge, other: Edge| if one.z < other.z { one } else { other };
        sum.total += height * from.mass_to(to);
        sum.inside += height * inner(from, self.low).mass_to(outer(to, self.high));
    }

    /// Adds steps of a quarter decade from `start` up, of equal weight, flat inside a step: those within reach.
    fn add_steps(&self, start: f64, weight: f64, n_steps: usize, sum: &mut Evidence) {
        let edges = &QUARTER_DECADES[..=n_steps];
        let lowest = (self.c - REACH * self.u) / start;
        let highest = (self.c + REACH * self.u) / start;
        let first = edges
            .partition_point(|edge| *edge < lowest)
            .saturating_sub(1);
        let Some(within) = edges.get(first..) else {
            return;
        };
        let mut steps = within.iter().map(|edge| (edge, self.edge(start * edge)));
        let Some(mut from) = steps.next() else { return };
        for to in steps {
            let height = weight / (n_steps as f64 * start * (to.0 - from.0));
            self.add_flat(height, (from.1, to.1), sum);
            if *to.0 > highest {
                return;
            }
            from = to;
        }
    }
}

impl Interval {
    pub(super) fn of(limits: &Limits) -> Self {
        Self {
            low: limits.low.get(),
            high: limits.high.map_or(f64::INFINITY, Farad::get),
        }
    }

    pub(super) fn contains(self, c: f64) -> bool {
        self.low <= c && c <= self.high
    }
}

/// The probability of lying inside the limits if nothing was known before.
pub(super) fn flat_probability(c: f64, u: f64, limits: Interval) -> f64 {
    between((limits.low - c) / u, (limits.high - c) / u)
}

/// The hypothesis "none of these readings": log-uniform from 0.1 pF in 52 steps of a quarter decade.
pub(super) fn unmarked_pieces() -> impl Iterator<Item = Piece> {
    steps(SMALLEST, 1.0, N_UNMARKED_STEPS)
}

/// Steps of a quarter decade from `start` up, of equal weight, flat inside a step.
fn steps(start: f64, weight: f64, n_steps: usize) -> impl Iterator<Item = Piece> {
    let edges = &*QUARTER_DECADES;
    edges
        .iter()
        .zip(&edges[1..])
        .take(n_steps)
        .map(move |(low, high)| Piece::Flat {
            weight: weight / n_steps as f64,
            low: start * low,
            high: start * high,
        })
}

/// The evidence of "none of these readings".
pub(super) fn unmarked_evidence(c: f64, u: f64) -> f64 {
    let view = View::of(
        c,
        u,
        Interval {
            low: 0.0,
            high: f64::INFINITY,
        },
    );
    let mut sum = Evidence::default();
    view.add_steps(SMALLEST, 1.0, N_UNMARKED_STEPS, &mut sum);
    sum.total
}

/// 10^(k/4) for k from 0 to 52.
static QUARTER_DECADES: LazyLock<[f64; 53]> =
    LazyLock::new(|| std::array::from_fn(|k| 10f64.powf(0.25 * k as f64)));

#[cfg(test)]
mod tests {
    use super::*;

    fn interval(low: f64, high: f64) -> Interval {
        Interval { low, high }
    }

    /// Mark ±10 %, house rule 5 %, u = 3.4 %, reading +4 % (worked out beside the derivation of the module page; with the
    /// prior narrowed to the house rule as well it would be 0.939 and 0.962, and wrong).
    #[test]
    fn a_house_rule_moves_the_limits_and_not_the_prior() {
        let probability = |drifted_share: f64| {
            let rules = HouseRules {
                drifted_share,
                ..HouseRules::default()
            };
            let prior = Prior::of(Farad::new(1.0), Tolerance::percent(10.0), &rules);
            let evidence = prior.evidence(1.04, 0.034, interval(0.95, 1.05));
            evidence.inside / evidence.total
        };
        assert!(
            (probability(0.2) - 0.780).abs() < 0.0005,
            "{}",
            probability(0.2)
        );
        assert!(
            (probability(0.0) - 0.787).abs() < 0.0005,
            "{}",
            probability(0.0)
        );
    }

    /// JCGM 106:2012, examples of clause 7 (inputs from memory, arithmetic recomputed).
    #[test]
    fn conformance_probabilities_without_a_prior() {
        let lowest = f64::NEG_INFINITY;
        let cases = [
            (
                "Zener diode, upper limit",
                flat_probability(-5.47, 0.05, interval(lowest, -5.40)),
                0.919_243,
            ),
            (
                "bursting strength, lower limit",
                flat_probability(509.7, 8.6, interval(490.0, f64::INFINITY)),
                0.989_010,
            ),
            (
                "oil viscosity, two limits",
                flat_probability(13.6, 1.8, interval(12.5, 16.3)),
                0.662_630,
            ),
        ];
        for (name, found, expected) in cases {
            assert!((found - expected).abs() < 1e-6, "{name}: {found}");
        }
    }

    /// JCGM 106:2012, 9.5: resistors of N(1500 Ω, 0.12²), limits ±0.2 Ω, u = 0.04 Ω, one read at 1500.17 (recomputed).
    #[test]
    fn a_normal_prior_pulls_the_value_towards_what_is_made() {
        let evidence =
            View::of(1500.17, 0.04, interval(1499.8, 1500.2)).of_normal(1.0, 1500.0, 0.12);
        assert!((evidence.inside / evidence.total - 0.892_246).abs() < 1e-6);
        assert!(
            (flat_probability(1500.17, 0.04, interval(1499.8, 1500.2)) - 0.773_373).abs() < 1e-6
        );
    }

    #[test]
    fn every_prior_sums_to_one() {
        let rules = HouseRules::default();
        for made_to in [
            Tolerance::percent(5.0),
            Tolerance::asymmetric(20.0, 80.0),
            Tolerance::Minimum,
        ] {
            let weights = Prior::of(Farad::new(1e-9), made_to, &rules)
                .pieces()
                .map(|piece| match piece {
                    Piece::Normal { weight, .. } | Piece::Flat { weight, .. } => weight,
                });
            assert!((weights.sum::<f64>() - 1.0).abs() < 1e-12, "{made_to}");
        }
    }
}
