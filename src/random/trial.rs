//! Tests of samplers: golden digests, Kolmogorov-Smirnov, chi-square.

#![expect(
    clippy::neg_cmp_op_on_partial_ord,
    reason = "a comparison with NaN must not pass a check"
)]

use super::{Purpose, Stream};
use crate::maths;
use sha2::{Digest, Sha256};

/// A test's own stream.
pub fn stream(seed: u8) -> Stream {
    Stream::new(&[seed; 32], Purpose::Test)
}

/// Draws from one stream.
pub fn numbers(count: usize, seed: u8, sampler: impl Fn(&mut Stream) -> f64) -> Vec<f64> {
    let mut stream = stream(seed);
    (0..count).map(|_| sampler(&mut stream)).collect()
}

/// The first 8 bytes of the SHA-256 over the bits of the first draws of a fixed stream.
pub fn golden(count: usize, sampler: impl Fn(&mut Stream) -> f64) -> String {
    let mut hash = Sha256::new();
    for number in numbers(count, 7, sampler) {
        hash.update(number.to_bits().to_le_bytes());
    }
    let bytes: [u8; 32] = hash.finalize().into();
    bytes[..8]
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect()
}

/// A right sampler of a continuous law goes past this [`distance`] once in 3 million seeds: the limiting law
/// gives 2 exp(-2 x^2) (Kolmogorov 1933).
pub const LIMIT: f64 = 2.8;

/// sqrt(n) times the largest distance between the distribution function of the draws and the exact one; of
/// an integer law only where it jumps, which makes the alarm rarer still.
pub fn distance(draws: &[f64], distribution: impl Fn(f64) -> f64) -> f64 {
    let mut sorted = draws.to_vec();
    sorted.sort_by(f64::total_cmp);
    let n = sorted.len() as f64;
    let mut largest = 0.0;
    let mut start = 0;
    while start < sorted.len() {
        let x = sorted[start];
        let mut end = start;
        while end < sorted.len() && sorted[end] == x {
            end += 1;
        }
        let exact = distribution(x);
        // A lone value of a continuous law: both sides of the step. Of several equal ones: the top.
        let above = (end as f64 / n - exact).abs();
        let below = if end - start == 1 {
            (exact - start as f64 / n).abs()
        } else {
            0.0
        };
        for gap in [above, below] {
            // Also true of NaN: a distribution function that fails must not pass.
            if !(gap <= largest) {
                largest = gap;
            }
        }
        start = end;
    }
    largest * n.sqrt()
}

/// An alarm this rare is a fault: once in a million seeds.
pub const RARE: f64 = 1e-6;

/// The probability of a chi-square statistic at least as large as that of draws of whole numbers 0, 1, …
/// against their probabilities; neighbours are pooled until each cell expects at least 20.
pub fn chi_square(draws: &[f64], probability: impl Fn(f64) -> f64) -> f64 {
    let largest = draws
        .iter()
        .fold(0.0_f64, |a, &b| if b > a { b } else { a });
    let mut counts = vec![0.0; largest as usize + 1];
    for &draw in draws {
        if !(draw >= 0.0 && draw == draw.floor()) {
            return 0.0;
        }
        counts[draw as usize] += 1.0;
    }
    let n = draws.len() as f64;
    let mut cells: Vec<(f64, f64)> = Vec::new();
    let (mut seen, mut expected, mut covered) = (0.0, 0.0, 0.0);
    for (k, count) in counts.iter().enumerate() {
        let share = probability(k as f64);
        seen += count;
        expected += n * share;
        covered += share;
        if expected >= 20.0 {
            cells.push((seen, expected));
            (seen, expected) = (0.0, 0.0);
        }
    }
    // What is left, with everything above the largest draw.
    let rest = expected + n * (1.0 - covered);
    if rest >= 20.0 || cells.is_empty() {
        cells.push((seen, rest));
    } else if let Some(last) = cells.last_mut() {
        last.0 += seen;
        last.1 += rest;
    }
    if cells.len() == 1 {
        // One cell holds everything, or the law is another.
        return if cells[0].1 >= n - 20.0 { 1.0 } else { 0.0 };
    }
    let statistic = cells.iter().fold(0.0, |sum, (seen, expected)| {
        sum + (seen - expected) * (seen - expected) / expected
    });
    maths::gamma_q(0.5 * (cells.len() - 1) as f64, 0.5 * statistic)
}

/// The same of draws of a continuous law, counted in 2000 cells of equal probability: sees what is wrong in
/// narrow places, which a distribution function averages away.
pub fn cells(
    count: usize,
    seed: u8,
    distribution: impl Fn(f64) -> f64,
    sampler: impl Fn(&mut Stream) -> f64,
) -> f64 {
    const CELLS: f64 = 2000.0;
    let places = numbers(count, seed, |stream| {
        let place = (distribution(sampler(stream)) * CELLS).floor();
        if place < CELLS { place } else { CELLS - 1.0 }
    });
    chi_square(&places, |k| if k < CELLS { 1.0 / CELLS } else { 0.0 })
}
