//! Batch means pooled over chains about the overall mean (Jones, Haran, Caffo & Neath 2006; Argon &
//! Andradóttir 2006), so that disagreement between chains enters the error.

use super::moments::{mean, squares};

/// Batches a chain: the cube root of the draws, and at least 20; `None` where a batch would hold fewer than
/// two draws. Long batches (n^(2/3) draws) keep the bias small where draws are strongly correlated, and
/// the chains together still give enough of them.
pub fn batch_count(draws: usize) -> Option<usize> {
    let mut root = 20usize;
    while (root + 1).pow(3) <= draws {
        root += 1;
    }
    (draws >= 2 * root).then_some(root)
}

/// Means of `batches` equal batches of a chain; of draws left over the first are left out.
pub(super) fn batch_means(chain: &[f64], batches: usize) -> Vec<f64> {
    let length = chain.len() / batches;
    chain[chain.len() - length * batches..]
        .chunks_exact(length)
        .map(mean)
        .collect()
}

/// The estimated variance of the overall mean of chains of equal length. `None` where a batch would be
/// empty or there is only one.
pub fn pooled_batch_variance(chains: &[&[f64]], batches: usize) -> Option<f64> {
    let draws = chains.first().map_or(0, |chain| chain.len());
    if batches == 0 || draws / batches == 0 || batches * chains.len() < 2 {
        return None;
    }
    let means: Vec<f64> = chains
        .iter()
        .flat_map(|chain| batch_means(chain, batches))
        .collect();
    let count = means.len() as f64;
    Some(squares(&means, mean(&means)) / (count - 1.0) / count)
}
