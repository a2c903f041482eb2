//! Draws that rounding would carry out of the support are moved to its nearest double.

/// Into (0, ∞).
pub(super) fn positive(x: f64) -> f64 {
    if x < f64::from_bits(1) {
        return f64::from_bits(1);
    }
    finite(x)
}

/// Into the finite numbers.
pub(super) fn finite(x: f64) -> f64 {
    if x.is_infinite() {
        return if x > 0.0 { f64::MAX } else { f64::MIN };
    }
    x
}
