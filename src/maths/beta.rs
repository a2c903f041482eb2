//! ln of the beta function and of binomial coefficients.

use super::gamma::{
    HALF_LN_TWO_PI, digamma, ln_gamma_one_plus, ln_gamma_positive, stirling_series,
};
use super::logarithm::{ln, log1p};

/// ln B(a, b) for a, b > 0, NaN elsewhere. No cancellation when one or both are large: the large terms of
/// Stirling's series are taken together (DiDonato & Morris 1992, algorithm 708).
pub fn ln_beta(a: f64, b: f64) -> f64 {
    let (a, b) = if a > b { (b, a) } else { (a, b) };
    if !(a >= 0.0 && b >= 0.0) {
        return f64::NAN;
    }
    if a == 0.0 {
        return if b == f64::INFINITY {
            f64::NAN
        } else {
            f64::INFINITY
        };
    }
    if b == f64::INFINITY {
        return f64::NEG_INFINITY;
    }
    if b < 8.0 {
        return ln_gamma_positive(a) + ln_gamma_positive(b) - ln_gamma_positive(a + b);
    }
    if a < 8.0 {
        return ln_gamma_positive(a) + ln_gamma_ratio(a, b);
    }
    let h = a / b;
    let corrections = stirling_series(a) + stirling_series(b) - stirling_series(a + b);
    let share = ln(h / (1.0 + h));
    (a - 0.5) * share - b * log1p(h) - 0.5 * ln(b) + HALF_LN_TWO_PI + corrections
}

/// ln(Gamma(b) / Gamma(a + b)) for b >= 8.
fn ln_gamma_ratio(a: f64, b: f64) -> f64 {
    let corrections = stirling_series(b) - stirling_series(a + b);
    corrections - a * (ln(b) - 1.0) - (b + a - 0.5) * log1p(a / b)
}

/// ln(a B(a, b)), also good relative to itself for small a: it goes to 0 with a.
pub(super) fn ln_beta_times(a: f64, b: f64) -> f64 {
    if a > 0.1 {
        return ln(a) + ln_beta(a, b);
    }
    // ln Gamma(b) - ln Gamma(a + b), for small b by way of Gamma(b) = Gamma(b + 1) / b
    let ratio = if b >= 1.0 {
        -ln_gamma_rise(b, a)
    } else {
        log1p(a / b) - ln_gamma_rise(b + 1.0, a)
    };
    ln_gamma_one_plus(a) + ratio
}

/// ln Gamma(b + a) - ln Gamma(b) for b >= 1 and small a: the integral of digamma by the Gauss-Legendre rule of
/// four points.
fn ln_gamma_rise(b: f64, a: f64) -> f64 {
    const RULE: [(f64, f64); 4] = [
        (0.06943184420297371, 0.17392742256872692),
        (0.33000947820757187, 0.32607257743127307),
        (0.6699905217924281, 0.32607257743127307),
        (0.9305681557970263, 0.17392742256872692),
    ];
    let mut total = 0.0;
    for (node, weight) in RULE {
        total += weight * digamma(b + a * node);
    }
    a * total
}

/// ln of the binomial coefficient n over k, for 0 <= k <= n (whole or not); minus infinity elsewhere.
pub fn ln_choose(n: f64, k: f64) -> f64 {
    if !(k >= 0.0 && k <= n) {
        return if n.is_nan() || k.is_nan() {
            f64::NAN
        } else {
            f64::NEG_INFINITY
        };
    }
    if k == 0.0 || k == n {
        return 0.0;
    }
    -ln(n + 1.0) - ln_beta(k + 1.0, n - k + 1.0)
}
