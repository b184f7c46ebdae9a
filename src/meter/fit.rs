//! Weighted nonlinear least squares with priors: the minimum, its covariance, or the reason why there is none.
//!
//! Minimises `Σ r_i(b)² + Σ ((b_j - m_j)/u_j)²`, the r being residuals divided by their standard uncertainties. A prior is
//! one more row: residual `(b_j - m_j)/u_j`, slope `1/u_j`. The minimum is found by the Levenberg-Marquardt method (Moré 1978),
//! the covariance is (JᵀJ)⁻¹ from a QR decomposition of J with its columns scaled to length 1 (parameters may span
//! decades). The method calls success what cannot be determined at all, so rank and stationarity are checked here.

use std::cell::Cell;
use std::fmt;

use super::factored::Factored;
use levenberg_marquardt::{LeastSquaresProblem, LevenbergMarquardt};
use nalgebra::{DMatrix, DVector, Dyn, U1, VecStorage};

/// Stands for a residual where the model overflows, so that the step is shortened instead of the fit given up.
const OVERFLOWN: f64 = 1e60;

/// Evaluations allowed for each parameter.
const PATIENCE: usize = 2000;

/// At a minimum, a further linear step would explain at most this part of the sum of squares.
const STATIONARY: f64 = 1e-6;

/// What is to be fitted.
pub struct Problem<R, S>
where
    R: Fn(&[f64]) -> Vec<f64>,
    S: Fn(&[f64]) -> Vec<Vec<f64>>,
{
    /// Where to start, one number a parameter.
    pub start: Vec<f64>,
    /// What was known of single parameters before.
    pub priors: Vec<Prior>,
    /// Residuals over their standard uncertainties, for parameters given; any that is not finite counts as very large.
    pub residuals: R,
    /// Derivatives of the residuals: a row a residual, a column a parameter.
    pub slopes: S,
}

/// What was known of a parameter before.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Prior {
    /// Which parameter.
    pub parameter: usize,
    /// Its mean.
    pub mean: f64,
    /// Its standard uncertainty, above 0.
    pub standard_uncertainty: f64,
}

/// A minimum.
#[derive(Clone, Debug, PartialEq)]
pub struct Solution {
    /// The parameters.
    pub estimate: Vec<f64>,
    /// (JᵀJ)⁻¹, priors included: the covariance if the standard uncertainties were known; without weights it is to be
    /// multiplied by the residual variance.
    pub covariance: Vec<Vec<f64>>,
    /// The residuals at the minimum, without the priors'.
    pub residuals: Vec<f64>,
    /// Their slopes.
    pub slopes: Vec<Vec<f64>>,
    /// The sum of squares that was minimised, priors included.
    pub sum_of_squares: f64,
}

/// Why there is no solution.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Failure {
    /// Fewer residuals and priors than parameters.
    TooFew {
        /// Residuals and priors together.
        n_rows: usize,
        /// Parameters.
        n_parameters: usize,
    },
    /// The search stopped without a minimum.
    NoEnd,
    /// The model overflows where the search ended.
    Overflow,
    /// The residuals do not fix these parameters.
    Undetermined {
        /// Their positions.
        parameters: Vec<usize>,
    },
    /// The search stopped where the sum of squares still falls.
    NotStationary,
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::TooFew {
                n_rows,
                n_parameters,
            } => write!(f, "{n_rows} numbers for {n_parameters} unknowns"),
            Self::NoEnd => f.write_str("the fit finds no minimum"),
            Self::Overflow => f.write_str("the fit runs away"),
            Self::Undetermined { .. } => {
                f.write_str("the numbers do not fix all that is to be fitted")
            }
            Self::NotStationary => f.write_str("the fit stopped before the minimum"),
        }
    }
}

/// Returns the minimum nearest to the start.
///
/// # Errors
/// What stands against one: see [`Failure`].
pub fn solve<R, S>(problem: &Problem<R, S>) -> Result<Solution, Failure>
where
    R: Fn(&[f64]) -> Vec<f64>,
    S: Fn(&[f64]) -> Vec<Vec<f64>>,
{
    let search = Search {
        problem,
        at: DVector::from_column_slice(&problem.start),
        has_overflown: Cell::new(false),
    };
    let n_parameters = problem.start.len();
    let first = search.rows();
    if first.len() < n_parameters {
        return Err(Failure::TooFew {
            n_rows: first.len(),
            n_parameters,
        });
    }
    let (mut search, report) = LevenbergMarquardt::new()
        .with_patience(PATIENCE)
        .minimize(search);
    if !report.termination.was_successful() {
        return Err(Failure::NoEnd);
    }
    search.has_overflown.set(false);
    let mut residuals = search.rows();
    let mut jacobian = search.matrix();
    if search.has_overflown.get() {
        return Err(Failure::Overflow);
    }
    let mut factored = Factored::of(&jacobian, problem.priors.len() >= n_parameters)?;
    // Levenberg-Marquardt leaves at a relative change; a Gauss-Newton step or two gain the last digits.
    let mut explained = factored.explained(&residuals);
    for _ in 0..3 {
        let sum = residuals.norm_squared();
        if explained <= 1e-20 * sum {
            break;
        }
        let before = search.at.clone();
        search.at -= factored.step(&residuals);
        let next = search.rows();
        if next.norm_squared() > sum * (1.0 + 1e-12) || search.has_overflown.get() {
            search.at = before;
            break;
        }
        residuals = next;
        jacobian = search.matrix();
        factored = Factored::of(&jacobian, true)?;
        explained = factored.explained(&residuals);
    }
    let sum_of_squares = residuals.norm_squared();
    // Standardised rows with priors are of order 1; an exact fit leaves nothing but rounding.
    let scale = if problem.priors.is_empty() { 0.0 } else { 1.0 };
    let last = factored.step(&residuals);
    let is_still = last
        .iter()
        .zip(search.at.iter())
        .all(|(step, at)| step.abs() <= 1e-8 * at.abs());
    if !is_still && explained > STATIONARY * sum_of_squares.max(scale) {
        return Err(Failure::NotStationary);
    }
    let n_residuals = residuals.len() - problem.priors.len();
    Ok(Solution {
        estimate: search.at.iter().copied().collect(),
        covariance: factored.covariance(),
        residuals: residuals.iter().take(n_residuals).copied().collect(),
        slopes: jacobian
            .row_iter()
            .take(n_residuals)
            .map(|row| row.iter().copied().collect())
            .collect(),
        sum_of_squares,
    })
}

/// Returns slopes by central differences, for a parameter at a time, with the step given for each.
pub fn central_differences<R>(residuals: R, steps: Vec<f64>) -> impl Fn(&[f64]) -> Vec<Vec<f64>>
where
    R: Fn(&[f64]) -> Vec<f64>,
{
    move |at| {
        let columns: Vec<Vec<f64>> = steps
            .iter()
            .enumerate()
            .map(|(j, step)| {
                let moved = |by: f64| {
                    let mut moved = at.to_vec();
                    moved[j] += by;
                    residuals(&moved)
                };
                let (above, below) = (moved(*step), moved(-step));
                above
                    .iter()
                    .zip(&below)
                    .map(|(x, y)| (x - y) / (2.0 * step))
                    .collect()
            })
            .collect();
        let n_rows = columns.first().map_or(0, Vec::len);
        (0..n_rows)
            .map(|i| columns.iter().map(|column| column[i]).collect())
            .collect()
    }
}

impl Solution {
    /// Returns gᵀVh of two gradients.
    pub fn shared_variance(&self, one: &[f64], other: &[f64]) -> f64 {
        one.iter()
            .zip(&self.covariance)
            .map(|(x, row)| x * row.iter().zip(other).map(|(v, y)| v * y).sum::<f64>())
            .sum()
    }

    /// Returns how much each residual's own number pulls its prediction, 0 to 1: the diagonal of `JVJᵀ`.
    pub fn leverages(&self) -> Vec<f64> {
        self.slopes
            .iter()
            .map(|row| self.shared_variance(row, row))
            .collect()
    }
}

/// Returns the weight that Huber's function gives to a residual over its scale: 1 up to 1.345, where it keeps 95 %
/// efficiency for normal errors, and falling beyond (Huber 1964).
pub fn huber_weight(standardised: f64) -> f64 {
    const BEND: f64 = 1.345;
    if standardised.abs() <= BEND {
        1.0
    } else {
        BEND / standardised.abs()
    }
}

/// The problem at a place of the search.
struct Search<'a, R, S>
where
    R: Fn(&[f64]) -> Vec<f64>,
    S: Fn(&[f64]) -> Vec<Vec<f64>>,
{
    problem: &'a Problem<R, S>,
    at: DVector<f64>,
    has_overflown: Cell<bool>,
}

impl<R, S> Search<'_, R, S>
where
    R: Fn(&[f64]) -> Vec<f64>,
    S: Fn(&[f64]) -> Vec<Vec<f64>>,
{
    fn rows(&self) -> DVector<f64> {
        let mut rows = (self.problem.residuals)(self.at.as_slice());
        for r in &mut rows {
            if r.is_nan() || OVERFLOWN <= r.abs() {
                *r = OVERFLOWN;
                self.has_overflown.set(true);
            }
        }
        let priors = self.problem.priors.iter();
        rows.extend(priors.map(|p| (self.at[p.parameter] - p.mean) / p.standard_uncertainty));
        DVector::from_vec(rows)
    }

    fn matrix(&self) -> DMatrix<f64> {
        let slopes = (self.problem.slopes)(self.at.as_slice());
        let n_residuals = slopes.len();
        let n_rows = n_residuals + self.problem.priors.len();
        let mut matrix = DMatrix::zeros(n_rows, self.at.len());
        for (i, row) in slopes.iter().enumerate() {
            for (j, slope) in row.iter().enumerate() {
                if slope.is_finite() {
                    matrix[(i, j)] = *slope;
                }
            }
        }
        for (i, prior) in self.problem.priors.iter().enumerate() {
            matrix[(n_residuals + i, prior.parameter)] = 1.0 / prior.standard_uncertainty;
        }
        matrix
    }
}

impl<R, S> LeastSquaresProblem<f64, Dyn, Dyn> for Search<'_, R, S>
where
    R: Fn(&[f64]) -> Vec<f64>,
    S: Fn(&[f64]) -> Vec<Vec<f64>>,
{
    type ResidualStorage = VecStorage<f64, Dyn, U1>;
    type JacobianStorage = VecStorage<f64, Dyn, Dyn>;
    type ParameterStorage = VecStorage<f64, Dyn, U1>;

    fn set_params(&mut self, x: &DVector<f64>) {
        self.at.copy_from(x);
    }

    fn params(&self) -> DVector<f64> {
        self.at.clone()
    }

    fn residuals(&self) -> Option<DVector<f64>> {
        Some(self.rows())
    }

    fn jacobian(&self) -> Option<DMatrix<f64>> {
        Some(self.matrix())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Rows a·b = y, each of standard uncertainty 1.
    fn linear(
        rows: &[(&[f64], f64)],
        priors: Vec<Prior>,
        n_parameters: usize,
    ) -> Result<Solution, Failure> {
        let residuals = |b: &[f64]| {
            rows.iter()
                .map(|(a, y)| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>() - y)
                .collect()
        };
        solve(&Problem {
            start: vec![0.0; n_parameters],
            priors,
            residuals,
            slopes: |_: &[f64]| rows.iter().map(|(a, _)| a.to_vec()).collect(),
        })
    }

    #[test]
    fn what_is_not_determined_is_refused_by_name() {
        let alike = [
            (&[1.0, 1.0, 0.0][..], 1.0),
            (&[2.0, 2.0, 0.0], 2.0),
            (&[0.0, 0.0, 1.0], 3.0),
        ];
        assert_eq!(
            linear(&alike, Vec::new(), 3),
            Err(Failure::Undetermined {
                parameters: vec![0, 1]
            })
        );
        let silent = [(&[1.0, 0.0][..], 1.0), (&[2.0, 0.0], 2.0)];
        assert_eq!(
            linear(&silent, Vec::new(), 2),
            Err(Failure::Undetermined {
                parameters: vec![1]
            })
        );
        assert_eq!(
            linear(&silent[..1], Vec::new(), 2),
            Err(Failure::TooFew {
                n_rows: 1,
                n_parameters: 2
            })
        );
    }

    #[test]
    fn a_prior_alone_gives_itself_back() {
        let prior = Prior {
            parameter: 0,
            mean: 3.0,
            standard_uncertainty: 1e-12,
        };
        let found = linear(&[], vec![prior], 1).expect("a solution");
        assert!((found.estimate[0] - 3.0).abs() < 1e-15);
        assert!((found.covariance[0][0] / 1e-24 - 1.0).abs() < 1e-12);
    }

    #[test]
    fn central_differences_are_slopes() {
        let slopes =
            central_differences(|b: &[f64]| vec![b[0] * b[0], b[0] * b[1]], vec![1e-5, 1e-5]);
        let found = slopes(&[3.0, 5.0]);
        for (row, expected) in found.iter().zip([[6.0, 0.0], [5.0, 3.0]]) {
            for (x, y) in row.iter().zip(expected) {
                assert!((x - y).abs() < 1e-9, "{found:?}");
            }
        }
    }

    /// Huber's location of eight masses, scale 1.4826·MAD fixed (data from NIST/SEMATECH e-Handbook 1.3.5.17, from memory;
    /// result recomputed).
    #[test]
    fn hubers_weights_hold_an_outlier_off() {
        let data = [
            199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57,
        ];
        let scale = 1.475_189_207_4;
        let mut at = 201.37;
        for _ in 0..100 {
            let weights = data.map(|x| huber_weight((x - at) / scale));
            let sum: f64 = weights.iter().zip(data).map(|(w, x)| w * x).sum();
            at = sum / weights.iter().sum::<f64>();
        }
        assert!((at - 201.126_304_212_0).abs() < 1e-9, "{at}");
        assert!((huber_weight((245.57 - at) / scale) - 0.044_643_67).abs() < 1e-7);
    }
}
