//! Poisson numbers: inversion for small means, PTRS for the others.

use super::Stream;
use super::deviance::ln_poisson;
use crate::maths;

/// From this mean on, transformed rejection.
const LARGE: f64 = 10.0;

/// A whole number; NaN unless `mean` is 0 or positive and finite.
pub fn poisson(stream: &mut Stream, mean: f64) -> f64 {
    if !(0.0..f64::INFINITY).contains(&mean) {
        f64::NAN
    } else if mean < LARGE {
        inversion(stream, mean)
    } else {
        transformed_rejection(stream, mean)
    }
}

fn inversion(stream: &mut Stream, mean: f64) -> f64 {
    let first = maths::exp(-mean);
    loop {
        let mut left = stream.open();
        let mut probability = first;
        // No number above 150 has a probability that a double near 1 could tell from 0.
        for k in 0..150 {
            if left < probability {
                return f64::from(k);
            }
            left -= probability;
            probability *= mean / f64::from(k + 1);
        }
    }
}

/// PTRS (Hörmann 1993, "The transformed rejection method for generating Poisson random variables").
fn transformed_rejection(stream: &mut Stream, mean: f64) -> f64 {
    let b = 0.931 + 2.53 * maths::sqrt(mean);
    let a = -0.059 + 0.02483 * b;
    let inverse_alpha = 1.1239 + 1.1328 / (b - 3.4);
    let quick = 0.9277 - 3.6224 / (b - 2.0);
    loop {
        let u = stream.open() - 0.5;
        let v = stream.open();
        let distance = 0.5 - u.abs();
        let k = maths::floor((2.0 * a / distance + b) * u + mean + 0.43);
        if distance >= 0.07 && v <= quick {
            return k;
        }
        if k < 0.0 || (distance < 0.013 && v > distance) {
            continue;
        }
        let height = maths::ln(v * inverse_alpha / (a / (distance * distance) + b));
        if height <= ln_poisson(k, mean) {
            return k;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{LIMIT, RARE, chi_square, distance, golden, numbers};

    fn probability(mean: f64) -> impl Fn(f64) -> f64 {
        move |k| maths::exp(k * maths::ln(mean) - mean - maths::ln_gamma(k + 1.0))
    }

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(20_000, |s| poisson(s, 0.0)), "b9ce164d30e4101b");
        assert_eq!(golden(20_000, |s| poisson(s, 3.7)), "8a52f82740792716");
        assert_eq!(golden(20_000, |s| poisson(s, 10.0)), "55bf4666bb75f559");
        assert_eq!(golden(20_000, |s| poisson(s, 1234.5)), "fb7888d4c828e5d0");
        assert_eq!(golden(20_000, |s| poisson(s, 1e12)), "5b370f627e62ba38");
    }

    #[test]
    fn follows_the_poisson_law() {
        for mean in [0.01, 1.0, 9.99, 10.0, 33.3, 1000.0] {
            let draws = numbers(1_000_000, 1, |s| poisson(s, mean));
            let alarm = chi_square(&draws, probability(mean));
            assert!(alarm > RARE, "mean {mean}: {alarm:e}");
        }
    }

    #[test]
    fn large_means_are_normal() {
        let mean = 1e14;
        let draws = numbers(1_000_000, 1, |s| poisson(s, mean));
        // Within 1e-8 of the normal law: far below what a million draws show.
        let d = distance(&draws, |k| maths::normal_cdf((k + 0.5 - mean) / 1e7));
        assert!(d < LIMIT, "{d}");
    }

    #[test]
    fn a_wrong_centre_and_a_quick_way_too_wide_are_caught() {
        let shifted = numbers(1_000_000, 1, |s| poisson(s, 9.99 * 1.005));
        assert!(chi_square(&shifted, probability(9.99)) < RARE);
        // Accepting whatever the hat proposes.
        let mean = 33.3;
        let b = 0.931 + 2.53 * maths::sqrt(mean);
        let a = -0.059 + 0.02483 * b;
        let hat = numbers(1_000_000, 1, |s| {
            loop {
                let u = s.open() - 0.5;
                let k = maths::floor((2.0 * a / (0.5 - u.abs()) + b) * u + mean + 0.43);
                if k >= 0.0 {
                    return k;
                }
            }
        });
        assert!(chi_square(&hat, probability(mean)) < RARE);
    }

    #[test]
    fn outside_the_domain() {
        for mean in [-1.0, f64::NAN, f64::INFINITY] {
            assert!(numbers(1, 1, |s| poisson(s, mean))[0].is_nan());
        }
    }
}
