//! The standard normal law: distribution function, its logarithm, its quantile. Branch-free.

use super::exponential::exp_of_pair;
use super::logarithm::{ln, log1p};
use super::pairs::{exact_product, polynomial};

/// P(Z > z) e^(z^2/2) for z from 0 to 1e160: (1 + z) times it is smooth in (z - 5) / (z + 5), the mapping of
/// Shepherd & Laframboise (1981); 1/2 is met exactly at 0, and what it lacks, divided by u = 2 z / (z + 5), is
/// interpolated at 24 Chebyshev points and written out in powers of u - 1.
#[inline(always)]
fn scaled_tail(z: f64) -> f64 {
    let u = 2.0 * z / (z + 5.0);
    (0.5 + u * polynomial(u - 1.0, &TAIL)) / (1.0 + z)
}

/// P(Z > z) for z from 0.
#[inline(always)]
fn tail(z: f64) -> f64 {
    let z = if z > 40.0 { 40.0 } else { z };
    let (square, rest) = exact_product(z, z);
    scaled_tail(z) * exp_of_pair(-0.5 * square, -0.5 * rest)
}

/// P(Z <= x) of a standard normal, within 4 ulp.
#[inline(always)]
pub fn normal_cdf(x: f64) -> f64 {
    let t = tail(x.abs());
    if x > 0.0 { 1.0 - t } else { t }
}

/// ln P(Z <= x), within 4 ulp, however far in the tail.
#[inline(always)]
pub fn ln_normal_cdf(x: f64) -> f64 {
    let z = x.abs();
    let z = if z > 1e160 { 1e160 } else { z };
    let lower = ln(scaled_tail(z)) - 0.5 * z * z;
    let upper = log1p(-tail(z));
    if x > 0.0 { upper } else { lower }
}

/// x with P(Z <= x) = p, within 6 ulp: the rational forms of Wichura (1988, algorithm AS 241, PPND16). NaN
/// outside [0, 1].
#[inline(always)]
pub fn normal_quantile(p: f64) -> f64 {
    let q = p - 0.5;
    let central = q.abs() <= 0.425;
    let tail = if q < 0.0 { p } else { 1.0 - p };
    let root = (-ln(tail)).sqrt();
    let far = root > 5.0;
    let r = if far { root - 5.0 } else { root - 1.6 };
    let r = if central { 0.180625 - q * q } else { r };
    let (mut above, mut below) = (0.0, 0.0);
    for i in (0..8).rev() {
        let a = if far { E[i] } else { C[i] };
        above = above * r + if central { A[i] } else { a };
        let b = if far { F[i] } else { D[i] };
        below = below * r + if central { B[i] } else { b };
    }
    let ratio = above / below;
    let x = if central {
        q * ratio
    } else {
        ratio.copysign(q)
    };
    let x = if tail == 0.0 {
        f64::INFINITY.copysign(q)
    } else {
        x
    };
    if (0.0..=1.0).contains(&p) {
        x
    } else {
        f64::NAN
    }
}

const TAIL: [f64; 24] = [
    -0.038484170149962235,
    -0.0530681116840467,
    0.08409848011001178,
    -0.07409612772479103,
    0.047695084758417515,
    -0.023158121514515666,
    0.007987706113220399,
    -0.0014657054481011927,
    -0.00021036690823255776,
    0.00021815852332830523,
    -3.582431111084496e-05,
    -1.778334175957749e-05,
    7.887001754522911e-06,
    1.1730099618085163e-06,
    -1.2427808463224866e-06,
    -6.498742807684838e-08,
    1.9195357182307852e-07,
    4.680854490566662e-09,
    -3.001254662311458e-08,
    -1.1889254883620892e-09,
    4.182892868465183e-09,
    3.178325240146806e-10,
    -3.58603013855086e-10,
    -4.026037205183445e-11,
];

const A: [f64; 8] = [
    3.3871328727963666080e0,
    1.3314166789178437745e2,
    1.9715909503065514427e3,
    1.3731693765509461125e4,
    4.5921953931549871457e4,
    6.7265770927008700853e4,
    3.3430575583588128105e4,
    2.5090809287301226727e3,
];
const B: [f64; 8] = [
    1.0,
    4.2313330701600911252e1,
    6.8718700749205790830e2,
    5.3941960214247511077e3,
    2.1213794301586595867e4,
    3.9307895800092710610e4,
    2.8729085735721942674e4,
    5.2264952788528545610e3,
];
const C: [f64; 8] = [
    1.42343711074968357734e0,
    4.63033784615654529590e0,
    5.76949722146069140550e0,
    3.64784832476320460504e0,
    1.27045825245236838258e0,
    2.41780725177450611770e-1,
    2.27238449892691845833e-2,
    7.74545014278341407640e-4,
];
const D: [f64; 8] = [
    1.0,
    2.05319162663775882187e0,
    1.67638483018380384940e0,
    6.89767334985100004550e-1,
    1.48103976427480074590e-1,
    1.51986665636164571966e-2,
    5.47593808499534494600e-4,
    1.05075007164441684324e-9,
];
const E: [f64; 8] = [
    6.65790464350110377720e0,
    5.46378491116411436990e0,
    1.78482653991729133580e0,
    2.96560571828504891230e-1,
    2.65321895265761230930e-2,
    1.24266094738807843860e-3,
    2.71155556874348757815e-5,
    2.01033439929228813265e-7,
];
const F: [f64; 8] = [
    1.0,
    5.99832206555887937690e-1,
    1.36929880922735805310e-1,
    1.48753612908506148525e-2,
    7.86869131145613259100e-4,
    1.84631831751005468180e-5,
    1.42151175831644588870e-7,
    2.04426310338993978564e-15,
];
