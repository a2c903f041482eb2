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
