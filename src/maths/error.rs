//! The error function and its complement.

/// The error function, within 1 ulp.
#[inline(always)]
pub fn erf(x: f64) -> f64 {
    libm::erf(x)
}

/// 1 - erf(x) without cancellation, within 3 ulp.
#[inline(always)]
pub fn erfc(x: f64) -> f64 {
    libm::erfc(x)
}
