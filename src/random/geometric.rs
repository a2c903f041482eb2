//! Geometric numbers by inversion.

use super::{Stream, exponential};
use crate::maths;

/// Failures before the first success; NaN unless `probability` lies in (0, 1].
pub fn geometric(stream: &mut Stream, probability: f64) -> f64 {
    if !(probability > 0.0 && probability <= 1.0) {
        return f64::NAN;
    }
    let x = maths::floor(exponential(stream) / -maths::log1p(-probability));
    if x > f64::MAX { f64::MAX } else { x }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{RARE, chi_square, golden, numbers};

    fn probability(p: f64) -> impl Fn(f64) -> f64 {
        move |k| p * maths::exp(k * maths::log1p(-p))
    }

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(20_000, |s| geometric(s, 0.2)), "b97576b615871715");
        assert_eq!(golden(20_000, |s| geometric(s, 1.0)), "b9ce164d30e4101b");
    }

    #[test]
    fn follows_the_geometric_law() {
        for p in [0.9, 0.2, 0.01] {
            let draws = numbers(1_000_000, 1, |s| geometric(s, p));
            let alarm = chi_square(&draws, probability(p));
            assert!(alarm > RARE, "{p}: {alarm:e}");
        }
    }

    #[test]
    fn counting_the_success_too_is_caught() {
        let draws = numbers(1_000_000, 1, |s| geometric(s, 0.2) + 1.0);
        assert!(chi_square(&draws, probability(0.2)) < RARE);
    }
}
