//! sin, cos, tan and the inverse functions. Angles in radians.

#[inline(always)]
pub fn sin(x: f64) -> f64 {
    libm::sin(x)
}

#[inline(always)]
pub fn cos(x: f64) -> f64 {
    libm::cos(x)
}

#[inline(always)]
pub fn tan(x: f64) -> f64 {
    libm::tan(x)
}

#[inline(always)]
pub fn asin(x: f64) -> f64 {
    libm::asin(x)
}

#[inline(always)]
pub fn acos(x: f64) -> f64 {
    libm::acos(x)
}

#[inline(always)]
pub fn atan(x: f64) -> f64 {
    libm::atan(x)
}
