//! The regularised incomplete gamma functions, their logarithms, and the quantile.
//!
//! Errors: of the logarithms, up to 1e-14 times the greater of 1 and the result; the same of the functions, as
//! an error relative to the result.

use super::exponential::exp;
use super::gamma::{HALF_LN_TWO_PI, ln_gamma_one_plus, stirling_error};
use super::logarithm::ln;
use super::normal::normal_quantile;
use super::root::root;
use super::tail::{Split, deviance, tail_integral};

/// P(a, x) for a > 0 and x >= 0; NaN elsewhere.
pub fn gamma_p(a: f64, x: f64) -> f64 {
    split(a, x).lower
}

/// Q(a, x) = 1 - P(a, x), without cancellation.
pub fn gamma_q(a: f64, x: f64) -> f64 {
    split(a, x).upper
}

/// ln P(a, x), however far in the tail.
pub fn ln_gamma_p(a: f64, x: f64) -> f64 {
    split(a, x).ln_lower
}

/// ln Q(a, x), however far in the tail.
pub fn ln_gamma_q(a: f64, x: f64) -> f64 {
    split(a, x).ln_upper
}

/// From here on a law of shape a is near enough to normal for the tail integral.
const LARGE: f64 = 1000.0;

/// From here on the law is a step at its shape, as far as doubles can tell.
pub(super) const STEP: f64 = 1e100;

pub(super) fn split(a: f64, x: f64) -> Split {
    if !(a > 0.0 && x >= 0.0 && (a < f64::INFINITY || x < f64::INFINITY)) {
        return Split::NAN;
    }
    if x == 0.0 || a == f64::INFINITY {
        return Split::ABOVE;
    }
    if x == f64::INFINITY {
        return Split::ABOVE.turned();
    }
    if a > STEP {
        return Split::step(a - x);
    }
    if a < 1.0 && x < 1.1 {
        return Split::from_power_series(
            a * ln(x) - ln_gamma_one_plus(a),
            a * alternating_series(a, x),
        );
    }
    let front = ln_front(a, x);
    let d = x - a;
    if a >= LARGE && d.abs() <= 0.3 * a {
        // the density of the tail is t^(a-1) e^-t; its slope at x is (a - 1) / x - 1
        let slope = (d + 1.0) / x;
        let density = front + ln(a / x);
        return if d < 0.0 {
            Split::from_ln_lower(density + ln(tail_integral(a - 1.0, -x, 0.0, 1.0, -slope)))
        } else {
            let upper = density + ln(tail_integral(a - 1.0, x, 0.0, 1.0, slope));
            Split::from_ln_lower(upper).turned()
        };
    }
    if x < a {
        Split::from_ln_lower(front + ln(series(a, x)))
    } else {
        Split::from_ln_lower(front + ln(a * fraction(a, x))).turned()
    }
}

/// ln(x^a e^-x / Gamma(a + 1)), by the saddle point (Loader 2000) where a is not small.
fn ln_front(a: f64, x: f64) -> f64 {
    if a < 1.0 {
        return a * ln(x) - x - ln_gamma_one_plus(a);
    }
    -deviance(a, x, a - x) - 0.5 * ln(a) - HALF_LN_TWO_PI - stirling_error(a)
}

/// The sum over n >= 1 of (-x)^n / (n! (a + n)) (DLMF 8.7.1), for x below 1.1.
fn alternating_series(a: f64, x: f64) -> f64 {
    let (mut power, mut total) = (1.0, 0.0);
    for n in 1..30 {
        let n = n as f64;
        power *= -x / n;
        let term = power / (a + n);
        total += term;
        if term.abs() <= 1e-17 * (total.abs()) {
            break;
        }
    }
    total
}

/// The sum over n >= 0 of x^n / ((a + 1) ... (a + n)) (DLMF 8.11.4), for x <= a.
fn series(a: f64, x: f64) -> f64 {
    let (mut term, mut total, mut below) = (1.0, 1.0, a);
    for _ in 0..2000 {
        below += 1.0;
        term *= x / below;
        total += term;
        if term <= 1e-17 * total {
            break;
        }
    }
    total
}

/// Gamma(a, x) / (x^a e^-x) for x >= a or x above 1: Legendre's continued fraction (DLMF 8.9.2, even part),
/// by the method of Lentz (1976) as modified by Thompson & Barnett (1986).
fn fraction(a: f64, x: f64) -> f64 {
    let mut b = x + 1.0 - a;
    let mut c = 1e300;
    let mut d = 1.0 / b;
    let mut value = d;
    for i in 1..2000 {
        let i = i as f64;
        let numerator = -i * (i - a);
        b += 2.0;
        d = 1.0 / (numerator * d + b);
        c = b + numerator / c;
        let change = c * d;
        value *= change;
        if (change - 1.0).abs() <= 2.3e-16 {
            break;
        }
    }
    value
}

/// x with P(a, x) = p; NaN unless a > 0 and p is in [0, 1].
///
/// Newton's method on the logarithm of the smaller tail, from the power at 0 or from Wilson & Hilferty (1931).
pub fn gamma_quantile(a: f64, p: f64) -> f64 {
    if !(a > 0.0 && a < f64::INFINITY && (0.0..=1.0).contains(&p)) {
        return f64::NAN;
    }
    if p == 0.0 {
        return 0.0;
    }
    if p == 1.0 {
        return f64::INFINITY;
    }
    // P(a, x) is below x^a / Gamma(a + 1), so that x is above this
    let least = (ln(p) + ln_gamma_one_plus(a)) / a;
    if least < -745.2 {
        return 0.0;
    }
    let cube = 1.0 - 1.0 / (9.0 * a) + normal_quantile(p) / (3.0 * a.sqrt());
    let middle = a * cube * cube * cube;
    let start = if cube > 0.3 && a > 0.3 {
        middle
    } else {
        exp(least)
    };
    let lower = p <= 0.5;
    let target = if lower { ln(p) } else { ln(1.0 - p) };
    root(0.0, f64::MAX, start, |x| {
        let tails = split(a, x);
        let density = exp(ln_front(a, x)) * a;
        if lower {
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

        /// Every pair of 64-bit patterns gives an answer, in the range of its function.
        #[test]
        fn any_bits_end(a: u64, x: u64) {
            let (a, x) = (f64::from_bits(a).abs(), f64::from_bits(x).abs());
            let good = a > 0.0 && a < f64::INFINITY && x >= 0.0;
            let p = gamma_p(a, x);
            prop_assert_eq!((0.0..=1.0).contains(&p), good, "P({}, {}) = {}", a, x, p);
            let unit = if x.is_finite() { x / f64::MAX } else { 0.5 };
            prop_assert_eq!(gamma_quantile(a, unit) >= 0.0, a > 0.0 && a < f64::INFINITY);
        }

        #[test]
        fn quantile_undoes_the_function(ln_a in -7.0..14.0_f64, p in 1e-9..1.0_f64, tiny in -600.0..0.0_f64) {
            let a = exp(ln_a);
            for p in [p, exp(tiny)] {
                let x = gamma_quantile(a, p);
                if x < 1e-300 {
                    continue;
                }
                // a last place of x moves P by the density times x times 2^-53
                let slope = exp(ln_front(a, x)) * a / p;
                let allowed = 4e-14 * (1.0 - ln(p)) + 4e-16 * slope;
                let back = gamma_p(a, x) / p;
                prop_assert!((back - 1.0).abs() <= allowed, "a {} p {} x {} back {}", a, p, x, back);
            }
        }
    }

    #[test]
    fn ends_of_the_range() {
        assert_eq!(gamma_quantile(2.0, 0.0), 0.0);
        assert_eq!(gamma_quantile(2.0, 1.0), f64::INFINITY);
        assert!(gamma_quantile(2.0, -0.1).is_nan());
        assert!(gamma_quantile(f64::NAN, 0.5).is_nan());
        assert_eq!(gamma_quantile(1e-300, 0.5), 0.0);
        assert_eq!(ln_gamma_q(2.0, f64::INFINITY), f64::NEG_INFINITY);
        assert_eq!(gamma_p(2.0, 0.0), 0.0);
        assert!(gamma_p(0.0, 1.0).is_nan());
    }
}
