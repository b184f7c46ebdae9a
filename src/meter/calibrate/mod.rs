//! Calibrating a meter from parts of known value, by least squares with the component tolerances as priors.
//!
//! Unknown are the constants of the meter and the true values of the reference parts: one part read on two switches is one
//! part. Only products and ratios of the constants can be observed (R1/C2, and the dial's resistances with them), so the
//! priors keep the problem regular and what matters is the covariance of what is measured later; it is kept whole.
//!
//! `rows.rs` checks what was read, `unknowns.rs` says what is to be found, `problem.rs` solves, `report.rs`, `contradiction.rs` and
//! `next_part.rs` judge the solution, `write.rs` puts it into the profile.

mod contradiction;
mod next_part;
mod problem;
mod report;
mod rows;
mod unknowns;
mod write;

use std::fmt;

use super::fit::{Failure, Solution};
use super::model::Model;
use super::{Calibration, Meter, NumberRead, Seen, Switch};
use crate::quantity::{Farad, Fraction};
use problem::Calibrating;
use rows::Rows;
use unknowns::Unknowns;

pub use rows::{RowFault, RowFaultKind, check_reading};

/// A part of known value, or the open terminals, read on a switch.
#[derive(Clone, Debug, PartialEq)]
pub struct ReferenceReading {
    /// What the part is called: one label is one part. Without a label, rows with the same data are one part.
    pub label: String,
    /// Its capacitance (series form); 0 F for open terminals.
    pub capacitance: Farad,
    /// Its standard uncertainty; of no concern for open terminals.
    pub standard_uncertainty: Farad,
    /// Its loss, tan δ.
    pub loss: f64,
    /// The switch it was read on.
    pub switch: Switch,
    /// What was seen.
    pub seen: Seen,
}

/// A calibration with all that is to be known of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Calibrated {
    /// What is stored in the profile.
    pub calibration: Calibration,
    /// What it rests on, and what it changes.
    pub report: CalibrationReport,
}

/// How good a calibration is.
#[derive(Clone, Debug, PartialEq)]
pub struct CalibrationReport {
    /// How many numbers were read: two for an arc with both edges.
    pub n_numbers: usize,
    /// Weighted sum of squares, priors included.
    pub chi_square: f64,
    /// That over the count of numbers read.
    pub reduced_chi_square: f64,
    /// The constants of the meter.
    pub parameters: Vec<Parameter>,
    /// Each number read beside what the calibrated meter predicts.
    pub residuals: Vec<Residual>,
    /// Each reference part as the other parts would have it.
    pub parts: Vec<PartCheck>,
    /// The common uncertainty of each switch, before and after.
    pub switches: Vec<SwitchGain>,
    /// The part of what is known of the stray capacitance that rests on the open terminals, 0 to 1; `None` if they were
    /// not read or the stray was known exactly.
    pub open_terminals: Option<Fraction>,
    /// The further reference part that would help most.
    pub next_part: Option<NextPart>,
    /// What changes if far readings count for less.
    pub robust: Robust,
    /// Said where the numbers lie farther apart than their uncertainties allow.
    pub contradiction: Option<Contradiction>,
}

/// A constant of the meter.
#[derive(Clone, Debug, PartialEq)]
pub struct Parameter {
    /// What it is.
    pub name: String,
    /// The unit of the values; empty for a factor.
    pub unit: &'static str,
    /// The estimate.
    pub value: f64,
    /// Its standard uncertainty, correlations left out.
    pub standard_uncertainty: f64,
    /// What the profile says without calibration.
    pub prior_value: f64,
    /// The standard uncertainty of that.
    pub prior_uncertainty: f64,
}

/// A number read beside what the calibrated meter predicts.
#[derive(Clone, Debug, PartialEq)]
pub struct Residual {
    /// The row, counted from 0.
    pub row: usize,
    /// The label of the part; empty for open terminals.
    pub label: String,
    /// The switch.
    pub switch: Switch,
    /// What the number stands for.
    pub number: NumberRead,
    /// Read less predicted, in divisions of the dial.
    pub divisions: f64,
    /// The same over its standard uncertainty as a residual.
    pub standardised: f64,
    /// What the number would read too much if it had not been used, as a part of the capacitance; `None` for open terminals
    /// and where nothing else predicts it.
    pub leave_one_out: Option<Fraction>,
    /// Whether it is one of few numbers without which the rest agrees; where the rest agrees as it is, whether it lies more
    /// than three standard uncertainties off.
    pub is_outlier: bool,
}

/// A reference part beside what the meter says of it when calibrated with the other parts only.
#[derive(Clone, Debug, PartialEq)]
pub struct PartCheck {
    /// Its label.
    pub label: String,
    /// Measured less stated value, as a part of it.
    pub deviation: Fraction,
    /// Its standard uncertainty, that of the stated value included.
    pub standard_uncertainty: Fraction,
}

/// What a calibration does for a switch: the common relative standard uncertainty at the middle of the dial.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SwitchGain {
    /// The switch.
    pub switch: Switch,
    /// By the tolerances of the components.
    pub before: Fraction,
    /// By the calibration.
    pub after: Fraction,
}

/// A reference part that would help.
#[derive(Clone, Debug, PartialEq)]
pub struct NextPart {
    /// Its nominal value, of the E6 series.
    pub capacitance: Farad,
    /// The switch to read it on.
    pub switch: Switch,
    /// How well it is taken to be known: as well as the best part used.
    pub standard_uncertainty: Fraction,
    /// The common relative standard uncertainty of each switch after it.
    pub after: Vec<Fraction>,
}

/// What Huber's weights say (Huber 1964).
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Robust {
    /// The numbers that got less than half their weight, as places among the residuals, with the weight.
    pub doubted: Vec<(usize, f64)>,
    /// The constants that move by more than half their standard uncertainty.
    pub changes: Vec<RobustChange>,
}

/// A constant that far readings have pulled.
#[derive(Clone, Debug, PartialEq)]
pub struct RobustChange {
    /// What it is.
    pub name: String,
    /// The unit of the values; empty for a factor.
    pub unit: &'static str,
    /// The estimate with all weights alike.
    pub from: f64,
    /// The robust estimate.
    pub to: f64,
    /// The way between in standard uncertainties.
    pub in_uncertainties: f64,
}

/// Numbers that lie farther apart than their uncertainties allow.
#[derive(Clone, Debug, PartialEq)]
pub struct Contradiction {
    /// The weighted sum of squares.
    pub chi_square: f64,
    /// What it exceeds in one of a hundred sound calibrations.
    pub usually_below: f64,
    /// The numbers to be read again, as places among the residuals, the worst row first.
    pub suspects: Vec<usize>,
    /// Whether the rest agrees without them.
    pub rest_agrees: bool,
    /// The constants that come out more than three standard uncertainties from what the profile says.
    pub far_from_profile: Vec<String>,
}

/// Why there is no calibration.
#[derive(Clone, Debug, PartialEq)]
pub enum NotCalibrated {
    /// Rows with mistakes, each with its place.
    Rows(Vec<RowFault>),
    /// Nothing was read.
    NothingRead,
    /// Every constant of the profile is known exactly: all tolerances are 0.
    NothingToLearn,
    /// No switch becomes better by a tenth.
    TeachesNothing {
        /// The constants that the readings say nothing about.
        parameters: Vec<String>,
        /// The uncertainty of each switch.
        switches: Vec<SwitchGain>,
    },
    /// The readings contradict each other or the profile so far that one of ten thousand sound sets does; the report says
    /// which to read again.
    Contradictory(Box<CalibrationReport>),
    /// The fit failed.
    Failed(Failure),
}

impl PartCheck {
    /// Returns whether the stated value lies more than three standard uncertainties from what the others say.
    pub fn is_outlier(&self) -> bool {
        report::FAR * self.standard_uncertainty.get() < self.deviation.get().abs()
    }
}

impl fmt::Display for NotCalibrated {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Rows(faults) => {
                for (i, fault) in faults.iter().enumerate() {
                    let between = if i > 0 { "\n" } else { "" };
                    write!(f, "{between}row {}: {}", fault.row + 1, fault.kind)?;
                }
                Ok(())
            }
            Self::NothingRead => f.write_str("nothing was read: a calibration needs at least one reference part"),
            Self::NothingToLearn => {
                f.write_str("every tolerance in the profile is 0, so there is nothing to learn; give the tolerances of the components")
            }
            Self::TeachesNothing { parameters, .. } => {
                write!(f, "no switch would measure better by a tenth; these readings say nothing about {}", parameters.join(", "))
            }
            Self::Contradictory(report) => {
                f.write_str("the readings contradict each other or the tolerances of the profile")?;
                let Some(found) = &report.contradiction else {
                    return Ok(());
                };
                write!(f, " (chi-square {:.1}, usually below {:.1})", found.chi_square, found.usually_below)?;
                let mut rows: Vec<String> = Vec::new();
                for suspect in &found.suspects {
                    let row = (report.residuals[*suspect].row + 1).to_string();
                    if !rows.contains(&row) {
                        rows.push(row);
                    }
                }
                write!(f, "; read again: row {}", rows.join(", row "))?;
                if found.rest_agrees {
                    f.write_str(", without which the rest agrees")?;
                }
                if !found.far_from_profile.is_empty() {
                    write!(f, "; far from the profile: {}", found.far_from_profile.join(", "))?;
                }
                Ok(())
            }
            Self::Failed(failure) => write!(f, "{failure}"),
        }
    }
}

/// Returns the calibration that the readings give, and how good it is. `date` is kept as written, RFC 3339.
///
/// An earlier calibration of the meter is left aside: what was known before are the tolerances of its components.
///
/// # Errors
/// Rows with mistakes, sets that teach nothing, contradictions: see [`NotCalibrated`].
pub fn calibrate(
    meter: &Meter,
    readings: &[ReferenceReading],
    date: &str,
) -> Result<Calibrated, NotCalibrated> {
    with_solution(meter, readings, |problem, solution| {
        Ok(Calibrated {
            report: report::of(problem, solution)?,
            calibration: problem.calibration(solution, date),
        })
    })
}

/// Returns the meter as the readings calibrate it, without looking at how good the calibration is: for a simulation that
/// calibrates often.
///
/// # Errors
/// Rows with mistakes, nothing read, a fit that fails.
pub fn calibrate_quickly(
    meter: &Meter,
    readings: &[ReferenceReading],
) -> Result<Meter, NotCalibrated> {
    with_solution(meter, readings, |problem, solution| {
        Ok(problem.calibrated(solution))
    })
}

/// Reads the rows, solves, and hands both on.
fn with_solution<T>(
    meter: &Meter,
    readings: &[ReferenceReading],
    then: impl Fn(&Calibrating<'_>, &Solution) -> Result<T, NotCalibrated>,
) -> Result<T, NotCalibrated> {
    let meter = &meter.uncalibrated();
    let rows = &Rows::of(meter, readings).map_err(NotCalibrated::Rows)?;
    if rows.rows.is_empty() {
        return Err(NotCalibrated::NothingRead);
    }
    let unknowns = &Unknowns::of(meter, rows);
    if unknowns.constants.iter().all(|c| c.column().is_none()) {
        return Err(NotCalibrated::NothingToLearn);
    }
    let problem = Calibrating {
        meter,
        rows,
        unknowns,
    };
    let start = vec![0.0; unknowns.count()];
    let weights = vec![1.0; problem.places().len()];
    let solution = problem
        .solve(start, &weights)
        .map_err(NotCalibrated::Failed)?;
    then(&problem, &solution)
}

impl Meter {
    /// Returns the meter with this calibration in force.
    #[must_use]
    pub fn calibrated(&self, calibration: Calibration) -> Self {
        let mut meter = self.clone();
        meter.model = Model::of(&meter, Some(&calibration.fit));
        meter.calibration = Some(calibration);
        meter
    }

    /// Returns the meter as its components' tolerances describe it, without any calibration.
    #[must_use]
    pub fn uncalibrated(&self) -> Self {
        let mut meter = self.clone();
        meter.calibration = None;
        meter.model = Model::of(&meter, None);
        meter
    }
}
