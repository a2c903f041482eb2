//! Searches for quantiles that have no formula.

use super::law::Law;
use crate::maths;

/// The smallest x in [lower, upper] (of integer laws: the smallest whole number) where a condition that stays
/// true once it holds is true; `upper` if it never holds.
pub(super) fn smallest(
    lower: f64,
    upper: f64,
    integer: bool,
    reached: impl Fn(f64) -> bool,
) -> f64 {
    if integer {
        return smallest_integer(lower, lower, upper, 1.0, reached);
    }
    // Halving the distance in the order of the doubles takes 64 steps whatever the scale.
    let (mut low, mut high) = (rank(lower), rank(upper));
    while low < high {
        let middle = low + (high - low) / 2;
        if reached(unrank(middle as u64)) {
            high = middle;
        } else {
            low = middle + 1;
        }
    }
    unrank(low as u64)
}

/// The place of a number in the order of all doubles.
fn rank(x: f64) -> u128 {
    let bits = (x + 0.0).to_bits();
    let sign = 1 << 63;
    u128::from(if bits & sign == 0 { bits | sign } else { !bits })
}

fn unrank(rank: u64) -> f64 {
    let sign = 1 << 63;
    f64::from_bits(if rank & sign == 0 {
        !rank
    } else {
        rank & !sign
    })
}

/// The smallest whole number in [lower, upper] where the condition holds, looked for from a guess in growing
/// steps and then by halving; `upper` if it never holds.
fn smallest_integer(
    guess: f64,
    lower: f64,
    upper: f64,
    step: f64,
    reached: impl Fn(f64) -> bool,
) -> f64 {
    let (lower, upper) = (maths::ceil(lower), maths::floor(upper));
    let step = maths::maximum(1.0, maths::floor(step));
    let start = maths::minimum(maths::maximum(maths::floor(guess), lower), upper);
    // Kept: nothing at or below `low` holds (unless it lies under the support), `high` holds.
    let (mut low, mut high) = (start, start);
    let mut stride = step;
    if reached(start) {
        while reached(low) {
            high = low;
            if low <= lower {
                return lower;
            }
            low = maths::maximum(low - stride, lower);
            stride *= 2.0;
        }
    } else {
        while !reached(high) {
            low = high;
            if high >= upper {
                return upper;
            }
            high = maths::minimum(high + stride, upper);
            stride *= 2.0;
        }
    }
    loop {
        let middle = low + maths::floor((high - low) * 0.5);
        if middle <= low || middle >= high {
            return high;
        }
        if reached(middle) {
            high = middle;
        } else {
            low = middle;
        }
    }
}

/// The quantile of an integer law by its distribution function, from its mean and standard deviation.
pub(super) fn quantile(law: &dyn Law, q: f64, p: &[f64], mean: f64, sd: f64) -> f64 {
    let (lower, upper) = law.support().ends(p);
    let at = law.at(p);
    smallest_integer(mean, lower, upper, sd, |k| {
        at.distribution(k).is_some_and(|reached| reached >= q)
    })
}

/// The quantile of an integer law by its survival function.
pub(super) fn upper_quantile(law: &dyn Law, s: f64, p: &[f64], mean: f64, sd: f64) -> f64 {
    let (lower, upper) = law.support().ends(p);
    let at = law.at(p);
    smallest_integer(mean, lower, upper, sd, |k| {
        at.survival(k).is_some_and(|left| left <= s)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_order_of_doubles_is_kept_both_ways() {
        let numbers = [
            f64::NEG_INFINITY,
            -3.5,
            -1e-310,
            0.0,
            1e-310,
            2.0,
            1e300,
            f64::INFINITY,
        ];
        for pair in numbers.windows(2) {
            assert!(rank(pair[0]) < rank(pair[1]));
        }
        for x in numbers {
            assert_eq!(unrank(rank(x) as u64), x);
        }
    }

    #[test]
    fn finds_the_first_double_and_the_first_integer() {
        let first = 0.1 + 0.2;
        let infinite = (f64::NEG_INFINITY, f64::INFINITY);
        assert_eq!(
            smallest(infinite.0, infinite.1, false, |x| x >= first),
            first
        );
        assert_eq!(smallest(0.0, 1.0, false, |_| false), 1.0);
        for guess in [0.0, 5.0, 41.0, 42.0, 43.0, 1000.0] {
            for step in [1.0, 3.0, 100.0] {
                let found = smallest_integer(guess, 0.0, f64::INFINITY, step, |k| k >= 42.0);
                assert_eq!(found, 42.0);
                assert_eq!(smallest_integer(guess, 0.0, 50.0, step, |k| k >= 0.0), 0.0);
                assert_eq!(smallest_integer(guess, 0.0, 50.0, step, |_| false), 50.0);
            }
        }
        assert_eq!(
            smallest_integer(0.0, 0.0, f64::INFINITY, 1.0, |_| false),
            f64::INFINITY
        );
    }
}
