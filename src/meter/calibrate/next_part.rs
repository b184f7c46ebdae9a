//! The further reference part that would help most, from the covariance alone.
//!
//! A new number with gradient g (over its standard uncertainty) on unknowns of covariance V lessens the variance of any
//! prediction h by (hᵀVg)²/(gᵀVg + 1 + γ²), γ² being the share of the new part's own uncertainty.

use super::problem::Calibrating;
use super::report::common_at_middle;
use super::{NextPart, SwitchGain};
use crate::meter::fit::Solution;
use crate::meter::{Cut, Meter, Part, Switch, null};
use crate::quantity::{Farad, Fraction};
use crate::tables::{Series, TABLES};

/// How well a reference part is known if none was read (common practice, no source).
const USUAL_UNCERTAINTY: f64 = 0.005;

/// The spans of meters: 1 pF to 1 mF.
const DECADES: std::ops::Range<i32> = -12..-3;

struct Candidate {
    capacitance: f64,
    switch: Switch,
    variances: Vec<f64>,
}

pub(super) fn next_part(
    problem: &Calibrating<'_>,
    solution: &Solution,
    gains: &[SwitchGain],
) -> Option<NextPart> {
    let meter = problem.calibrated(solution);
    let at = &solution.estimate;
    // What the middle of the dial means moves by the slope of the middle read, turned round.
    let predictions: Vec<Vec<f64>> = gains
        .iter()
        .filter_map(|gain| {
            let (capacitance, _) = common_at_middle(&meter, gain.switch)?;
            let (slopes, of_part) = problem.middle_slopes(gain.switch, capacitance.get(), at);
            Some(slopes.iter().map(|slope| -slope / of_part).collect())
        })
        .collect();
    let u_part = problem
        .rows
        .parts
        .iter()
        .map(|part| part.u)
        .min_by(f64::total_cmp)
        .unwrap_or(USUAL_UNCERTAINTY);
    let u_reading = meter.model().reading_uncertainty(1);
    let best = candidates(&meter)
        .map(|(switch, capacitance)| {
            let (slopes, of_part) = problem.middle_slopes(switch, capacitance, at);
            let gradient: Vec<f64> = slopes.iter().map(|slope| slope / u_reading).collect();
            let own = of_part * u_part / u_reading;
            let spread = solution.shared_variance(&gradient, &gradient) + 1.0 + own * own;
            let variances = predictions
                .iter()
                .map(|h| {
                    let shared = solution.shared_variance(h, &gradient);
                    solution.shared_variance(h, h) - shared * shared / spread
                })
                .collect();
            Candidate {
                capacitance,
                switch,
                variances,
            }
        })
        .min_by(|x, y| sum(&x.variances).total_cmp(&sum(&y.variances)))?;
    Some(NextPart {
        capacitance: Farad::new(best.capacitance),
        switch: best.switch,
        standard_uncertainty: Fraction::new(u_part),
        after: best
            .variances
            .iter()
            .map(|v| Fraction::new(v.max(0.0).sqrt()))
            .collect(),
    })
}

fn sum(variances: &[f64]) -> f64 {
    variances.iter().sum()
}

/// Values of the E6 series that give a whole dark arc on a switch.
fn candidates(meter: &Meter) -> impl Iterator<Item = (Switch, f64)> {
    let mantissas = TABLES
        .value_series()
        .find(|series| series.series == Series::E6)
        .map_or(&[][..], |series| series.mantissas.as_slice());
    meter.switches().flat_map(move |switch| {
        DECADES
            .flat_map(move |decade| {
                mantissas
                    .iter()
                    .map(move |m| f64::from(*m) * 10f64.powi(decade - 2))
            })
            .filter(move |capacitance| {
                let part = Part::without_loss(Farad::new(*capacitance));
                let found = null(meter, switch, &part);
                found.beyond.is_none() && found.arc.is_some_and(|arc| arc.cut == Cut::Neither)
            })
            .map(move |capacitance| (switch, capacitance))
    })
}
