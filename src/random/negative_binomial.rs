//! Negative binomial numbers: a Poisson law whose mean follows a gamma law.

use super::{Stream, gamma, poisson};

/// Failures before `shape` successes where a failure is `odds` times as likely as a success; the mean is
/// `shape * odds`. NaN unless `shape` is positive, `odds` 0 or positive, both finite.
pub fn negative_binomial(stream: &mut Stream, shape: f64, odds: f64) -> f64 {
    if !(0.0..f64::INFINITY).contains(&odds) {
        return f64::NAN;
    }
    let mean = gamma(stream, shape) * odds;
    poisson(stream, if mean > f64::MAX { f64::MAX } else { mean })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::maths;
    use crate::random::trial::{RARE, chi_square, golden, numbers};

    fn probability(r: f64, odds: f64) -> impl Fn(f64) -> f64 {
        move |k| {
            let ways = maths::ln_gamma(k + r) - maths::ln_gamma(r) - maths::ln_gamma(k + 1.0);
            maths::exp(ways - (r + k) * maths::log1p(odds) + k * maths::ln(odds))
        }
    }

    #[test]
    fn values_are_stable() {
        assert_eq!(
            golden(20_000, |s| negative_binomial(s, 0.4, 2.0)),
            "846efe7ade4ece79"
        );
        assert_eq!(
            golden(20_000, |s| negative_binomial(s, 30.0, 2.0)),
            "2a4b9f696441f5e3"
        );
    }

    #[test]
    fn follows_the_negative_binomial_law() {
        for (r, odds) in [(0.4, 2.0), (1.0, 0.25), (6.5, 3.0)] {
            let draws = numbers(1_000_000, 1, |s| negative_binomial(s, r, odds));
            let alarm = chi_square(&draws, probability(r, odds));
            assert!(alarm > RARE, "({r}, {odds}): {alarm:e}");
        }
    }

    #[test]
    fn a_mean_that_does_not_vary_is_caught() {
        let draws = numbers(1_000_000, 1, |s| poisson(s, 6.5 * 0.02));
        assert!(chi_square(&draws, probability(6.5, 0.02)) < RARE);
    }
}
