//! tanh, branch-free; sinh and cosh.

use super::exponential::half_expm1;
use super::pairs::exact_product;

/// The hyperbolic tangent, within 1 ulp.
///
/// -t / (2 + t) with t = e^(-2|x|) - 1 carried in two parts, and the quotient corrected by its exact
/// remainder (Dekker 1971).
#[inline(always)]
pub fn tanh(x: f64) -> f64 {
    let size = x.abs();
    let size = if size > 20.0 { 20.0 } else { size };
    let (a, b) = half_expm1(-2.0 * size);
    let high = a + b;
    let low = (a - high) + b;
    let below = 1.0 + high;
    let below_low = ((1.0 - below) + high) + low;
    let q = -high / below;
    let (product, product_low) = exact_product(q, below);
    let remainder = ((-high - product) - product_low) - low - q * below_low;
    // 1 / (1 + t/2) is 1 + q
    let y = q + remainder * (1.0 + q);
    let y = if size < 1e-9 { size } else { y };
    let y = y.copysign(x);
    if x.is_nan() { x } else { y }
}

/// The hyperbolic sine.
#[inline(always)]
pub fn sinh(x: f64) -> f64 {
    libm::sinh(x)
}

/// The hyperbolic cosine.
#[inline(always)]
pub fn cosh(x: f64) -> f64 {
    libm::cosh(x)
}
