//! Initial-sequence estimates of the variance of a mean, for reversible kernels only (Geyer 1992): there the
//! sums of neighbouring autocovariances are positive, falling and convex.

use super::lags::{Lags, Series};

/// Long-run variances (the variance of the mean times the number of draws) of one chain of a reversible kernel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct InitialSequence {
    pub positive: f64,
    pub monotone: f64,
    pub convex: f64,
    /// Index of the last pair of lags used.
    pub last_pair: usize,
}

/// The three estimates for one chain. `None` for fewer than two draws, draws that are not finite, and a chain
/// that stands still.
pub fn initial_sequence(chain: &[f64]) -> Option<InitialSequence> {
    if chain.len() < 2
        || chain.iter().any(|x| !x.is_finite())
        || chain.iter().all(|x| *x == chain[0])
    {
        return None;
    }
    let n = chain.len();
    let mut lags = Lags::new(Series::whole(chain));
    // Autocovariances here divide by n at every lag.
    let scale = (n - 1) as f64 / n as f64;
    let mut pairs: Vec<f64> = Vec::new();
    for pair in 0..n / 2 {
        let gamma = scale * (lags.get(2 * pair) + lags.get(2 * pair + 1));
        if pair > 0 && gamma <= 0.0 {
            break;
        }
        pairs.push(gamma);
    }
    let variance = scale * lags.get(0);
    let estimate = |pairs: &[f64]| 2.0 * pairs.iter().fold(0.0, |sum, p| sum + p) - variance;
    let positive = estimate(&pairs);
    let last_pair = pairs.len() - 1;
    for i in 1..pairs.len() {
        if pairs[i] > pairs[i - 1] {
            pairs[i] = pairs[i - 1];
        }
    }
    Some(InitialSequence {
        positive,
        monotone: estimate(&pairs),
        convex: estimate(&convex_minorant(&pairs)),
        last_pair,
    })
}

/// The greatest convex sequence under a falling one, which a zero follows.
fn convex_minorant(falling: &[f64]) -> Vec<f64> {
    let at = |i: usize| falling.get(i).copied().unwrap_or(0.0);
    let mut hull = vec![0usize];
    for i in 1..=falling.len() {
        while let [.., a, b] = hull[..] {
            // Drop the middle point where it lies on or above the line between its neighbours.
            if (at(b) - at(a)) * (i - b) as f64 >= (at(i) - at(b)) * (b - a) as f64 {
                hull.pop();
            } else {
                break;
            }
        }
        hull.push(i);
    }
    let mut out = Vec::with_capacity(falling.len());
    for pair in hull.windows(2) {
        let (a, b) = (pair[0], pair[1]);
        let slope = (at(b) - at(a)) / (b - a) as f64;
        out.extend((a..b).map(|i| at(a) + slope * (i - a) as f64));
    }
    out
}
