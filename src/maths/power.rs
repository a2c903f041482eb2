//! x to the power y.

/// x^y, with the special cases of IEEE 754 `pow`.
#[inline(always)]
pub fn power(x: f64, y: f64) -> f64 {
    libm::pow(x, y)
}
