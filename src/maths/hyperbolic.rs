//! tanh, sinh, cosh.

#[inline(always)]
pub fn tanh(x: f64) -> f64 {
    libm::tanh(x)
}

#[inline(always)]
pub fn sinh(x: f64) -> f64 {
    libm::sinh(x)
}

#[inline(always)]
pub fn cosh(x: f64) -> f64 {
    libm::cosh(x)
}
