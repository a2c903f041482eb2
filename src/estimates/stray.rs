//! Chains that stand still, and chains whose mean is not that of the others.

use super::batch::batch_means;
use super::moments::{mean, squares, variance};
use crate::maths::{absolute, exp, ln};

/// Errors between a chain's mean and that of the others from which on it is named.
const FAR: f64 = 5.0;
/// A chain that stands still is called stuck when an honest one would do so less often than this.
const UNLIKELY: f64 = 1e-6;

/// Chains that never left one point, though the others say that this would be a wonder. A rare condition,
/// or a whole number that hardly varies, can leave a chain without any change by chance: the chance is
/// q^e, with q the share of that value among the other chains and e the effective draws of one chain.
pub(super) fn stuck(chains: &[&[f64]], effective_per_chain: f64) -> Vec<usize> {
    let still = |chain: &[f64]| chain.iter().all(|x| *x == chain[0]);
    let mut list = Vec::new();
    for (index, chain) in chains.iter().enumerate() {
        if !still(chain) || chains.len() < 2 {
            continue;
        }
        let (mut same, mut all) = (0u64, 0u64);
        for (other, x) in chains.iter().enumerate() {
            if other != index {
                same += x.iter().filter(|v| **v == chain[0]).count() as u64;
                all += x.len() as u64;
            }
        }
        let share = same as f64 / all as f64;
        if share == 0.0 || exp(effective_per_chain * ln(share)) < UNLIKELY {
            list.push(index);
        }
    }
    list
}

/// Chains whose mean lies more than five errors from the mean of the others, farthest first found, and how
/// many errors the farthest lies off. The farthest chain is set aside and the rest looked at again, so that
/// one stray chain does not make strays of all.
///
/// `flat` holds the draws chain after chain; the error of a chain's mean is the larger of that by its own
/// batch means and that by its own variance and the autocorrelation time within chains.
pub(super) fn stray(
    flat: &[f64],
    draws: usize,
    batches: usize,
    tau: f64,
) -> Option<(Vec<usize>, f64)> {
    let n = draws as f64;
    let (mut means, mut errors) = (Vec::new(), Vec::new());
    for chain in flat.chunks_exact(draws) {
        let parts = batch_means(chain, batches);
        let count = parts.len() as f64;
        let by_batches = squares(&parts, mean(&parts)) / (count - 1.0) / count;
        let by_lags = variance(chain).unwrap_or(0.0) * tau / n;
        means.push(mean(chain));
        errors.push(if by_lags > by_batches {
            by_lags
        } else {
            by_batches
        });
    }
    let mut left: Vec<usize> = (0..means.len()).collect();
    let (mut named, mut farthest) = (Vec::new(), 0.0);
    while left.len() > 1 {
        let mut worst: Option<(usize, f64)> = None;
        for c in &left {
            let others: Vec<usize> = left.iter().copied().filter(|o| o != c).collect();
            let count = others.len() as f64;
            let centre = mean(&others.iter().map(|o| means[*o]).collect::<Vec<f64>>());
            let error = mean(&others.iter().map(|o| errors[*o]).collect::<Vec<f64>>()) / count;
            let apart = absolute(means[*c] - centre);
            let scale = (errors[*c] + error).sqrt();
            let far = if apart == 0.0 { 0.0 } else { apart / scale };
            if worst.is_none_or(|(_, w)| far > w) {
                worst = Some((*c, far));
            }
        }
        match worst {
            Some((c, far)) if far > FAR => {
                left.retain(|o| *o != c);
                named.push(c);
                if far > farthest {
                    farthest = far;
                }
            }
            _ => break,
        }
    }
    named.sort_unstable();
    (!named.is_empty()).then_some((named, farthest))
}
