//! Means and spreads of draws of any size, without overflow or cancellation.

use crate::maths::{absolute, combine_partials, sum};

/// Draws shifted by a centre and scaled by a power of two, so that squares neither overflow nor drown.
#[derive(Debug, Clone)]
pub(super) struct Scaled {
    /// `(x - centre) * scale` of each draw, chain after chain.
    pub(super) values: Vec<f64>,
    scale: f64,
    /// Centre times scale.
    shift: f64,
}

impl Scaled {
    /// `centre` is any finite value near the draws; every draw is finite.
    pub(super) fn new(chains: &[&[f64]], centre: f64) -> Scaled {
        let mut largest = 0.0;
        for x in chains.iter().flat_map(|chain| chain.iter()) {
            let size = absolute(*x);
            if size > largest {
                largest = size;
            }
        }
        let first = power_of_two_under(largest);
        let shift = centre * first;
        let mut values: Vec<f64> = chains
            .iter()
            .flat_map(|chain| chain.iter())
            .map(|x| x * first - shift)
            .collect();
        // A second scaling: far from zero the deviations are much smaller than the draws.
        let mut widest = 0.0;
        for y in &values {
            let size = absolute(*y);
            if size > widest {
                widest = size;
            }
        }
        let second = power_of_two_under(widest);
        let scale = first * second;
        if scale.is_finite() && second != 1.0 {
            for y in &mut values {
                *y *= second;
            }
            Scaled {
                values,
                scale,
                shift: shift * second,
            }
        } else {
            Scaled {
                values,
                scale: first,
                shift,
            }
        }
    }

    /// A position in the scaled draws as a value of the quantity.
    pub(super) fn value(&self, y: f64) -> f64 {
        (self.shift + y) / self.scale
    }

    /// A length in the scaled draws (a standard deviation, an error) as one of the quantity.
    pub(super) fn length(&self, y: f64) -> f64 {
        y / self.scale
    }
}

/// The power of two that brings a size into [1, 2), within the range of doubles; 1 for 0.
fn power_of_two_under(size: f64) -> f64 {
    if size == 0.0 || !size.is_finite() {
        return 1.0;
    }
    let exponent = ((size.to_bits() >> 52) & 0x7ff) as i64 - 1023;
    let wanted = (-exponent).clamp(-1000, 1000);
    f64::from_bits(((1023 + wanted) as u64) << 52)
}

/// Mean of at least one value.
pub(super) fn mean(x: &[f64]) -> f64 {
    sum(x) / x.len() as f64
}

/// Sum of squared differences from a centre.
pub(super) fn squares(x: &[f64], centre: f64) -> f64 {
    let mut parts = Vec::with_capacity(x.len() / 1024 + 1);
    for chunk in x.chunks(1024) {
        let mut lanes = [0.0; 8];
        let (eights, rest) = chunk.as_chunks::<8>();
        for eight in eights {
            for (lane, v) in lanes.iter_mut().zip(eight) {
                let d = v - centre;
                *lane += d * d;
            }
        }
        for (lane, v) in lanes.iter_mut().zip(rest) {
            let d = v - centre;
            *lane += d * d;
        }
        parts.push(combine_partials(&lanes));
    }
    sum(&parts)
}

/// Variance with divisor one less than the count; `None` for fewer than two values.
pub(super) fn variance(x: &[f64]) -> Option<f64> {
    (x.len() > 1).then(|| squares(x, mean(x)) / (x.len() - 1) as f64)
}

/// The first and the last half of every chain of `draws` draws, laid chain after chain; of an odd number
/// the middle draw is left out.
pub(super) fn halves(flat: &[f64], draws: usize) -> impl Iterator<Item = &[f64]> {
    let half = draws / 2;
    flat.chunks_exact(draws)
        .flat_map(move |chain| [&chain[..half], &chain[draws - half..]])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn huge_and_tiny_draws_keep_their_digits() {
        for size in [1e308, 1.0, 1e-300, 5e-324] {
            let x = [size, -size, size, size];
            let s = Scaled::new(&[&x], 0.0);
            let m = s.value(mean(&s.values));
            assert!(absolute(m / size - 0.5) <= 0.5, "{size}: {m}");
            assert!(variance(&s.values).is_some_and(|v| v.is_finite() && v > 0.0));
        }
        let x = [1e13 + 0.25, 1e13 + 0.5, 1e13 + 0.75];
        let s = Scaled::new(&[&x], 1e13);
        assert_eq!(s.value(mean(&s.values)), 1e13 + 0.5);
        assert_eq!(s.length(variance(&s.values).unwrap_or(0.0).sqrt()), 0.25);
    }
}
