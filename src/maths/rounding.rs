//! Functions that are exact: rounding to whole numbers, sign, square root, the lesser and the greater of two.

/// |x|.
#[inline(always)]
pub fn absolute(x: f64) -> f64 {
    x.abs()
}

/// -1, 0 or 1; NaN for NaN.
#[inline(always)]
pub fn sign(x: f64) -> f64 {
    let s = if x > 0.0 { 1.0 } else { x };
    if x < 0.0 { -1.0 } else { s }
}

/// The square root, correctly rounded (IEEE 754).
#[inline(always)]
pub fn sqrt(x: f64) -> f64 {
    x.sqrt()
}

/// The greatest whole number not above x.
#[inline(always)]
pub fn floor(x: f64) -> f64 {
    x.floor()
}

/// The least whole number not below x.
#[inline(always)]
pub fn ceil(x: f64) -> f64 {
    x.ceil()
}

/// The nearest whole number, halves away from zero.
#[inline(always)]
pub fn round(x: f64) -> f64 {
    let size = x.abs();
    let whole = size.floor();
    let up = if size - whole >= 0.5 {
        whole + 1.0
    } else {
        whole
    };
    up.copysign(x)
}

/// The lesser of two; NaN when either is NaN. Of 0 and -0 the second is given.
#[inline(always)]
pub fn minimum(a: f64, b: f64) -> f64 {
    let m = if a < b { a } else { b };
    if a.is_nan() { a } else { m }
}

/// The greater of two; NaN when either is NaN. Of 0 and -0 the second is given.
#[inline(always)]
pub fn maximum(a: f64, b: f64) -> f64 {
    let m = if a > b { a } else { b };
    if a.is_nan() { a } else { m }
}
