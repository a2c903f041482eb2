//! Beta numbers from two gamma numbers.

use super::Stream;
use super::gamma::{gamma, ln_gamma};
use crate::maths;

/// The largest double below 1.
const BELOW_ONE: f64 = 1.0 - f64::EPSILON / 2.0;

/// A beta number; NaN unless both parameters are positive and finite. Where the nearest double would be 0 or
/// 1, it is moved to the next one inside (0, 1).
pub fn beta(stream: &mut Stream, alpha: f64, beta: f64) -> f64 {
    let x = if alpha >= 1.0 && beta >= 1.0 {
        let x = gamma(stream, alpha);
        let y = gamma(stream, beta);
        x / (x + y)
    } else {
        // By logarithms: small shapes underflow.
        let x = ln_gamma(stream, alpha);
        let y = ln_gamma(stream, beta);
        maths::logistic(x - y)
    };
    if x < f64::from_bits(1) {
        f64::from_bits(1)
    } else if x > BELOW_ONE {
        BELOW_ONE
    } else {
        x
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{LIMIT, distance, golden, numbers};

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(20_000, |s| beta(s, 2.0, 3.5)), "36f36d94af7eb3e9");
        assert_eq!(golden(20_000, |s| beta(s, 0.5, 0.1)), "8dcbfce2c6eab8a0");
        assert_eq!(golden(20_000, |s| beta(s, 2.0, 0.5)), "3dc0678e7e73c8e7");
        assert_eq!(golden(20_000, |s| beta(s, 1e-4, 1e-4)), "496dc6ffe2755da3");
    }

    #[test]
    fn follows_the_beta_law() {
        for (a, b) in [
            (1.0, 1.0),
            (2.0, 3.5),
            (0.5, 0.5),
            (0.5, 4.0),
            (200.0, 700.0),
        ] {
            let draws = numbers(1_000_000, 1, |s| beta(s, a, b));
            let d = distance(&draws, |x| maths::beta_i(a, b, x));
            assert!(d < LIMIT, "({a}, {b}): {d}");
        }
    }

    #[test]
    fn swapped_parameters_are_caught() {
        let draws = numbers(1_000_000, 1, |s| beta(s, 2.0, 2.02));
        assert!(distance(&draws, |x| maths::beta_i(2.02, 2.0, x)) > LIMIT);
    }

    #[test]
    fn stays_inside() {
        for (a, b) in [(1e-4, 1e-4), (1e-3, 5.0), (5.0, 1e-3)] {
            let draws = numbers(10_000, 1, |s| beta(s, a, b));
            assert!(draws.iter().all(|&x| 0.0 < x && x < 1.0));
        }
        assert!(numbers(1, 1, |s| beta(s, -1.0, 2.0))[0].is_nan());
    }
}
