//! The regularised incomplete beta function, its complement, their logarithms, and the quantile.

use super::{exp, expm1, ln, ln_beta, log1p};

/// I_x(a, b) for a, b > 0 and x in [0, 1]; NaN elsewhere.
pub fn beta_i(a: f64, b: f64, x: f64) -> f64 {
    exp(ln_beta_i(a, b, x))
}

/// 1 - I_x(a, b).
pub fn beta_ic(a: f64, b: f64, x: f64) -> f64 {
    exp(ln_beta_ic(a, b, x))
}

/// ln I_x(a, b).
pub fn ln_beta_i(a: f64, b: f64, x: f64) -> f64 {
    logs(a, b, x).0
}

/// ln (1 - I_x(a, b)).
pub fn ln_beta_ic(a: f64, b: f64, x: f64) -> f64 {
    logs(a, b, x).1
}

fn complement(l: f64) -> f64 {
    if l > -0.7 {
        ln(-expm1(l))
    } else {
        log1p(-exp(l))
    }
}

fn logs(a: f64, b: f64, x: f64) -> (f64, f64) {
    if !(a > 0.0 && b > 0.0 && (0.0..=1.0).contains(&x)) {
        return (f64::NAN, f64::NAN);
    }
    if x == 0.0 {
        return (f64::NEG_INFINITY, 0.0);
    }
    if x == 1.0 {
        return (0.0, f64::NEG_INFINITY);
    }
    let front = a * ln(x) + b * log1p(-x) - ln_beta(a, b);
    let below = x < (a + 1.0) / (a + b + 2.0);
    let l = if below {
        front + ln(fraction(a, b, x) / a)
    } else {
        front + ln(fraction(b, a, 1.0 - x) / b)
    };
    let l = if l < 0.0 { l } else { 0.0 };
    if below {
        (l, complement(l))
    } else {
        (complement(l), l)
    }
}

fn fraction(a: f64, b: f64, x: f64) -> f64 {
    const TINY: f64 = 1e-300;
    let guard = |v: f64| if v.abs() < TINY { TINY } else { v };
    let mut c = 1.0;
    let mut d = 1.0 / guard(1.0 - (a + b) * x / (a + 1.0));
    let mut h = d;
    for m in 1..10000 {
        let m = m as f64;
        let even = m * (b - m) * x / ((a + 2.0 * m - 1.0) * (a + 2.0 * m));
        d = 1.0 / guard(1.0 + even * d);
        c = guard(1.0 + even / c);
        h *= d * c;
        let odd = -(a + m) * (a + b + m) * x / ((a + 2.0 * m) * (a + 2.0 * m + 1.0));
        d = 1.0 / guard(1.0 + odd * d);
        c = guard(1.0 + odd / c);
        let step = d * c;
        h *= step;
        if (step - 1.0).abs() < 1e-16 {
            break;
        }
    }
    h
}

/// x with I_x(a, b) = p.
pub fn beta_quantile(a: f64, b: f64, p: f64) -> f64 {
    if !(a > 0.0 && b > 0.0 && (0.0..=1.0).contains(&p)) {
        return f64::NAN;
    }
    bisect(0.0, 1.0, |x| beta_i(a, b, x) < p)
}

/// The least double in [low, high] (both at least 0) at which `below` is false, for a monotone `below`.
pub(super) fn bisect(low: f64, high: f64, below: impl Fn(f64) -> bool) -> f64 {
    let (mut low, mut high) = (low.to_bits(), high.to_bits());
    while low < high {
        let middle = low + (high - low) / 2;
        if below(f64::from_bits(middle)) {
            low = middle + 1;
        } else {
            high = middle;
        }
    }
    f64::from_bits(low)
}
