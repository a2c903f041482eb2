//! sin, cos, tan and the inverse functions. Angles in radians.
//!
//! Below [`HUGE`] sin and cos are branch-free: pi/2 in four parts is taken away (Cody & Waite 1980; the parts
//! of fdlibm, 33 bits each but the last), the remainder kept in two parts, and both polynomials of fdlibm
//! (Ng 1993, k_sin.c and k_cos.c) are summed, of which the quadrant chooses one. Beyond, `libm` does it.

use super::exponential::SHIFT;
use super::pairs::difference;

/// Where the multiple of pi/2 has more than 20 bits and its products are no longer exact.
const HUGE: f64 = 1e6;

const HALF_PI: [f64; 4] = [
    1.57079632673412561417e+00,
    6.07710050630396597660e-11,
    2.02226624871116645580e-21,
    8.47842766036889956997e-32,
];

/// Quadrant (its two low bits count) and remainder in two parts, for |x| below [`HUGE`].
#[inline(always)]
fn reduce(x: f64) -> (u64, f64, f64) {
    let shifted = x * std::f64::consts::FRAC_2_PI + SHIFT;
    let k = shifted - SHIFT;
    let first = x - k * HALF_PI[0];
    let (second, lost) = difference(first, k * HALF_PI[1]);
    let (third, lost_again) = difference(second, k * HALF_PI[2]);
    let low = (lost + lost_again) - k * HALF_PI[3];
    let r = third + low;
    (shifted.to_bits(), r, (third - r) + low)
}

/// sin(r + c) for |r| at most pi/4.
#[inline(always)]
fn sin_near(r: f64, c: f64) -> f64 {
    let z = r * r;
    let w = z * z;
    let tail = 8.33333333332248946124e-03
        + z * (-1.98412698298579493134e-04 + z * 2.75573137070700676789e-06)
        + z * w * (-2.50507602534068634195e-08 + z * 1.58969099521155010221e-10);
    let v = z * r;
    r - ((z * (0.5 * c - v * tail) - c) - v * -1.66666666666666324348e-01)
}

/// cos(r + c) for |r| at most pi/4.
#[inline(always)]
fn cos_near(r: f64, c: f64) -> f64 {
    let z = r * r;
    let w = z * z;
    let tail = z
        * (4.16666666666666019037e-02
            + z * (-1.38888888888741095749e-03 + z * 2.48015872894767294178e-05))
        + w * w
            * (-2.75573143513906633035e-07
                + z * (2.08757232129817482790e-09 + z * -1.13596475577881948265e-11));
    let half = 0.5 * z;
    let w = 1.0 - half;
    w + (((1.0 - w) - half) + (z * tail - r * c))
}

/// The sine or cosine of quadrant `q` and remainder.
#[inline(always)]
fn of_quadrant(q: u64, r: f64, c: f64) -> f64 {
    let y = if q & 1 == 0 {
        sin_near(r, c)
    } else {
        cos_near(r, c)
    };
    if q & 2 == 0 { y } else { -y }
}

/// Whether the branch-free form holds; not for NaN.
#[inline(always)]
pub(super) fn moderate(x: f64) -> bool {
    x.abs() < HUGE
}

/// The sine of a [`moderate`] angle.
#[inline(always)]
pub(super) fn sin_moderate(x: f64) -> f64 {
    let (q, r, c) = reduce(x);
    let y = of_quadrant(q, r, c);
    if x.abs() < 1e-9 { x } else { y }
}

/// The cosine of a [`moderate`] angle.
#[inline(always)]
pub(super) fn cos_moderate(x: f64) -> f64 {
    let (q, r, c) = reduce(x);
    of_quadrant(q.wrapping_add(1), r, c)
}

/// The sine, within 1 ulp.
#[inline(always)]
pub fn sin(x: f64) -> f64 {
    if moderate(x) {
        sin_moderate(x)
    } else {
        libm::sin(x)
    }
}

/// The cosine, within 1 ulp.
#[inline(always)]
pub fn cos(x: f64) -> f64 {
    if moderate(x) {
        cos_moderate(x)
    } else {
        libm::cos(x)
    }
}

/// The tangent.
#[inline(always)]
pub fn tan(x: f64) -> f64 {
    libm::tan(x)
}

/// The inverse sine, in [-pi/2, pi/2]; NaN outside [-1, 1].
#[inline(always)]
pub fn asin(x: f64) -> f64 {
    libm::asin(x)
}

/// The inverse cosine, in [0, pi]; NaN outside [-1, 1].
#[inline(always)]
pub fn acos(x: f64) -> f64 {
    libm::acos(x)
}

/// The inverse tangent, in [-pi/2, pi/2].
#[inline(always)]
pub fn atan(x: f64) -> f64 {
    libm::atan(x)
}
