//! ln and log1p: branch-free, so that a loop over them vectorises.
//!
//! x = 2^k (1 + f) with 1 + f between sqrt(1/2) and sqrt(2); with s = f / (2 + f), ln(1 + f) is
//! 2 s + s (a polynomial in s^2), summed as in fdlibm (Ng 1993, e_log.c; its minimax coefficients).

use super::exponential::{LN2_HIGH, LN2_LOW};

const ROOT_HALF: u64 = 0x3fe6_a09e_667f_3bcd;
const ONE: u64 = 0x3ff0_0000_0000_0000;

/// k and 1 + f of a positive number.
#[inline(always)]
pub(super) fn split(x: f64) -> (f64, f64) {
    let small = x < f64::MIN_POSITIVE;
    let x = if small { x * 18014398509481984.0 } else { x };
    let bias = if small { 1023.0 + 54.0 } else { 1023.0 };
    let bits = x.to_bits().wrapping_add(ONE - ROOT_HALF);
    // a whole number below 2^52 in the low bits of 2^52
    let k = f64::from_bits(0x4330_0000_0000_0000 | (bits >> 52)) - 4503599627370496.0 - bias;
    let m = f64::from_bits((bits & 0x000f_ffff_ffff_ffff).wrapping_add(ROOT_HALF));
    (k, m)
}

/// k ln 2 + ln(1 + f) + c.
#[inline(always)]
pub(super) fn assemble(k: f64, f: f64, c: f64) -> f64 {
    let s = f / (2.0 + f);
    let z = s * s;
    let w = z * z;
    let even = w
        * (3.999999999940941908e-01
            + w * (2.222219843214978396e-01 + w * 1.531383769920937332e-01));
    let odd = z
        * (6.666666666666735130e-01
            + w * (2.857142874366239149e-01
                + w * (1.818357216161805012e-01 + w * 1.479819860511658591e-01)));
    let half = 0.5 * f * f;
    k * LN2_HIGH - ((half - (s * (half + (even + odd)) + (k * LN2_LOW + c))) - f)
}

/// The natural logarithm, within 1 ulp; minus infinity at 0, NaN below.
#[inline(always)]
pub fn ln(x: f64) -> f64 {
    let (k, m) = split(x);
    let y = assemble(k, m - 1.0, 0.0);
    let y = if x == 0.0 { f64::NEG_INFINITY } else { y };
    let y = if x < 0.0 { f64::NAN } else { y };
    if x < f64::INFINITY { y } else { x }
}

/// ln(1 + x), within 1 ulp also near 0.
#[inline(always)]
pub fn log1p(x: f64) -> f64 {
    let u = 1.0 + x;
    let (k, m) = split(u);
    // what u lost to rounding
    let lost = if k >= 2.0 {
        1.0 - (u - x)
    } else {
        x - (u - 1.0)
    };
    let c = lost / u;
    let c = if k > 53.0 || k == 0.0 { 0.0 } else { c };
    let f = if k == 0.0 { x } else { m - 1.0 };
    let y = assemble(k, f, c);
    let y = if x == 0.0 { x } else { y };
    let y = if x == -1.0 { f64::NEG_INFINITY } else { y };
    let y = if x < -1.0 { f64::NAN } else { y };
    if x < f64::INFINITY { y } else { x }
}
