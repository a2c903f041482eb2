//! ln of the gamma function, its derivative, ln of the beta function.

use super::{ln, trigonometric::tan};

/// ln |Gamma(x)|; infinite at 0 and the negative whole numbers.
#[inline(always)]
pub fn ln_gamma(x: f64) -> f64 {
    libm::lgamma(x)
}

/// The derivative of ln Gamma; NaN at 0 and the negative whole numbers.
///
/// Recurrence up to 10, then the asymptotic series (DLMF 5.11.2); reflection below 0 (DLMF 5.5.4).
pub fn digamma(x: f64) -> f64 {
    if x <= 0.0 {
        if x == x.floor() {
            return f64::NAN;
        }
        let part = x - x.floor();
        return digamma(1.0 - x) - std::f64::consts::PI / tan(std::f64::consts::PI * part);
    }
    let mut shift = 0.0;
    let mut y = x;
    while y < 10.0 {
        shift += 1.0 / y;
        y += 1.0;
    }
    let z = 1.0 / (y * y);
    let series = z
        * (1.0 / 12.0
            - z * (1.0 / 120.0
                - z * (1.0 / 252.0
                    - z * (1.0 / 240.0
                        - z * (1.0 / 132.0 - z * (691.0 / 32760.0 - z * (1.0 / 12.0)))))));
    ln(y) - 0.5 / y - series - shift
}

/// ln B(a, b).
pub fn ln_beta(a: f64, b: f64) -> f64 {
    ln_gamma(a) + ln_gamma(b) - ln_gamma(a + b)
}

/// ln of the binomial coefficient n over k.
pub fn ln_choose(n: f64, k: f64) -> f64 {
    -ln(n + 1.0) - ln_beta(k + 1.0, n - k + 1.0)
}
