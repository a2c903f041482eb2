//! Random numbers of the kernels.

use crate::maths;
use crate::random::Stream;

/// Standard normal, by inversion.
#[inline]
pub fn normal(stream: &mut Stream) -> f64 {
    maths::normal_quantile(stream.open())
}

/// Standard exponential, by inversion.
#[inline]
pub fn exponential(stream: &mut Stream) -> f64 {
    -maths::ln(stream.open())
}

/// Uniform on 0 .. n, n below 2^53.
#[inline]
pub fn index(stream: &mut Stream, n: u64) -> u64 {
    (stream.unit() * n as f64) as u64
}
