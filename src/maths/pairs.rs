//! Numbers held as a sum of two, without fused operations, and polynomials.

/// a - b and what it lost to rounding (Knuth 1969).
#[inline(always)]
pub(super) fn difference(a: f64, b: f64) -> (f64, f64) {
    let d = a - b;
    let back = d - a;
    (d, (a - (d - back)) - (b + back))
}

/// a b as a sum of two (Dekker 1971, with Veltkamp's splitting).
#[inline(always)]
pub(super) fn exact_product(a: f64, b: f64) -> (f64, f64) {
    let halves = |v: f64| {
        let t = v * 134217729.0;
        let high = t - (t - v);
        (high, v - high)
    };
    let p = a * b;
    let (ah, al) = halves(a);
    let (bh, bl) = halves(b);
    (p, ((ah * bh - p) + ah * bl + al * bh) + al * bl)
}

/// c[0] + c[1] x + c[2] x^2 + ..., even and odd powers apart.
#[inline(always)]
pub(super) fn polynomial<const N: usize>(x: f64, c: &[f64; N]) -> f64 {
    let z = x * x;
    let (mut even, mut odd) = (0.0, 0.0);
    for i in (0..N).rev() {
        if i % 2 == 0 {
            even = even * z + c[i];
        } else {
            odd = odd * z + c[i];
        }
    }
    even + x * odd
}

/// 1/3, 1/5, 1/7 ...: atanh(s) / s is 1 + z times this series in z = s^2.
pub(super) const ODD: [f64; 11] = [
    1.0 / 3.0,
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
];
