//! The regularised incomplete gamma functions, their logarithms, and the quantile.
//!
//! Errors: of the logarithms, a few 1e-15 times the greater of 1 and the result; of the functions the same, as
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

fn split(a: f64, x: f64) -> Split {
    if !(a > 0.0 && x >= 0.0 && (a < f64::INFINITY || x < f64::INFINITY)) {
        return Split::NAN;
    }
    if x == 0.0 || a == f64::INFINITY {
        return Split::ABOVE;
    }
    if x == f64::INFINITY {
        return Split::ABOVE.turned();
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
    if !(a > 0.0 && a < f64::INFINITY && p >= 0.0 && p <= 1.0) {
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
