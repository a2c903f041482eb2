//! Binomial numbers: inversion where few successes are expected, BTRS elsewhere.

use super::Stream;
use super::deviance::ln_binomial;
use crate::maths;

/// From this many expected successes (or failures, if those are rarer) on, transformed rejection.
const LARGE: f64 = 10.0;

/// The number of successes in `trials` (a whole number) trials; NaN unless `trials` is finite, 0 or more,
/// and `probability` lies in [0, 1].
pub fn binomial(stream: &mut Stream, trials: f64, probability: f64) -> f64 {
    let in_order = (0.0..f64::INFINITY).contains(&trials) && (0.0..=1.0).contains(&probability);
    if !in_order {
        f64::NAN
    } else if probability > 0.5 {
        trials - rarer(stream, trials, 1.0 - probability)
    } else {
        rarer(stream, trials, probability)
    }
}

fn rarer(stream: &mut Stream, trials: f64, probability: f64) -> f64 {
    if trials * probability < LARGE {
        inversion(stream, trials, probability)
    } else {
        transformed_rejection(stream, trials, probability)
    }
}

fn inversion(stream: &mut Stream, trials: f64, probability: f64) -> f64 {
    let first = maths::exp(trials * maths::log1p(-probability));
    let odds = probability / (1.0 - probability);
    loop {
        let mut left = stream.open();
        let mut chance = first;
        // As for the Poisson law: more than 150 successes never happen.
        for k in 0..150 {
            if left < chance {
                return f64::from(k);
            }
            left -= chance;
            chance *= odds * (trials - f64::from(k)) / f64::from(k + 1);
        }
    }
}

/// BTRS (Hörmann 1993, "The generation of binomial random variates").
fn transformed_rejection(stream: &mut Stream, trials: f64, probability: f64) -> f64 {
    let spread = maths::sqrt(trials * probability * (1.0 - probability));
    let b = 1.15 + 2.53 * spread;
    let a = -0.0873 + 0.0248 * b + 0.01 * probability;
    let centre = trials * probability + 0.5;
    let quick = 0.92 - 4.2 / b;
    let alpha = (2.83 + 5.1 / b) * spread;
    let mode = maths::floor((trials + 1.0) * probability);
    let top = ln_binomial(mode, trials, probability);
    loop {
        let u = stream.open() - 0.5;
        let v = stream.open();
        let distance = 0.5 - u.abs();
        let k = maths::floor((2.0 * a / distance + b) * u + centre);
        if k < 0.0 || k > trials {
            continue;
        }
        if distance >= 0.07 && v <= quick {
            return k;
        }
        let height = maths::ln(v * alpha / (a / (distance * distance) + b));
        if height <= ln_binomial(k, trials, probability) - top {
            return k;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{RARE, chi_square, golden, numbers};

    fn probability(n: f64, p: f64) -> impl Fn(f64) -> f64 {
        move |k| {
            if k > n {
                return 0.0;
            }
            maths::exp(maths::ln_choose(n, k) + k * maths::ln(p) + (n - k) * maths::log1p(-p))
        }
    }

    #[test]
    fn values_are_stable() {
        assert_eq!(
            golden(20_000, |s| binomial(s, 12.0, 0.3)),
            "30c7713adba2c6aa"
        );
        assert_eq!(
            golden(20_000, |s| binomial(s, 12.0, 0.7)),
            "ff5a92b15d5157b8"
        );
        assert_eq!(
            golden(20_000, |s| binomial(s, 500.0, 0.3)),
            "5c8bcdd46b94c41d"
        );
        assert_eq!(
            golden(20_000, |s| binomial(s, 500.0, 0.98)),
            "e0309407a9e26848"
        );
        assert_eq!(
            golden(20_000, |s| binomial(s, 1e12, 0.5)),
            "7e8e77dce28b2ed3"
        );
    }

    #[test]
    fn follows_the_binomial_law() {
        for (n, p) in [
            (1.0, 0.5),
            (12.0, 0.3),
            (12.0, 0.8),
            (1e6, 3e-6),
            (20.0, 0.5),
            (80.0, 0.9),
            (5000.0, 0.3),
        ] {
            let draws = numbers(1_000_000, 1, |s| binomial(s, n, p));
            let alarm = chi_square(&draws, probability(n, p));
            assert!(alarm > RARE, "({n}, {p}): {alarm:e}");
        }
    }

    #[test]
    fn a_flipped_outcome_and_an_unrefused_hat_are_caught() {
        let flipped = numbers(1_000_000, 1, |s| 20.0 - binomial(s, 20.0, 0.5005));
        assert!(chi_square(&flipped, probability(20.0, 0.5005)) < RARE);
        let spread = maths::sqrt(80.0 * 0.25);
        let b = 1.15 + 2.53 * spread;
        let a = -0.0873 + 0.0248 * b + 0.01 * 0.5;
        let hat = numbers(1_000_000, 1, |s| {
            let u = s.open() - 0.5;
            maths::floor((2.0 * a / (0.5 - u.abs()) + b) * u + 40.5)
        });
        assert!(chi_square(&hat, probability(80.0, 0.5)) < RARE);
    }

    #[test]
    fn ends_and_outside() {
        assert_eq!(numbers(1, 1, |s| binomial(s, 0.0, 0.4)), [0.0]);
        assert_eq!(numbers(1, 1, |s| binomial(s, 9.0, 0.0)), [0.0]);
        assert_eq!(numbers(1, 1, |s| binomial(s, 9.0, 1.0)), [9.0]);
        for (n, p) in [
            (-1.0, 0.5),
            (5.0, 1.5),
            (f64::INFINITY, 0.5),
            (5.0, f64::NAN),
        ] {
            assert!(numbers(1, 1, |s| binomial(s, n, p))[0].is_nan());
        }
    }
}
