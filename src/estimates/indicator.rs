//! Autocovariances of conditions: one bit a draw, products by counting bits, exact in integers.

use super::lags::{BLOCK, Source};
use multiversion::multiversion;

/// A condition on the draws of the halves of chains, one bit a draw.
pub(super) struct Indicators {
    /// Per half; a spare word of zeros at the end.
    words: Vec<Vec<u64>>,
    /// Draws of each half for which the condition holds.
    ones: Vec<u64>,
    length: usize,
}

impl Indicators {
    pub(super) fn new(chains: &[&[f64]], holds: impl Fn(f64) -> bool) -> Indicators {
        let draws = chains.first().map_or(0, |chain| chain.len());
        let length = draws / 2;
        let mut words = Vec::new();
        for chain in chains {
            for half in [&chain[..length], &chain[draws - length..]] {
                let mut bits: Vec<u64> = half
                    .chunks(64)
                    .map(|part| {
                        part.iter()
                            .rev()
                            .fold(0, |word, x| word << 1 | u64::from(holds(*x)))
                    })
                    .collect();
                bits.push(0);
                words.push(bits);
            }
        }
        let ones = words
            .iter()
            .map(|w| w.iter().map(|b| u64::from(b.count_ones())).sum())
            .collect();
        Indicators {
            words,
            ones,
            length,
        }
    }

    /// Does it hold for every draw?
    pub(super) fn all(&self) -> bool {
        self.ones.iter().all(|n| *n == self.length as u64)
    }

    /// Its share in each half.
    pub(super) fn means(&self) -> Vec<f64> {
        self.ones
            .iter()
            .map(|n| *n as f64 / self.length as f64)
            .collect()
    }

    /// How often it holds among the first `count` draws of a half.
    fn among_first(&self, half: usize, count: usize) -> u64 {
        let words = &self.words[half];
        let whole: u64 = words[..count / 64]
            .iter()
            .map(|b| u64::from(b.count_ones()))
            .sum();
        let part = words[count / 64] & ((1u64 << (count % 64)) - 1);
        whole + u64::from(part.count_ones())
    }
}

impl Source for Indicators {
    const PATIENCE: usize = 4096;

    fn length(&self) -> usize {
        self.length
    }

    fn series(&self) -> usize {
        self.words.len()
    }

    fn block(&self, first: usize) -> [f64; BLOCK] {
        let mut sums = [0.0; BLOCK];
        for (l, sum) in sums.iter_mut().enumerate() {
            let lag = first + l;
            if lag >= self.length {
                continue;
            }
            for (half, words) in self.words.iter().enumerate() {
                let both = joint(words, lag) as f64;
                let mean = self.ones[half] as f64 / self.length as f64;
                let early = self.among_first(half, self.length - lag);
                let late = self.ones[half] - self.among_first(half, lag);
                // Sum of (I - mean)(I' - mean), multiplied out.
                *sum +=
                    both - mean * (early + late) as f64 + (self.length - lag) as f64 * mean * mean;
            }
        }
        sums
    }

    fn centred(&self) -> Vec<f64> {
        let mut out = Vec::with_capacity(self.words.len() * self.length);
        for (half, words) in self.words.iter().enumerate() {
            let mean = self.ones[half] as f64 / self.length as f64;
            out.extend((0..self.length).map(|t| (words[t / 64] >> (t % 64) & 1) as f64 - mean));
        }
        out
    }
}

/// How often a condition holds both at a draw and `lag` draws later.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets(
        "x86_64+avx512f+avx512bw+avx512vl+avx512vpopcntdq+popcnt",
        "x86_64+avx2+popcnt"
    ))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2+popcnt")))]
fn joint(words: &[u64], lag: usize) -> u64 {
    let (skip, shift) = (lag / 64, (lag % 64) as u32);
    let later = &words[skip..];
    let mut total = 0u64;
    if shift == 0 {
        for (a, b) in words.iter().zip(later) {
            total += u64::from((a & b).count_ones());
        }
    } else {
        for ((a, low), high) in words.iter().zip(later).zip(&later[1..]) {
            total += u64::from((a & (low >> shift | high << (64 - shift))).count_ones());
        }
    }
    total
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::estimates::effective::effective_flat;
    use crate::estimates::lags::Lags;
    use crate::maths::absolute;

    #[test]
    fn bits_agree_with_numbers() {
        for draws in [4, 41, 128, 131, 999] {
            let x: Vec<f64> = (0..2 * draws)
                .map(|i| ((i * i * 7 + i / 3) % 11) as f64)
                .collect();
            let chains = [&x[..draws], &x[draws..]];
            let bits = Indicators::new(&chains, |v| v < 4.0);
            let numbers: Vec<f64> = x.iter().map(|v| if *v < 4.0 { 1.0 } else { 0.0 }).collect();
            let means = bits.means();
            let a = crate::estimates::effective::effective_of(&mut Lags::new(bits), &means)
                .expect("varies");
            let b = effective_flat(&numbers, draws).expect("varies");
            assert!(
                absolute(a.size / b.size - 1.0) < 1e-9,
                "{draws}: {a:?} {b:?}"
            );
        }
    }
}
