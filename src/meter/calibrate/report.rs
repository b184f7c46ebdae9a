//! What a solution is worth: residuals, parts left out, outliers, contradictions, gains.

use super::contradiction::{QUANTILE_99, QUANTILE_99_99, chi_square_quantile, contradiction};
use super::next_part::next_part;
use super::problem::{Calibrating, Place};
use super::unknowns::Constant;
use super::{
    CalibrationReport, NotCalibrated, Parameter, PartCheck, Residual, Robust, RobustChange,
    SwitchGain,
};
use crate::meter::fit::{Failure, Solution};
use crate::meter::model::{DIAL_END, STRAY};
use crate::meter::{DialReading, Meter, Part, Repeats, Seen, Switch, Taper, measure};
use crate::quantity::{Farad, Fraction};

/// More standard uncertainties than a sound number strays (2.7 in 1000 do).
pub(super) const FAR: f64 = 3.0;

/// A switch must become better by this much for a calibration to be worth storing.
const WORTH_STORING: f64 = 0.9;

/// A constant whose standard uncertainty stays above this part of what it was has not been learnt about.
const UNTOUCHED: f64 = 0.99;

pub(super) fn of(
    problem: &Calibrating<'_>,
    solution: &Solution,
) -> Result<CalibrationReport, NotCalibrated> {
    let places = problem.places();
    let n_numbers = places.len();
    let switches = gains(problem, solution);
    check_worth(problem, solution, &switches)?;
    let residuals = residuals(problem, solution, &places);
    let robust = robust(problem, solution).map_err(NotCalibrated::Failed)?;
    let mut report = CalibrationReport {
        n_numbers,
        chi_square: solution.sum_of_squares,
        reduced_chi_square: solution.sum_of_squares / n_numbers as f64,
        parameters: parameters(problem, solution),
        parts: parts(problem, solution, &places),
        open_terminals: open_terminals(problem, solution, &places)
            .map_err(NotCalibrated::Failed)?,
        next_part: next_part(problem, solution, &switches),
        residuals,
        switches,
        robust,
        contradiction: None,
    };
    if solution.sum_of_squares <= chi_square_quantile(n_numbers, QUANTILE_99) {
        return Ok(report);
    }
    let contradiction = contradiction(problem, solution, &places);
    if contradiction.rest_agrees {
        for (i, residual) in report.residuals.iter_mut().enumerate() {
            residual.is_outlier = contradiction.suspects.contains(&i);
        }
    }
    report.contradiction = Some(contradiction);
    if solution.sum_of_squares <= chi_square_quantile(n_numbers, QUANTILE_99_99) {
        Ok(report)
    } else {
        Err(NotCalibrated::Contradictory(Box::new(report)))
    }
}

/// What a constant is called.
pub(super) fn name_of(meter: &Meter, constant: &Constant) -> (String, &'static str) {
    let is_linear = matches!(meter.dial.taper, Taper::Linear { .. });
    let (name, unit) = match (constant.kind, constant.switch) {
        (0, Some(switch)) => {
            return (format!("switch {} resistance", meter.label(switch)), "Ω");
        }
        (1, _) => ("reference capacitance", "F"),
        (2, _) if is_linear => ("dial resistance", "Ω"),
        (2, _) => ("factor of the dial's points", ""),
        (DIAL_END, _) => ("dial end resistance", "Ω"),
        (STRAY, _) => ("stray capacitance", "F"),
        _ => ("lamp threshold", "V"),
    };
    (name.to_owned(), unit)
}

fn parameters(problem: &Calibrating<'_>, solution: &Solution) -> Vec<Parameter> {
    let constants = problem.unknowns.constants.iter();
    constants
        .map(|constant| {
            let (name, unit) = name_of(problem.meter, constant);
            let (value, standard_uncertainty) = constant.natural(solution);
            let (prior_value, prior_uncertainty) = constant.prior();
            Parameter {
                name,
                unit,
                value,
                standard_uncertainty,
                prior_value,
                prior_uncertainty,
            }
        })
        .collect()
}

/// Common uncertainty at the middle of the dial by tolerances and by the solution. A switch that gives no value there is
/// left out.
fn gains(problem: &Calibrating<'_>, solution: &Solution) -> Vec<SwitchGain> {
    let after = problem.calibrated(solution);
    problem
        .meter
        .switches()
        .filter_map(|switch| {
            Some(SwitchGain {
                switch,
                before: common_at_middle(problem.meter, switch)?.1,
                after: common_at_middle(&after, switch)?.1,
            })
        })
        .collect()
}

/// The capacitance that the middle of the dial means on a switch, and its common relative standard uncertainty.
pub(super) fn common_at_middle(meter: &Meter, switch: Switch) -> Option<(Farad, Fraction)> {
    let middle = DialReading::new(0.5 * (meter.dial.low.get() + meter.dial.high.get()));
    let part = Part::without_loss(Farad::new(0.0));
    let seen = Seen::Middle(Repeats::once(middle));
    let found = measure(meter, switch, seen, &part).estimate()?;
    Some((
        found.capacitance,
        Fraction::new(found.common / found.capacitance),
    ))
}

fn check_worth(
    problem: &Calibrating<'_>,
    solution: &Solution,
    switches: &[SwitchGain],
) -> Result<(), NotCalibrated> {
    let is_better = |gain: &SwitchGain| {
        gain.after.get() <= WORTH_STORING * gain.before.get() && 0.0 < gain.before.get()
    };
    if switches.iter().any(is_better) {
        return Ok(());
    }
    let constants = problem.unknowns.constants.iter();
    let learnt: Vec<(f64, String)> = constants
        .filter_map(|c| Some((c.learnt(solution)?.0, name_of(problem.meter, c).0)))
        .collect();
    let above = |bound: f64| {
        learnt
            .iter()
            .filter(|(left, _)| *left >= bound)
            .map(|(_, name)| name.clone())
            .collect::<Vec<String>>()
    };
    let mut parameters = above(UNTOUCHED);
    if parameters.is_empty() {
        parameters = above(WORTH_STORING);
    }
    Err(NotCalibrated::TeachesNothing {
        parameters,
        switches: switches.to_vec(),
    })
}

fn residuals(problem: &Calibrating<'_>, solution: &Solution, places: &[Place]) -> Vec<Residual> {
    let leverages = solution.leverages();
    let numbers = places.iter().zip(&solution.residuals).zip(&leverages);
    numbers
        .enumerate()
        .map(|(i, ((place, residual), leverage))| {
            let row = &problem.rows.rows[place.row];
            let number = row.numbers[place.number];
            let left = (1.0 - leverage).max(0.0);
            let label = row
                .part
                .map_or(String::new(), |part| problem.rows.parts[part].label.clone());
            let standardised = if left > 1e-9 {
                -residual / left.sqrt()
            } else {
                0.0
            };
            Residual {
                row: place.row,
                label,
                switch: row.switch,
                number: number.kind,
                divisions: -residual * number.u / problem.meter.dial.division,
                standardised,
                is_outlier: FAR < standardised.abs(),
                leave_one_out: row.part.filter(|_| left > 1e-9).and_then(|part| {
                    let slope = slope_of_part(problem, solution, i, part);
                    let left_out = -residual / left / slope;
                    left_out.is_finite().then(|| Fraction::new(left_out))
                }),
            }
        })
        .collect()
}

/// How a number, in its standard uncertainties, rises with the logarithm of the part's capacitance.
fn slope_of_part(
    problem: &Calibrating<'_>,
    solution: &Solution,
    number: usize,
    part: usize,
) -> f64 {
    solution.slopes[number][problem.unknowns.part_column(part)] / problem.rows.parts[part].u
}

/// Each part as the meter calibrated without it would measure it. With s the slopes of its numbers, e their residuals and
/// H their block of `JVJᵀ`, residuals left out together are `(I-H)⁻¹e` with that matrix as their covariance, so that the
/// deviation is `sᵀe/sᵀ(I-H)s`.
fn parts(problem: &Calibrating<'_>, solution: &Solution, places: &[Place]) -> Vec<PartCheck> {
    let parts = problem.rows.parts.iter().enumerate();
    parts
        .filter_map(|(part, known)| {
            let its: Vec<usize> = (0..places.len())
                .filter(|i| problem.rows.rows[places[*i].row].part == Some(part))
                .collect();
            let slopes: Vec<f64> = its
                .iter()
                .map(|i| slope_of_part(problem, solution, *i, part))
                .collect();
            let (mut pull, mut weight) = (0.0, 0.0);
            let mut combined = vec![0.0; solution.estimate.len()];
            for (i, slope) in its.iter().zip(&slopes) {
                pull += slope * solution.residuals[*i];
                weight += slope * slope;
                for (sum, x) in combined.iter_mut().zip(&solution.slopes[*i]) {
                    *sum += slope * x;
                }
            }
            let weight = weight - solution.shared_variance(&combined, &combined);
            (weight > 0.0).then(|| PartCheck {
                label: known.label.clone(),
                deviation: Fraction::new(-pull / weight),
                standard_uncertainty: Fraction::new(1.0 / weight.sqrt()),
            })
        })
        .collect()
}

/// The share of the information on the stray capacitance that the open terminals gave.
fn open_terminals(
    problem: &Calibrating<'_>,
    solution: &Solution,
    places: &[Place],
) -> Result<Option<Fraction>, Failure> {
    let stray = problem.unknowns.constants.iter().find(|c| c.kind == STRAY);
    let Some(column) = stray.and_then(Constant::column) else {
        return Ok(None);
    };
    let weights: Vec<f64> = places
        .iter()
        .map(|place| f64::from(u8::from(problem.rows.rows[place.row].part.is_some())))
        .collect();
    if weights.iter().all(|w| *w > 0.0) {
        return Ok(None);
    }
    let without = problem.solve(solution.estimate.clone(), &weights)?;
    let share = 1.0 - solution.covariance[column][column] / without.covariance[column][column];
    Ok(Some(Fraction::new(share.clamp(0.0, 1.0))))
}

fn robust(problem: &Calibrating<'_>, solution: &Solution) -> Result<Robust, Failure> {
    let (weights, robust) = problem.robust(solution)?;
    let doubted = weights
        .iter()
        .enumerate()
        .filter(|(_, w)| **w < 0.5)
        .map(|(i, w)| (i, *w))
        .collect();
    let constants = problem.unknowns.constants.iter();
    let changes = constants
        .filter_map(|constant| {
            let ((from, u), (to, _)) = (constant.natural(solution), constant.natural(&robust));
            let in_uncertainties = (to - from) / u;
            let (name, unit) = name_of(problem.meter, constant);
            (in_uncertainties.abs() > 0.5).then_some(RobustChange {
                name,
                unit,
                from,
                to,
                in_uncertainties,
            })
        })
        .collect();
    Ok(Robust { doubted, changes })
}
