//! ln and log1p.

/// The natural logarithm; minus infinity at 0, NaN below.
#[inline(always)]
pub fn ln(x: f64) -> f64 {
    libm::log(x)
}

/// ln(1 + x), without cancellation near 0.
#[inline(always)]
pub fn log1p(x: f64) -> f64 {
    libm::log1p(x)
}
