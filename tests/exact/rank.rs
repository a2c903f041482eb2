//! The rank test of Gandy & Scott (2020) for reversible kernels: an exact draw is given a random place among
//! `LENGTH` states and the chain run from it both ways; the rank of any function of it is then uniform.

use crate::chains::{LANES, Maker, chi_square_chance, exact_start, point, stream};
use crate::targets::{Law, Lockstep};
use odograph::course::Phase;
use odograph::random::Stream;

pub const LENGTH: usize = 8;

/// The chance of the ranks of `of` seen over so many chains. Ties are broken at random.
pub fn rank_chance(law: &dyn Law, maker: Maker, chains: usize, of: &dyn Fn(&[f64]) -> f64) -> f64 {
    let mut counts = [0.0; LENGTH];
    for first in (0..chains).step_by(LANES) {
        let mut target = Lockstep::new(law, LANES);
        let mut walkers = exact_start(law, &mut target, LANES, first);
        let mut kernel = maker(LANES);
        let centre: Vec<f64> = (0..LANES).map(|lane| of(&point(&walkers, lane))).collect();
        let start = walkers.clone();
        // One walk serves as the past, read backwards, the other as the future.
        let mut walks: Vec<Vec<Vec<f64>>> = Vec::new();
        for _ in 0..2 {
            walkers.position.copy_from_slice(&start.position);
            walkers.log_density.copy_from_slice(&start.log_density);
            let walk = (1..LENGTH).map(|_| {
                kernel.step(&mut target, &mut walkers, Phase::Draws);
                (0..LANES).map(|lane| of(&point(&walkers, lane))).collect()
            });
            walks.push(walk.collect());
        }
        for lane in 0..LANES {
            let mut own = stream(1_000_000_000 + first + lane);
            let past = (own.unit() * LENGTH as f64) as usize;
            let others = walks[0][..past]
                .iter()
                .chain(&walks[1][..LENGTH - 1 - past]);
            let others: Vec<f64> = others.map(|values| values[lane]).collect();
            counts[rank(centre[lane], &others, &mut own)] += 1.0;
        }
    }
    chi_square_chance(&counts)
}

fn rank(value: f64, others: &[f64], stream: &mut Stream) -> usize {
    let below = others.iter().filter(|&&other| other < value).count();
    let ties = others.iter().filter(|&&other| other == value).count();
    below + (stream.unit() * (ties + 1) as f64) as usize
}
