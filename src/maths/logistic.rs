//! The logistic function and its antiderivative.

use super::{exp, log1p};

/// ln(1 + e^x).
#[inline(always)]
pub fn softplus(x: f64) -> f64 {
    let tail = log1p(exp(-x.abs()));
    if x > 0.0 {
        x + tail
    } else {
        tail + if x == x { 0.0 } else { x }
    }
}

/// 1 / (1 + e^-x).
#[inline(always)]
pub fn logistic(x: f64) -> f64 {
    let e = exp(-x.abs());
    (if x < 0.0 { e } else { 1.0 }) / (1.0 + e)
}
