//! Many chains from exact draws, in lockstep, and the chance of what they show.

use crate::targets::{Law, Lockstep};
use odograph::course::Phase;
use odograph::maths;
use odograph::methods::{Kernel, Walkers};
use odograph::random::{Purpose, Stream};

/// Builds a kernel for so many lanes.
pub type Maker<'a> = &'a dyn Fn(usize) -> Box<dyn Kernel>;

/// A number read off a state.
pub type Of<'a> = &'a dyn Fn(&[f64]) -> f64;

pub const LANES: usize = 16;

/// A stream of its own for each number.
pub fn stream(number: usize) -> Stream {
    let mut key = [0; 32];
    key[..8].copy_from_slice(&(number as u64).to_le_bytes());
    Stream::new(&key, Purpose::Test)
}

/// Walkers at exact draws from the law; the chains are numbered from `first`.
pub fn exact_start(law: &dyn Law, target: &mut Lockstep, lanes: usize, first: usize) -> Walkers {
    let mut streams: Vec<Stream> = (first..first + lanes).map(stream).collect();
    let draws: Vec<Vec<f64>> = streams.iter_mut().map(|s| law.draw(s)).collect();
    let dimension = law.kinds().len();
    let position = (0..dimension * lanes).map(|at| draws[at % lanes][at / lanes]);
    Walkers::new(target, position.collect(), streams)
}

pub fn point(walkers: &Walkers, lane: usize) -> Vec<f64> {
    let column = walkers.position.iter().skip(lane);
    column.step_by(walkers.lanes).copied().collect()
}

/// The law after some steps from exact draws, which a right kernel leaves as it is: the chance of a chi-square
/// as great over 20 cells, for each of the law's uniform numbers. Chains are independent, so that the test
/// is exact but for the chi-square approximation.
pub fn stationary(law: &dyn Law, maker: Maker, steps: usize, chains: usize) -> Vec<f64> {
    const CELLS: usize = 20;
    let mut counts: Vec<[f64; CELLS]> = Vec::new();
    for first in (0..chains).step_by(LANES) {
        let mut target = Lockstep::new(law, LANES);
        let mut walkers = exact_start(law, &mut target, LANES, first);
        let mut kernel = maker(LANES);
        for _ in 0..steps {
            kernel.step(&mut target, &mut walkers, Phase::Draws);
        }
        for lane in 0..LANES {
            let x = point(&walkers, lane);
            let uniforms = law.uniforms(&x, &mut walkers.streams[lane]);
            counts.resize(uniforms.len(), [0.0; CELLS]);
            for (counts, u) in counts.iter_mut().zip(uniforms) {
                let cell = (u * CELLS as f64) as usize;
                counts[if cell < CELLS { cell } else { CELLS - 1 }] += 1.0;
            }
        }
    }
    counts
        .iter()
        .map(|counts| chi_square_chance(counts))
        .collect()
}

/// The chance of so uneven counts, or more so, in cells of equal probability.
pub fn chi_square_chance(counts: &[f64]) -> f64 {
    let total: f64 = counts.iter().sum();
    let expected = total / counts.len() as f64;
    let mut statistic = 0.0;
    for count in counts {
        statistic += (count - expected) * (count - expected) / expected;
    }
    maths::gamma_q((counts.len() - 1) as f64 / 2.0, statistic / 2.0)
}
