//! The root of an increasing function of a positive number.

use super::exponential::exp;

/// The x in (low, high] where `f` rises through 0; `f` gives its value and its derivative by ln x.
///
/// Newton's method in ln x, kept in a bracket that starts at (low, high]; where it leaves the bracket, and
/// after 40 steps, the bracket's bit patterns are halved. So it ends for every `f`, however ragged.
pub(super) fn root(low: f64, high: f64, start: f64, f: impl Fn(f64) -> (f64, f64)) -> f64 {
    let (mut low, mut high) = (low.to_bits(), high.to_bits());
    let mut x = start;
    let mut steps = 0;
    while high - low > 1 {
        steps += 1;
        if steps > 40 || !(x.to_bits() > low && x.to_bits() < high) {
            x = f64::from_bits(low + (high - low) / 2);
        }
        let (value, slope) = f(x);
        if value == 0.0 {
            return x;
        }
        if value < 0.0 {
            low = x.to_bits();
        } else {
            high = x.to_bits();
        }
        // Where a tail underflows the slope is infinite, and a step of nothing would look like an arrival.
        let change = if slope.abs() < f64::INFINITY {
            value / slope
        } else {
            f64::NAN
        };
        let next = if change.abs() < 1e-3 {
            x - x * (change - 0.5 * change * change)
        } else if change.abs() < 700.0 {
            x * exp(-change)
        } else {
            f64::NAN
        };
        if (next - x).abs() <= 1.2e-16 * x {
            return next;
        }
        // NaN has bits beyond every bracket of positive numbers
        x = if next > 0.0 { next } else { f64::NAN };
    }
    f64::from_bits(high)
}
