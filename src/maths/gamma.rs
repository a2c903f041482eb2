//! ln of the gamma function (branch-free for positive arguments) and its derivative.

use super::logarithm::{ln, log1p};
use super::pairs::{ODD, polynomial};
use super::{round, tan};

/// ln(2 pi) / 2.
pub(super) const HALF_LN_TWO_PI: f64 = 0.918938533204672741780329736406;

/// ln |Gamma(x)|; infinite at 0 and the negative whole numbers. Within 5 ulp for x > 0; for x < 0 the error
/// is small beside 1, and beside the result where that is large.
#[inline(always)]
pub fn ln_gamma(x: f64) -> f64 {
    if x >= 0.0 {
        ln_gamma_positive(x)
    } else {
        libm::lgamma(x)
    }
}

/// ln Gamma(x) for x >= 0.
///
/// From 8 on Stirling's series (DLMF 5.11.1). Below, the recurrence Gamma(x + 1) = x Gamma(x) leads to
/// 2 + d with |d| at most 0.5, where ln Gamma(2 + d) / d is a polynomial (Chebyshev interpolation at 18
/// points), so that the zeros at 1 and 2 are met exactly.
#[inline(always)]
pub(super) fn ln_gamma_positive(x: f64) -> f64 {
    let large = x >= 8.0;
    // the factors between 2 + d and x, and how many; of no use, and of no harm, for large x
    let (mut product, mut steps) = (1.0, 0.0);
    for j in 1..7 {
        let lower = x - j as f64;
        let counts = lower >= 1.5;
        product *= if counts { lower } else { 1.0 };
        steps += if counts { 1.0 } else { 0.0 };
    }
    let under = x < 1.5;
    let small = x < 0.5;
    let steps = if under { -1.0 } else { steps };
    let steps = if small { -2.0 } else { steps };
    let product = if under { x } else { product };
    let product = if small { x * (x + 1.0) } else { product };
    let d = x - (steps + 2.0);
    let log = ln(if large { x } else { product });
    let near = d * polynomial(d, &NEAR_TWO) + if under { -log } else { log };
    let far = (x - 0.5) * (log - 1.0) + (HALF_LN_TWO_PI - 0.5) + stirling_series(x);
    if large { far } else { near }
}

/// ln Gamma(x) - ((x - 1/2) ln x - x + ln(2 pi) / 2) for x >= 8 (DLMF 5.11.1).
#[inline(always)]
pub(super) fn stirling_series(x: f64) -> f64 {
    let y = 1.0 / x;
    y * polynomial(
        y * y,
        &[
            1.0 / 12.0,
            -1.0 / 360.0,
            1.0 / 1260.0,
            -1.0 / 1680.0,
            1.0 / 1188.0,
            -691.0 / 360360.0,
            1.0 / 156.0,
            -3617.0 / 122400.0,
        ],
    )
}

/// ln Gamma(x) - ((x - 1/2) ln x - x + ln(2 pi) / 2) for any x > 0.
///
/// From 2 to 8 by the recurrence of DLMF 5.5.1: the value at x less that at x + 1 is atanh(s) / s - 1 with
/// s = 1 / (2 x + 1), a series of positive terms.
pub(super) fn stirling_error(x: f64) -> f64 {
    if x < 2.0 {
        return ln_gamma_positive(x) - ((x - 0.5) * ln(x) - x + HALF_LN_TWO_PI);
    }
    let (mut y, mut rest) = (x, 0.0);
    while y < 8.0 {
        let s = 1.0 / (2.0 * y + 1.0);
        rest += s * s * polynomial(s * s, &ODD);
        y += 1.0;
    }
    stirling_series(y) + rest
}

/// ln Gamma(1 + a) for a >= 0, without cancellation near 0.
pub(super) fn ln_gamma_one_plus(a: f64) -> f64 {
    if a >= 0.5 {
        return ln_gamma_positive(1.0 + a);
    }
    a * polynomial(a, &NEAR_TWO) - log1p(a)
}

/// The derivative of ln Gamma; NaN at 0 and the negative whole numbers. Within 6 ulp for x > 0; for x < 0
/// the error is small beside the greater of 1 and the result.
///
/// From 10 on the asymptotic series (DLMF 5.11.2). Below, the recurrence (DLMF 5.5.2) leads to [1, 2], where
/// the quotient by the distance from the zero is a polynomial; below 0 reflection (DLMF 5.5.4).
pub fn digamma(x: f64) -> f64 {
    if x <= 0.0 {
        if x == x.floor() {
            return f64::NAN;
        }
        let part = x - round(x);
        return digamma(1.0 - x) - std::f64::consts::PI / tan(std::f64::consts::PI * part);
    }
    if x >= 10.0 {
        let y = 1.0 / x;
        let z = y * y;
        let series = polynomial(
            z,
            &[
                1.0 / 12.0,
                -1.0 / 120.0,
                1.0 / 252.0,
                -1.0 / 240.0,
                1.0 / 132.0,
                -691.0 / 32760.0,
                1.0 / 12.0,
            ],
        );
        return ln(x) - (0.5 * y + z * series);
    }
    let (mut y, mut rest) = (x, 0.0);
    while y > 2.0 {
        y -= 1.0;
        rest += 1.0 / y;
    }
    if y < 1.0 {
        rest -= 1.0 / y;
        y += 1.0;
    }
    const ZERO: f64 = 1.4616321449683622;
    const ZERO_REST: f64 = 9.549995429965697e-17;
    ((y - ZERO) - ZERO_REST) * polynomial(2.0 * y - 3.0, &DIGAMMA) + rest
}

const NEAR_TWO: [f64; 18] = [
    0.42278433509846713,
    0.3224670334241132,
    -0.06735230105319563,
    0.02058080842778338,
    -0.007385551028935545,
    0.002890510330865901,
    -0.0011927539009983087,
    0.0005096695196526673,
    -0.00022315497746292723,
    9.945761692157133e-05,
    -4.4923727564247656e-05,
    2.050601970174762e-05,
    -9.45628851510172e-06,
    4.3828545383846665e-06,
    -1.9743106888421067e-06,
    9.242852225162277e-07,
    -5.811277768921246e-07,
    2.7475390051909663e-07,
];

const DIGAMMA: [f64; 22] = [
    0.951055876031833,
    -0.21181371064073026,
    0.06013562106019355,
    -0.018550615381738605,
    0.005936795278433826,
    -0.0019350666647832667,
    0.000636888028319074,
    -0.00021074841215733007,
    6.995020484160625e-05,
    -2.325823828431376e-05,
    7.741156881253708e-06,
    -2.578107848270217e-06,
    8.591324222417666e-07,
    -2.8628755280038686e-07,
    9.500926192924096e-08,
    -3.166618072027162e-08,
    1.10370884388543e-08,
    -3.6788868183645545e-09,
    8.668257373761658e-10,
    -2.889363639216111e-10,
    2.4765474440031764e-10,
    -8.25512972008104e-11,
];
