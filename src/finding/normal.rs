//! The normal distribution.

use std::f64::consts::{FRAC_1_SQRT_2, PI};

/// Beyond so many standard deviations the density underflows.
const FARTHEST: f64 = 38.0;

/// Φ(x), good to 1e-13 relative down to x = -37.5.
pub(super) fn cumulative(x: f64) -> f64 {
    if x < -FARTHEST {
        0.0
    } else if x > 9.0 {
        1.0
    } else {
        0.5 * libm::erfc(-x * FRAC_1_SQRT_2)
    }
}

/// Φ(high) - Φ(low), taken on the side where both are small.
pub(super) fn between(low: f64, high: f64) -> f64 {
    /// So much farther out (both below zero) the smaller of the two is below 1e-20 of the larger.
    const NEGLIGIBLE: f64 = 10.0;
    let (near, far) = if low > 0.0 {
        (-low, -high)
    } else {
        (high, low)
    };
    if far < near.min(0.0) - NEGLIGIBLE {
        cumulative(near)
    } else {
        cumulative(near) - cumulative(far)
    }
}

/// The density of a normal distribution with this mean and standard deviation.
pub(super) fn density(x: f64, mean: f64, deviation: f64) -> f64 {
    let z = (x - mean) / deviation;
    if z.abs() > FARTHEST {
        0.0
    } else {
        (-0.5 * z * z).exp() / (deviation * (2.0 * PI).sqrt())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// JCGM 106:2012, table 1 (z values from memory, recomputed).
    #[test]
    fn the_usual_quantiles() {
        for (z, p) in [
            (0.8416, 0.80),
            (1.2816, 0.90),
            (1.6449, 0.95),
            (2.3263, 0.99),
            (3.0902, 0.999),
        ] {
            assert!((cumulative(z) - p).abs() < 1e-5, "Φ({z})");
        }
    }

    #[test]
    fn differences_keep_their_digits_far_out() {
        let (low, high) = (10.0, 11.0);
        let expected = cumulative(-10.0) - cumulative(-11.0);
        assert!((between(low, high) / expected - 1.0).abs() < 1e-12);
        assert!(between(low, high) > 0.0);
    }
}
