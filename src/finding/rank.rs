//! Every reading of the marking, weighed by the measurement: posterior ∝ plausibility × evidence. What the plausibilities
//! leave over is the hypothesis "none of these".

use super::parked::Window;
use super::prior::{Evidence, Interval, Prior, flat_probability, unmarked_evidence};
use super::{HouseRules, Limits, Standing, limits};
use crate::marking::Reading;
use crate::meter::{Estimate, Value};

/// One reading of the marking, weighed by the measurement.
pub(super) struct Weighed {
    pub(super) limits: Limits,
    pub(super) prior: Prior,
    pub(super) evidence: Evidence,
    pub(super) probability_flat: Option<f64>,
}

/// The readings after the measurement.
pub(super) struct Ranked {
    pub(super) weighed: Vec<Weighed>,
    pub(super) ranking: Vec<Standing>,
    pub(super) chosen: Option<usize>,
}

impl Ranked {
    /// Weighs every reading; `chosen` is the one the person picked.
    pub(super) fn of(
        readings: &[Reading],
        chosen: Option<usize>,
        value: Value,
        rules: &HouseRules,
    ) -> Self {
        let weighed: Vec<Weighed> = readings
            .iter()
            .map(|reading| Weighed::of(reading, value, rules))
            .collect();
        let plausibilities = readings.iter().map(|r| r.plausibility);
        let remainder = (1.0 - plausibilities.clone().sum::<f64>()).max(0.0);
        let mut ranking: Vec<Standing> = weighed
            .iter()
            .zip(plausibilities)
            .enumerate()
            .map(|(index, (w, plausibility))| Standing {
                reading: Some(index),
                posterior: plausibility * w.evidence.total,
            })
            .collect();
        ranking.push(Standing {
            reading: None,
            posterior: remainder * unmarked(value),
        });
        let total: f64 = ranking.iter().map(|s| s.posterior).sum();
        for standing in &mut ranking {
            standing.posterior = if total > 0.0 {
                standing.posterior / total
            } else {
                0.0
            };
        }
        // Stable: readings that the measurement leaves alike keep the order of their plausibility.
        ranking.sort_by(|x, y| y.posterior.total_cmp(&x.posterior));
        let best = ranking.iter().find_map(|standing| standing.reading);
        let chosen = chosen.filter(|index| *index < weighed.len()).or(best);
        Self {
            weighed,
            ranking,
            chosen,
        }
    }

    /// The posterior of a reading.
    pub(super) fn posterior(&self, reading: usize) -> f64 {
        self.ranking
            .iter()
            .find(|s| s.reading == Some(reading))
            .map_or(0.0, |s| s.posterior)
    }
}

impl Weighed {
    fn of(reading: &Reading, value: Value, rules: &HouseRules) -> Self {
        let limits = limits(reading, rules);
        let prior = Prior::of(reading.capacitance, limits.made_to, rules);
        let interval = Interval::of(&limits);
        let (evidence, probability_flat) = match value {
            Value::Estimate(estimate) => {
                let (c, u) = value_and_uncertainty(estimate);
                (
                    prior.evidence(c, u, interval),
                    Some(flat_probability(c, u, interval)),
                )
            }
            Value::Window { lamp, low, high } => {
                let window = Window { lamp, low, high };
                (
                    window.evidence(prior, interval),
                    window.flat_probability(interval),
                )
            }
            // Nothing measured weighs all readings alike.
            Value::Open | Value::Unknown => (
                Evidence {
                    total: 1.0,
                    inside: 0.0,
                },
                None,
            ),
        };
        Self {
            limits,
            prior,
            evidence,
            probability_flat,
        }
    }

    /// The probability of being inside, given this reading.
    pub(super) fn probability(&self) -> f64 {
        if self.evidence.total > 0.0 {
            self.evidence.inside / self.evidence.total
        } else {
            0.0
        }
    }
}

/// The evidence of "none of these readings".
fn unmarked(value: Value) -> f64 {
    match value {
        Value::Estimate(estimate) => {
            let (c, u) = value_and_uncertainty(estimate);
            unmarked_evidence(c, u)
        }
        Value::Window { lamp, low, high } => Window { lamp, low, high }.unmarked_evidence(),
        Value::Open | Value::Unknown => 1.0,
    }
}

/// A meter without any doubt still leaves a billionth, so that no division is by zero.
fn value_and_uncertainty(estimate: Estimate) -> (f64, f64) {
    let combined = estimate.combined();
    let c = combined.value.get();
    (c, combined.standard_uncertainty.get().max(1e-9 * c))
}
