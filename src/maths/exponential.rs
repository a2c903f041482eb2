//! exp and expm1.

/// e^x.
#[inline(always)]
pub fn exp(x: f64) -> f64 {
    libm::exp(x)
}

/// e^x - 1, without cancellation near 0.
#[inline(always)]
pub fn expm1(x: f64) -> f64 {
    libm::expm1(x)
}
