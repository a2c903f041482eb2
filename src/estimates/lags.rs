//! Autocovariances averaged over series, lag after lag as far as they are asked for: products summed
//! directly in blocks of eight lags, and by transform once many lags are wanted. Which of the two is
//! used depends on the draws alone.

use super::moments::{halves, mean};
use super::transform::summed_autocorrelations;
use crate::maths::combine_partials;
use multiversion::multiversion;

/// Lags computed in one pass over a series.
pub(super) const BLOCK: usize = 8;

/// What can give the sums of products of centred series.
pub(super) trait Source {
    /// Lags computed one block after another before the transform takes over.
    const PATIENCE: usize;
    /// Length of each series.
    fn length(&self) -> usize;
    fn series(&self) -> usize;
    /// Sum over the series of the products at lags `first .. first + BLOCK`; lags past the end give 0.
    fn block(&self, first: usize) -> [f64; BLOCK];
    /// The centred series, one after another, for the transform.
    fn centred(&self) -> Vec<f64>;
}

/// Autocovariances of a source, averaged over its series, with divisor length - 1 at every lag (so that
/// lag 0 is the mean of the sample variances).
pub(super) struct Lags<S> {
    source: S,
    known: Vec<f64>,
}

impl<S: Source> Lags<S> {
    pub(super) fn new(source: S) -> Lags<S> {
        Lags {
            source,
            known: Vec::new(),
        }
    }

    pub(super) fn length(&self) -> usize {
        self.source.length()
    }

    pub(super) fn series(&self) -> usize {
        self.source.series()
    }

    /// The averaged autocovariance at a lag below the length; lengths of two and more.
    pub(super) fn get(&mut self, lag: usize) -> f64 {
        while self.known.len() <= lag {
            let divisor = ((self.source.length() - 1) * self.source.series()) as f64;
            let first = self.known.len();
            if first >= S::PATIENCE {
                let sums = summed_autocorrelations(&self.source.centred(), self.source.length());
                self.known = sums.into_iter().map(|sum| sum / divisor).collect();
            } else {
                let sums = self.source.block(first);
                self.known.extend(sums.map(|sum| sum / divisor));
            }
        }
        self.known[lag]
    }
}

/// Real series of equal length, centred each on its own mean.
pub(super) struct Series {
    centred: Vec<f64>,
    length: usize,
}

impl Series {
    /// The halves of chains of `draws` draws laid one after another.
    pub(super) fn halves(flat: &[f64], draws: usize) -> Series {
        let length = draws / 2;
        let mut centred = Vec::with_capacity(flat.len());
        for half in halves(flat, draws) {
            let centre = mean(half);
            centred.extend(half.iter().map(|x| x - centre));
        }
        Series { centred, length }
    }

    /// One whole series.
    pub(super) fn whole(x: &[f64]) -> Series {
        let centre = mean(x);
        Series {
            centred: x.iter().map(|x| x - centre).collect(),
            length: x.len(),
        }
    }
}

impl Source for Series {
    const PATIENCE: usize = 384;

    fn length(&self) -> usize {
        self.length
    }

    fn series(&self) -> usize {
        self.centred.len() / self.length
    }

    fn block(&self, first: usize) -> [f64; BLOCK] {
        let mut sums = [0.0; BLOCK];
        for x in self.centred.chunks_exact(self.length) {
            for (total, part) in sums.iter_mut().zip(products(x, first)) {
                *total += part;
            }
        }
        sums
    }

    fn centred(&self) -> Vec<f64> {
        self.centred.clone()
    }
}

/// Sums of `x[t] * x[t + lag]` at eight consecutive lags. Eight partial sums a lag, folded every 1024 steps.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets("x86_64+avx512f", "x86_64+avx2"))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2")))]
fn products(x: &[f64], first: usize) -> [f64; BLOCK] {
    let mut sums = [0.0; BLOCK];
    let common = x.len().saturating_sub(first + BLOCK - 1) / 8 * 8;
    let mut start = 0;
    while start < common {
        let end = if start + 1024 < common {
            start + 1024
        } else {
            common
        };
        let mut lanes = [[0.0; 8]; BLOCK];
        let left = x[start..end].chunks_exact(8);
        let right = x[start + first..].windows(8 + BLOCK - 1).step_by(8);
        for (a, b) in left.zip(right) {
            for l in 0..BLOCK {
                for i in 0..8 {
                    lanes[l][i] += a[i] * b[i + l];
                }
            }
        }
        for (sum, lane) in sums.iter_mut().zip(lanes) {
            *sum += combine_partials(&lane);
        }
        start = end;
    }
    for (l, sum) in sums.iter_mut().enumerate() {
        let lag = first + l;
        let mut rest = 0.0;
        for t in common..x.len().saturating_sub(lag) {
            rest += x[t] * x[t + lag];
        }
        *sum += rest;
    }
    sums
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::maths::absolute;

    fn walk(n: usize) -> Vec<f64> {
        let mut word = 1u64;
        let mut x = 0.0;
        (0..n)
            .map(|_| {
                word = word
                    .wrapping_mul(6364136223846793005)
                    .wrapping_add(1442695040888963407);
                x = 0.99 * x + ((word >> 11) as f64 / 9007199254740992.0 - 0.5);
                x
            })
            .collect()
    }

    #[test]
    fn blocks_and_transform_agree_with_plain_sums() {
        for n in [2, 3, 9, 16, 63, 1100, 2500] {
            let x = walk(2 * n);
            let series = Series::halves(&x, 2 * n);
            let plain: Vec<f64> = (0..n)
                .map(|k| {
                    series
                        .centred
                        .chunks_exact(n)
                        .map(|y| (0..n - k).map(|t| y[t] * y[t + k]).sum::<f64>())
                        .sum::<f64>()
                })
                .collect();
            let transformed = summed_autocorrelations(&series.centred, n);
            for k in 0..n {
                let direct = series.block(k / 8 * 8)[k % 8];
                assert!(absolute(direct - plain[k]) <= 1e-12 * plain[0], "{n} {k}");
                assert!(
                    absolute(transformed[k] - plain[k]) <= 1e-12 * plain[0],
                    "{n} {k}"
                );
            }
        }
    }
}
