//! A lamp seen with the dial parked: no value, but a probability.
//!
//! With C1 < C2 the two parts whose dark edge lies at the parked place, and u1, u2 their standard uncertainties,
//! L(dark|C) = Φ((C-C1)/u1) - Φ((C-C2)/u2) and L(lit|C) = 1 - L(dark|C). Integrals over the pieces of the prior are taken by
//! 24-point Gauss-Legendre rules, cut where the integrand bends.

use std::sync::LazyLock;

use super::normal::{cumulative, density};
use super::prior::{Evidence, Interval, Piece, Prior, unmarked_pieces};
use crate::meter::Lamp;
use crate::quantity::{Farad, Uncertain};

/// What a parked lamp said.
#[derive(Clone, Copy, Debug)]
pub(super) struct Window {
    pub(super) lamp: Lamp,
    pub(super) low: Uncertain<Farad>,
    pub(super) high: Option<Uncertain<Farad>>,
}

const N_NODES: usize = 24;

/// Nodes and weights of the Gauss-Legendre rule on [-1, 1]: roots of the Legendre polynomial by Newton's method from the
/// usual cosine start, weights 2/((1-x²)P'²) (a textbook rule).
static RULE: LazyLock<[(f64, f64); N_NODES]> = LazyLock::new(|| {
    std::array::from_fn(|i| {
        let n = N_NODES as f64;
        let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (n + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..20 {
            let (mut before, mut value) = (1.0, x);
            for k in 2..=N_NODES {
                let k = k as f64;
                (before, value) = (
                    value,
                    ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k,
                );
            }
            slope = n * (x * value - before) / (x * x - 1.0);
            x -= value / slope;
        }
        (x, 2.0 / ((1.0 - x * x) * slope * slope))
    })
});

impl Window {
    fn likelihood(&self, c: f64) -> f64 {
        let step = |edge: Uncertain<Farad>| {
            cumulative((c - edge.value.get()) / edge.standard_uncertainty.get())
        };
        let dark = (step(self.low) - self.high.map_or(0.0, step)).clamp(0.0, 1.0);
        match self.lamp {
            Lamp::Dark => dark,
            Lamp::Lit => 1.0 - dark,
        }
    }

    /// Where the likelihood bends: at the two edges, and where it leaves and reaches its plateaus.
    fn bends(&self) -> impl Iterator<Item = f64> {
        [Some(self.low), self.high]
            .into_iter()
            .flatten()
            .flat_map(|edge| {
                let (c, u) = (edge.value.get(), edge.standard_uncertainty.get());
                [c - 8.0 * u, c, c + 8.0 * u]
            })
    }

    /// Integrates likelihood times `weight` over [from, to].
    fn integral(&self, from: f64, to: f64, weight: impl Fn(f64) -> f64) -> f64 {
        if from >= to {
            return 0.0;
        }
        let mut cuts: Vec<f64> = self.bends().filter(|c| from < *c && *c < to).collect();
        cuts.extend([from, to]);
        cuts.sort_by(f64::total_cmp);
        let mut sum = 0.0;
        for (a, b) in cuts.iter().zip(cuts.iter().skip(1)) {
            let (centre, half) = (0.5 * (a + b), 0.5 * (b - a));
            for (x, w) in RULE.iter() {
                let c = centre + half * x;
                sum += half * w * self.likelihood(c) * weight(c);
            }
        }
        sum
    }

    fn over(&self, piece: Piece, limits: Interval) -> f64 {
        match piece {
            Piece::Normal {
                weight,
                mean,
                deviation,
            } => {
                let low = (mean - 8.0 * deviation).max(limits.low);
                let high = (mean + 8.0 * deviation).min(limits.high);
                self.integral(low, high, |c| weight * density(c, mean, deviation))
            }
            Piece::Flat { weight, low, high } => {
                let height = weight / (high - low);
                self.integral(low.max(limits.low), high.min(limits.high), |_| height)
            }
        }
    }

    /// Weighs what the lamp did under a prior.
    pub(super) fn evidence(&self, prior: Prior, limits: Interval) -> Evidence {
        let everywhere = Interval {
            low: f64::NEG_INFINITY,
            high: f64::INFINITY,
        };
        let mut sum = Evidence::default();
        for piece in prior.pieces() {
            sum.total += self.over(piece, everywhere);
            sum.inside += self.over(piece, limits);
        }
        sum
    }

    /// The evidence of "none of these readings".
    pub(super) fn unmarked_evidence(&self) -> f64 {
        let everywhere = Interval {
            low: 0.0,
            high: f64::INFINITY,
        };
        unmarked_pieces()
            .map(|piece| self.over(piece, everywhere))
            .sum()
    }

    /// The probability of lying inside if every capacitance above 0 were equally likely; `None` for a lit lamp, or where
    /// the dark window has no upper end.
    pub(super) fn flat_probability(&self, limits: Interval) -> Option<f64> {
        let top = self.high.filter(|_| self.lamp == Lamp::Dark)?;
        let top = top.value.get() + 9.0 * top.standard_uncertainty.get();
        let total = self.integral(0.0, top, |_| 1.0);
        let inside = self.integral(limits.low.max(0.0), limits.high.min(top), |_| 1.0);
        (total > 0.0).then(|| inside / total)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_rule_integrates_polynomials_exactly() {
        let integral = |power: i32| RULE.iter().map(|(x, w)| w * x.powi(power)).sum::<f64>();
        assert!((integral(0) - 2.0).abs() < 1e-13);
        assert!((integral(10) - 2.0 / 11.0).abs() < 1e-13);
        assert!((integral(46) - 2.0 / 47.0).abs() < 1e-13);
        assert!(integral(47).abs() < 1e-13);
    }
}
