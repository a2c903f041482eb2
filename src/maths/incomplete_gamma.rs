//! The regularised incomplete gamma functions, their logarithms, and the quantile.

use super::{exp, expm1, ln, ln_gamma, log1p};

/// P(a, x) for a > 0, x >= 0; NaN elsewhere.
pub fn gamma_p(a: f64, x: f64) -> f64 {
    exp(ln_gamma_p(a, x))
}

/// Q(a, x) = 1 - P(a, x).
pub fn gamma_q(a: f64, x: f64) -> f64 {
    exp(ln_gamma_q(a, x))
}

/// ln P(a, x).
pub fn ln_gamma_p(a: f64, x: f64) -> f64 {
    logs(a, x).0
}

/// ln Q(a, x).
pub fn ln_gamma_q(a: f64, x: f64) -> f64 {
    logs(a, x).1
}

fn complement(l: f64) -> f64 {
    if l > -0.7 {
        ln(-expm1(l))
    } else {
        log1p(-exp(l))
    }
}

fn logs(a: f64, x: f64) -> (f64, f64) {
    if !(a > 0.0 && x >= 0.0) {
        return (f64::NAN, f64::NAN);
    }
    if x == 0.0 {
        return (f64::NEG_INFINITY, 0.0);
    }
    if x == f64::INFINITY {
        return (0.0, f64::NEG_INFINITY);
    }
    let front = a * ln(x) - x - ln_gamma(a);
    if x < a + 1.0 {
        let (mut term, mut total, mut n) = (1.0 / a, 1.0 / a, a);
        for _ in 0..10000 {
            n += 1.0;
            term *= x / n;
            total += term;
            if term < total * 1e-17 {
                break;
            }
        }
        let l = front + ln(total);
        let l = if l < 0.0 { l } else { 0.0 };
        (l, complement(l))
    } else {
        let mut b = x + 1.0 - a;
        let mut c = 1e300;
        let mut d = 1.0 / b;
        let mut h = d;
        for i in 1..10000 {
            let i = i as f64;
            let an = -i * (i - a);
            b += 2.0;
            d = 1.0 / (an * d + b);
            c = b + an / c;
            let step = c * d;
            h *= step;
            if (step - 1.0).abs() < 1e-16 {
                break;
            }
        }
        let l = front + ln(h);
        let l = if l < 0.0 { l } else { 0.0 };
        (complement(l), l)
    }
}

/// x with P(a, x) = p.
pub fn gamma_quantile(a: f64, p: f64) -> f64 {
    if !(a > 0.0 && (0.0..=1.0).contains(&p)) {
        return f64::NAN;
    }
    super::incomplete_beta::bisect(0.0, f64::INFINITY, |x| gamma_p(a, x) < p)
}
