//! exp and expm1: branch-free, so that a loop over them vectorises.
//!
//! The argument is reduced by the nearest multiple k of ln 2 in two parts (Cody & Waite 1980), the Taylor
//! polynomial of degree 13 is summed by Estrin's scheme, and the result scaled by 2^k.

use super::pairs::difference;

/// Adding and taking away 1.5 * 2^52 rounds to the nearest whole number; the number stands in the low bits.
pub(super) const SHIFT: f64 = 6755399441055744.0;
/// ln 2 with its last 21 bits zero, and the rest (fdlibm).
pub(super) const LN2_HIGH: f64 = 6.93147180369123816490e-01;
pub(super) const LN2_LOW: f64 = 1.90821492927058770002e-10;
const ONE_OVER_LN2: f64 = std::f64::consts::LOG2_E;

/// x = k ln 2 + r + c, |r| at most 0.35, c what r lost to rounding. For |x| < 2000.
#[inline(always)]
fn reduce(x: f64) -> (f64, f64, f64) {
    let k = (x * ONE_OVER_LN2 + SHIFT) - SHIFT;
    let high = x - k * LN2_HIGH;
    let low = k * LN2_LOW;
    let r = high - low;
    (k, r, (high - r) - low)
}

/// e^r - 1 - r for |r| at most 0.35. The square stands apart: it is the one term whose rounding is felt.
#[inline(always)]
fn beyond_linear(r: f64) -> f64 {
    let r2 = r * r;
    let r4 = r2 * r2;
    let a = 1.0 / 6.0 + r * (1.0 / 24.0);
    let b = 1.0 / 120.0 + r * (1.0 / 720.0);
    let c = 1.0 / 5040.0 + r * (1.0 / 40320.0);
    let d = 1.0 / 362880.0 + r * (1.0 / 3628800.0);
    let e = 1.0 / 39916800.0 + r * (1.0 / 479001600.0);
    let f = e + r2 * (1.0 / 6227020800.0);
    let cubic = (a + r2 * b) + r4 * ((c + r2 * d) + r4 * f);
    0.5 * r2 + (r * r2) * cubic
}

/// 2^k for a whole number k of normal range.
#[inline(always)]
fn two_to(k: f64) -> f64 {
    f64::from_bits(((k + SHIFT).to_bits() << 52).wrapping_add(0x3ff0_0000_0000_0000))
}

/// e^x, within 1 ulp.
#[inline(always)]
pub fn exp(x: f64) -> f64 {
    let clamped = if x > 720.0 { 720.0 } else { x };
    let clamped = if clamped < -760.0 { -760.0 } else { clamped };
    let (k, r, c) = reduce(clamped);
    let y = scale(1.0 + (r + (beyond_linear(r) + c)), k);
    if x.is_nan() { x } else { y }
}

/// y 2^k, where 2^k itself may be out of range.
#[inline(always)]
fn scale(y: f64, k: f64) -> f64 {
    let half = (k * 0.5 + SHIFT) - SHIFT;
    (y * two_to(half)) * two_to(k - half)
}

/// e^(x + rest) for a rest that is small beside 1, or an x out of range.
#[inline(always)]
pub(super) fn exp_of_pair(x: f64, rest: f64) -> f64 {
    let clamped = if x > 720.0 { 720.0 } else { x };
    let clamped = if clamped < -760.0 { -760.0 } else { clamped };
    let (k, r, c) = reduce(clamped);
    let c = c + if clamped == x { rest } else { 0.0 };
    let beyond = beyond_linear(r);
    scale(1.0 + (r + (beyond + (c + c * (r + beyond)))), k)
}

/// e^x - 1, within 1 ulp also near 0.
#[inline(always)]
pub fn expm1(x: f64) -> f64 {
    let clamped = if x > 720.0 { 720.0 } else { x };
    let clamped = if clamped < -40.0 { -40.0 } else { clamped };
    // half of it first, since 2^1024 is out of range
    let (high, low) = half_expm1(clamped);
    let y = 2.0 * (high + low);
    let y = if x.abs() < 5e-17 { x } else { y };
    let y = if x > 709.79 { f64::INFINITY } else { y };
    if x.is_nan() { x } else { y }
}

/// (e^x - 1) / 2 as a sum of two, for x from -700 to 720, not tiny.
#[inline(always)]
pub(super) fn half_expm1(x: f64) -> (f64, f64) {
    let (k, r, c) = reduce(x);
    let scale = two_to(k - 1.0);
    let (start, start_lost) = difference(scale, 0.5);
    let high = start + scale * r;
    let lost = scale * r - (high - start) + start_lost;
    (high, lost + scale * (beyond_linear(r) + c))
}
