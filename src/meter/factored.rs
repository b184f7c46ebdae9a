//! A matrix of slopes, its columns scaled to length 1 and factored: steps, covariance, and what it does not determine.

use nalgebra::{DMatrix, DVector};

use super::fit::Failure;

/// Scaled columns whose least singular value is less than this part of the largest are dependent.
const DEPENDENT: f64 = 1e-10;

/// J·D⁻¹ = QR, D being the lengths of the columns of J.
pub(super) struct Factored {
    lengths: Vec<f64>,
    q: DMatrix<f64>,
    inverse_r: DMatrix<f64>,
}

impl Factored {
    pub(super) fn of(jacobian: &DMatrix<f64>, is_full_rank: bool) -> Result<Self, Failure> {
        let lengths: Vec<f64> = jacobian.column_iter().map(|c| c.norm()).collect();
        let silent: Vec<usize> = (0..lengths.len())
            .filter(|j| !(lengths[*j] > 0.0 && lengths[*j].is_finite()))
            .collect();
        if !silent.is_empty() {
            return Err(Failure::Undetermined { parameters: silent });
        }
        let mut scaled = jacobian.clone();
        for (mut column, length) in scaled.column_iter_mut().zip(&lengths) {
            column /= *length;
        }
        if !is_full_rank {
            check_rank(&scaled)?;
        }
        let (q, r) = scaled.qr().unpack();
        let n = lengths.len();
        let everything = || Failure::Undetermined {
            parameters: (0..n).collect(),
        };
        let inverse_r = r
            .solve_upper_triangular(&DMatrix::identity(n, n))
            .ok_or_else(everything)?;
        Ok(Self {
            lengths,
            q,
            inverse_r,
        })
    }

    /// The part of the sum of squares that a linear step would explain.
    pub(super) fn explained(&self, residuals: &DVector<f64>) -> f64 {
        self.q.tr_mul(residuals).norm_squared()
    }

    /// The Gauss-Newton step, to be subtracted.
    pub(super) fn step(&self, residuals: &DVector<f64>) -> DVector<f64> {
        let mut step = &self.inverse_r * self.q.tr_mul(residuals);
        for (s, length) in step.iter_mut().zip(&self.lengths) {
            *s /= length;
        }
        step
    }

    pub(super) fn covariance(&self) -> Vec<Vec<f64>> {
        let scaled = &self.inverse_r * self.inverse_r.transpose();
        let n = self.lengths.len();
        let at = |i: usize, j: usize| scaled[(i, j)] / (self.lengths[i] * self.lengths[j]);
        (0..n)
            .map(|i| (0..n).map(|j| at(i.min(j), i.max(j))).collect())
            .collect()
    }
}

/// Columns of length 1 that depend on each other, by their singular values.
fn check_rank(scaled: &DMatrix<f64>) -> Result<(), Failure> {
    let decomposed = scaled.clone().svd(false, true);
    let largest = decomposed.singular_values.max();
    let (least_at, least) = decomposed.singular_values.argmin();
    if least >= DEPENDENT * largest {
        return Ok(());
    }
    let parameters = decomposed.v_t.map_or(Vec::new(), |v| {
        let row = v.row(least_at);
        let bound = 0.1 * row.amax();
        (0..row.len()).filter(|j| row[*j].abs() > bound).collect()
    });
    Err(Failure::Undetermined { parameters })
}
