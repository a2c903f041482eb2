//! x to the power y: branch-free for positive x.

use super::exponential::{LN2_HIGH, LN2_LOW, exp_of_pair};
use super::logarithm::split;
use super::pairs::{exact_product, polynomial};

/// x^y within 1 ulp, with the special cases of IEEE 754 `pow`.
#[inline(always)]
pub fn power(x: f64, y: f64) -> f64 {
    if plain(x, y) {
        power_plain(x, y)
    } else {
        libm::pow(x, y)
    }
}

/// Whether the branch-free form holds.
#[inline(always)]
pub(super) fn plain(x: f64, y: f64) -> bool {
    (x > 0.0) & (x < f64::INFINITY) & (y.abs() < 1e15)
}

/// e^(y ln x) with the logarithm and the product in two parts, for [`plain`] arguments.
#[inline(always)]
pub(super) fn power_plain(x: f64, y: f64) -> f64 {
    let (log, log_rest) = ln_pair(x);
    let (product, product_rest) = exact_product(y, log);
    exp_of_pair(product, product_rest + y * log_rest)
}

/// ln x as a sum of two, relative error about 2^-65: 2^k (1 + f), s = f / (2 + f), and
/// ln(1 + f) = 2 (s + s z (1/3 + z/5 + ...)) with z = s^2, the first three factors in two parts.
#[inline(always)]
fn ln_pair(x: f64) -> (f64, f64) {
    /// 1/5, 1/7 ...: enough for z up to 0.03.
    const FROM_FIFTH: [f64; 12] = [
        1.0 / 5.0,
        1.0 / 7.0,
        1.0 / 9.0,
        1.0 / 11.0,
        1.0 / 13.0,
        1.0 / 15.0,
        1.0 / 17.0,
        1.0 / 19.0,
        1.0 / 21.0,
        1.0 / 23.0,
        1.0 / 25.0,
        1.0 / 27.0,
    ];
    const THIRD: f64 = 1.0 / 3.0;
    const THIRD_REST: f64 = 1.850371707708594e-17;
    let (k, m) = split(x);
    let f = m - 1.0;
    let below = 2.0 + f;
    let below_rest = f - (below - 2.0);
    let s = f / below;
    let (back, back_rest) = exact_product(s, below);
    let s_rest = (((f - back) - back_rest) - s * below_rest) / below;
    let (z, z_rest) = exact_product(s, s);
    let z_rest = z_rest + 2.0 * s * s_rest;
    let (third, third_rest) = exact_product(z, THIRD);
    let third_rest = third_rest + z * THIRD_REST + z_rest * THIRD;
    let further = third_rest + (z * z) * polynomial(z, &FROM_FIFTH);
    let w = third + further;
    let w_rest = further - (w - third);
    let (cubic, cubic_rest) = exact_product(s, w);
    let cubic_rest = cubic_rest + s * w_rest + s_rest * w;
    let half = s + cubic;
    let half_rest = (s - half) + cubic + (s_rest + cubic_rest);
    let whole = k * LN2_HIGH;
    let sum = whole + 2.0 * half;
    let sum_rest = (2.0 * half - (sum - whole)) + (2.0 * half_rest + k * LN2_LOW);
    let high = sum + sum_rest;
    (high, sum_rest - (high - sum))
}
