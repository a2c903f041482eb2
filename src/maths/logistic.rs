//! The logistic function and its antiderivative, each in one pass.

use super::exponential::exp;
use super::logarithm::assemble;

/// ln(1 + e^x), within 2 ulp: max(x, 0) + ln(1 + e^-|x|).
#[inline(always)]
pub fn softplus(x: f64) -> f64 {
    let e = exp(-x.abs());
    // e is in [0, 1], so 1 + e needs one halving at most: 2^k (1 + f)
    let over = e > std::f64::consts::SQRT_2 - 1.0;
    let k = if over { 1.0 } else { 0.0 };
    let f = if over { 0.5 * (e - 1.0) } else { e };
    let tail = assemble(k, f, 0.0);
    let y = if x > 0.0 { x + tail } else { tail };
    if x.is_nan() { x } else { y }
}

/// 1 / (1 + e^-x), within 2 ulp.
#[inline(always)]
pub fn logistic(x: f64) -> f64 {
    let e = exp(-x.abs());
    let above = if x < 0.0 { e } else { 1.0 };
    above / (1.0 + e)
}
