//! A position by its probability.

use super::Stream;

/// A position in the list, each with its weight over the sum of all; a position of weight 0 never comes.
/// The weights are 0 or positive and their sum is positive and finite.
pub fn categorical(stream: &mut Stream, weights: &[f64]) -> usize {
    let total: f64 = weights.iter().fold(0.0, |sum, weight| sum + weight);
    let aim = stream.unit() * total;
    let mut reached = 0.0;
    let mut last = 0;
    for (position, &weight) in weights.iter().enumerate() {
        if weight > 0.0 {
            last = position;
            reached += weight;
            if aim < reached {
                break;
            }
        }
    }
    last
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{RARE, chi_square, golden, numbers};

    const WEIGHTS: [f64; 5] = [0.1, 0.0, 0.25, 0.6, 0.05];

    #[test]
    fn values_are_stable() {
        assert_eq!(
            golden(20_000, |s| categorical(s, &WEIGHTS) as f64),
            "5949c153c800dfb0"
        );
    }

    #[test]
    fn follows_the_weights() {
        let doubled = WEIGHTS.map(|weight| 2.0 * weight);
        for weights in [WEIGHTS, doubled] {
            let draws = numbers(1_000_000, 1, |s| categorical(s, &weights) as f64);
            let alarm = chi_square(&draws, |k| WEIGHTS.get(k as usize).copied().unwrap_or(0.0));
            assert!(alarm > RARE, "{alarm:e}");
            assert!(draws.iter().all(|&k| k != 1.0));
        }
    }

    #[test]
    fn weights_taken_for_their_neighbours_are_caught() {
        let draws = numbers(1_000_000, 1, |s| {
            let position = categorical(s, &WEIGHTS);
            (if position == 4 { 0 } else { position }) as f64
        });
        assert!(chi_square(&draws, |k| WEIGHTS.get(k as usize).copied().unwrap_or(0.0)) < RARE);
    }
}
