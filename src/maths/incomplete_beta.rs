//! The regularised incomplete beta function, its complement, their logarithms, and the quantile.
//!
//! Errors: of the logarithms, up to 2e-14 times the greater of 1 and the result; the same of the functions, as
//! an error relative to the result.

use super::beta::{ln_beta, ln_beta_times};
use super::exponential::exp;
use super::gamma::{HALF_LN_TWO_PI, stirling_error};
use super::incomplete_gamma::{self, STEP};
use super::logarithm::{ln, log1p};
use super::pairs::{difference, exact_product};
use super::root::root;
use super::tail::{Split, deviance, tail_integral};

/// I_x(a, b) for a, b > 0 and x in [0, 1]; NaN elsewhere.
pub fn beta_i(a: f64, b: f64, x: f64) -> f64 {
    split(a, b, x).lower
}

/// 1 - I_x(a, b), without cancellation.
pub fn beta_ic(a: f64, b: f64, x: f64) -> f64 {
    split(a, b, x).upper
}

/// ln I_x(a, b), however far in the tail.
pub fn ln_beta_i(a: f64, b: f64, x: f64) -> f64 {
    split(a, b, x).ln_lower
}

/// ln (1 - I_x(a, b)), however far in the tail.
pub fn ln_beta_ic(a: f64, b: f64, x: f64) -> f64 {
    split(a, b, x).ln_upper
}

/// From here on a law of both shapes this large is near enough to normal for the tail integral.
const LARGE: f64 = 1000.0;

fn split(a: f64, b: f64, x: f64) -> Split {
    let finite = a < f64::INFINITY && b < f64::INFINITY;
    if !(a > 0.0 && b > 0.0 && finite && (0.0..=1.0).contains(&x)) {
        return Split::NAN;
    }
    if x == 0.0 {
        return Split::ABOVE;
    }
    if x == 1.0 {
        return Split::ABOVE.turned();
    }
    let (y, y_rest) = difference(1.0, x);
    let (lesser, greater) = if a < b { (a, b) } else { (b, a) };
    if greater > STEP && lesser > 1e40 {
        return Split::step((a / greater) * y - (b / greater) * x);
    }
    // with one shape out of all proportion the law is a gamma law, counted from the nearer end
    if b > STEP {
        return incomplete_gamma::split(a, -b * log1p(-x));
    }
    if a > STEP {
        return incomplete_gamma::split(b, -a * ln(x)).turned();
    }
    if x <= 0.7 && (b <= 1.0 || b * x <= 0.7) {
        return power_series(a, b, x, ln(x));
    }
    if y <= 0.7 && (a <= 1.0 || a * y <= 0.7) {
        return power_series(b, a, y, log1p(-x)).turned();
    }
    let excess = distance(a, b, x, y, y_rest);
    let front = ln_front(a, b, x, y, excess);
    if a >= LARGE && b >= LARGE {
        let slope = distance(a - 1.0, b - 1.0, x, y, y_rest) / (x * y);
        let density = front - ln(x) - log1p(-x);
        return if excess > 0.0 {
            Split::from_ln_lower(density + ln(tail_integral(a - 1.0, -x, b - 1.0, -y, slope)))
        } else {
            let upper = density + ln(tail_integral(a - 1.0, x, b - 1.0, y, -slope));
            Split::from_ln_lower(upper).turned()
        };
    }
    if excess > 0.0 {
        Split::from_ln_lower(front - ln(fraction(a, b, x, excess)))
    } else {
        Split::from_ln_lower(front - ln(fraction(b, a, y, -excess))).turned()
    }
}

/// a (1 - x) - b x with 1 - x = y + y_rest: how far the mean a / (a + b) lies above x, times a + b.
fn distance(a: f64, b: f64, x: f64, y: f64, y_rest: f64) -> f64 {
    let (first, first_rest) = exact_product(a, y);
    let (second, second_rest) = exact_product(b, x);
    if !(first_rest.is_finite() && second_rest.is_finite()) {
        return first - second;
    }
    (first - second) + ((first_rest - second_rest) + a * y_rest)
}

/// ln(x^a y^b / B(a, b)), by the saddle point (Loader 2000) where a and b are not small; `excess` is
/// a y - b x.
fn ln_front(a: f64, b: f64, x: f64, y: f64, excess: f64) -> f64 {
    if a < 1.0 || b < 1.0 {
        return a * ln(x) + b * log1p(-x) - ln_beta(a, b);
    }
    let n = a + b;
    let corrections = stirling_error(a) + stirling_error(b) - stirling_error(n);
    let apart = deviance(a, n * x, excess) + deviance(b, n * y, -excess);
    0.5 * ln(a * (b / n)) - HALF_LN_TWO_PI - corrections - apart
}

/// x^a / (a B(a, b)) times 1 + a times the sum over n >= 1 of (1 - b) ... (n - b) x^n / (n! (a + n))
/// (DLMF 8.17.7 and 15.2.1), for small b or b x.
fn power_series(a: f64, b: f64, x: f64, ln_x: f64) -> Split {
    let (mut power, mut total) = (1.0, 0.0);
    for n in 1..200 {
        let n = n as f64;
        power *= (n - b) / n * x;
        let term = power / (a + n);
        total += term;
        if term.abs() <= 1e-17 * (total.abs() + 1.0 / a) && n > b * x {
            break;
        }
    }
    Split::from_power_series(a * ln_x - ln_beta_times(a, b), a * total)
}

/// x^a y^b / B(a, b) divided by I_x(a, b), for x below the mean: the even part of the continued fraction
/// DLMF 8.17.22 in the form of DiDonato & Morris (1992), which holds a y - b x (`excess`) as such; by the
/// method of Lentz (1976) as modified by Thompson & Barnett (1986).
fn fraction(a: f64, b: f64, x: f64, excess: f64) -> f64 {
    const TINY: f64 = 1e-300;
    let apart = |v: f64| if v == 0.0 { TINY } else { v };
    let mut value = apart(a * (excess + 1.0) / (a + 1.0));
    let (mut c, mut d) = (value, 0.0);
    for m in 1..5000 {
        let m = m as f64;
        let below = a + 2.0 * m - 1.0;
        let across = m * (b - m) * x / below;
        let numerator = (a + m - 1.0) / below * (a + b + m - 1.0) * x * across;
        let denominator =
            m + across + (a + m) * (excess + 1.0 + m * (2.0 - x)) / (a + 2.0 * m + 1.0);
        d = 1.0 / apart(denominator + numerator * d);
        c = apart(denominator + numerator / c);
        let change = c * d;
        value *= change;
        if (change - 1.0).abs() <= 2.3e-16 {
            break;
        }
    }
    value
}

/// x with I_x(a, b) = p; NaN unless a, b > 0 and p is in [0, 1].
///
/// Newton's method on the logarithm of the smaller tail, from whichever end of [0, 1] is nearer.
pub fn beta_quantile(a: f64, b: f64, p: f64) -> f64 {
    let finite = a < f64::INFINITY && b < f64::INFINITY;
    if !(a > 0.0 && b > 0.0 && finite && (0.0..=1.0).contains(&p)) {
        return f64::NAN;
    }
    if p == 0.0 || p == 1.0 {
        return p;
    }
    let half = split(a, b, 0.5);
    let (lower, upper) = (p, 1.0 - p);
    let before_half = if p <= 0.5 {
        half.lower >= lower
    } else {
        half.upper <= upper
    };
    if before_half {
        quantile_from_zero(a, b, lower, upper)
    } else {
        1.0 - quantile_from_zero(b, a, upper, lower)
    }
}

/// x in [0, 1/2] with I_x(a, b) = lower = 1 - upper.
fn quantile_from_zero(a: f64, b: f64, lower: f64, upper: f64) -> f64 {
    let first = (ln(lower) + ln_beta_times(a, b)) / a;
    if first < -745.2 {
        return 0.0;
    }
    let mean = a / (a + b);
    let start = exp(first);
    let start = if start < mean { start } else { mean };
    let start = if start < 0.5 { start } else { 0.4999 };
    let small = lower <= upper;
    let target = if small { ln(lower) } else { ln(upper) };
    root(0.0, 0.5, start, |x| {
        let tails = split(a, b, x);
        let (y, y_rest) = difference(1.0, x);
        let front = ln_front(a, b, x, y, distance(a, b, x, y, y_rest));
        let density = exp(front) / y;
        if small {
            (tails.ln_lower - target, density / tails.lower)
        } else {
            (target - tails.ln_upper, density / tails.upper)
        }
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #![proptest_config(ProptestConfig { failure_persistence: None, rng_seed: proptest::test_runner::RngSeed::Fixed(7), ..ProptestConfig::default() })]

        /// Every triple of 64-bit patterns gives an answer, in the range of its function.
        #[test]
        fn any_bits_end(a: u64, b: u64, x: u64) {
            let (a, b) = (f64::from_bits(a).abs(), f64::from_bits(b).abs());
            let good = a > 0.0 && b > 0.0 && a < f64::INFINITY && b < f64::INFINITY;
            let any = f64::from_bits(x);
            let unit = (x >> 11) as f64 / 9007199254740992.0;
            for x in [any, unit, 1.0 - unit * 1e-9] {
                let i = beta_i(a, b, x);
                let good = good && (0.0..=1.0).contains(&x);
                prop_assert_eq!((0.0..=1.0).contains(&i), good, "I({}, {}, {}) = {}", a, b, x, i);
                let q = beta_quantile(a, b, x);
                prop_assert_eq!((0.0..=1.0).contains(&q), good, "quantile({}, {}, {}) = {}", a, b, x, q);
            }
        }

        #[test]
        fn quantile_undoes_the_function(ln_a in -5.0..10.0_f64, ln_b in -5.0..10.0_f64, p in 1e-9..1.0_f64) {
            let (a, b) = (exp(ln_a), exp(ln_b));
            let x = beta_quantile(a, b, p);
            if x < 1e-300 || x == 1.0 {
                return Ok(());
            }
            let (y, rest) = difference(1.0, x);
            // a last place of x moves I by the density times x times 2^-53
            let slope = exp(ln_front(a, b, x, y, distance(a, b, x, y, rest))) / y / p;
            let allowed = 4e-14 * (1.0 - ln(p)) + 4e-16 * slope;
            let back = beta_i(a, b, x) / p;
            prop_assert!((back - 1.0).abs() <= allowed, "a {} b {} p {} x {} back {}", a, b, p, x, back);
        }
    }

    #[test]
    fn ends_of_the_range() {
        assert_eq!(beta_quantile(2.0, 3.0, 0.0), 0.0);
        assert_eq!(beta_quantile(2.0, 3.0, 1.0), 1.0);
        assert!(beta_quantile(2.0, 3.0, 1.1).is_nan());
        assert!(beta_i(0.0, 3.0, 0.5).is_nan());
        assert_eq!(ln_beta_i(2.0, 3.0, 0.0), f64::NEG_INFINITY);
        assert_eq!(beta_ic(2.0, 3.0, 1.0), 0.0);
        assert!((beta_i(7.5, 7.5, 0.5) - 0.5).abs() < 5e-16);
    }
}
