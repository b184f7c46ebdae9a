//! Numbers that lie farther apart than their uncertainties allow, and which of them to read again.

use super::Contradiction;
use super::problem::{Calibrating, Place};
use super::report::{FAR, name_of};
use crate::meter::fit::Solution;

/// How many rows are named where no few can be blamed.
const N_NAMED: usize = 3;

/// One-sided quantiles of the normal distribution at 99 and 99.99 % (ISO 3534-1; recomputed).
pub(super) const QUANTILE_99: f64 = 2.326_348;
pub(super) const QUANTILE_99_99: f64 = 3.719_016;

/// The quantile of the chi-square distribution that belongs to a quantile of the normal one (Wilson and Hilferty 1931);
/// within 1 % from one degree of freedom on.
pub(super) fn chi_square_quantile(n_free: usize, normal: f64) -> f64 {
    let n = n_free as f64;
    let step = 2.0 / (9.0 * n);
    n * (1.0 - step + normal * step.sqrt()).powi(3)
}

/// Leaves out rows until the rest agrees, each time the one without which the sum of squares is least, but never more than
/// a quarter of them. A gross mistake pulls the solution so far that residuals blame others, so every row is really left
/// out, and each fit starts from what was known before.
pub(super) fn contradiction(
    problem: &Calibrating<'_>,
    solution: &Solution,
    places: &[Place],
) -> Contradiction {
    let n_rows = problem.rows.rows.len();
    let numbers_of = |row: usize| (0..places.len()).filter(move |i| places[*i].row == row);
    let without = |left_out: &[usize]| -> f64 {
        let is_in = |place: &Place| !left_out.contains(&place.row);
        let weights: Vec<f64> = places
            .iter()
            .map(|place| f64::from(u8::from(is_in(place))))
            .collect();
        let start = vec![0.0; problem.unknowns.count()];
        problem
            .solve(start, &weights)
            .map_or(f64::INFINITY, |rest| rest.sum_of_squares)
    };
    let mut left_out: Vec<usize> = Vec::new();
    let mut first_round: Vec<(f64, usize)> = Vec::new();
    let rest_agrees = loop {
        if n_rows < 4 * (left_out.len() + 1) {
            break false;
        }
        let mut round: Vec<(f64, usize)> = (0..n_rows)
            .filter(|row| !left_out.contains(row))
            .map(|row| {
                let mut rows = left_out.clone();
                rows.push(row);
                (without(&rows), row)
            })
            .collect();
        round.sort_by(|x, y| x.0.total_cmp(&y.0));
        let (sum, row) = round[0];
        if left_out.is_empty() {
            first_round.clone_from(&round);
        }
        left_out.push(row);
        let n_left: usize = places.len()
            - left_out
                .iter()
                .map(|r| numbers_of(*r).count())
                .sum::<usize>();
        if sum <= chi_square_quantile(n_left, QUANTILE_99) {
            break true;
        }
    };
    let blamed = if rest_agrees {
        left_out
    } else if first_round.is_empty() {
        worst_rows(solution, places)
    } else {
        first_round
            .iter()
            .take(N_NAMED)
            .map(|(_, row)| *row)
            .collect()
    };
    let constants = problem.unknowns.constants.iter();
    let far_from_profile = constants
        .filter(|c| c.learnt(solution).is_some_and(|(_, by)| FAR < by.abs()))
        .map(|c| name_of(problem.meter, c).0)
        .collect();
    Contradiction {
        chi_square: solution.sum_of_squares,
        usually_below: chi_square_quantile(places.len(), QUANTILE_99),
        suspects: blamed.into_iter().flat_map(numbers_of).collect(),
        rest_agrees,
        far_from_profile,
    }
}

/// The rows with the largest standardised residuals, where there are too few to leave one out.
fn worst_rows(solution: &Solution, places: &[Place]) -> Vec<usize> {
    let leverages = solution.leverages();
    let size = |i: usize| solution.residuals[i].powi(2) / (1.0 - leverages[i]).max(1e-9);
    let mut order: Vec<usize> = (0..leverages.len()).collect();
    order.sort_by(|x, y| size(*y).total_cmp(&size(*x)));
    let mut rows: Vec<usize> = Vec::new();
    for row in order.into_iter().map(|i| places[i].row) {
        if !rows.contains(&row) && rows.len() < N_NAMED {
            rows.push(row);
        }
    }
    rows
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Upper 99 % points over their degrees of freedom, from the usual table.
    #[test]
    fn the_chi_square_quantile_is_good_to_one_percent() {
        for (n, expected) in [
            (1, 6.6349),
            (2, 4.6052),
            (3, 3.7816),
            (5, 3.0173),
            (10, 2.3209),
            (50, 1.5231),
        ] {
            let found = chi_square_quantile(n, QUANTILE_99) / n as f64;
            assert!((found / expected - 1.0).abs() < 0.01, "{n}: {found}");
        }
    }
}
