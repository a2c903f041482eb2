//! Differences between two runs driven by the same random numbers: draw by draw and chain by chain, so that the
//! noise that both have in common cancels (common random numbers; Glasserman & Yao 1992). The error is that of
//! the mean of the differences, by batch means and autocorrelations like any other.

use super::estimate::{Estimate, estimate};
use super::note::Note;

/// The difference of two means, the second less the first.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Difference {
    pub value: Option<f64>,
    /// Monte Carlo standard error of the difference.
    pub mcse: Option<f64>,
    /// Why one of them does not exist, or what to know before believing it.
    pub notes: Vec<Note>,
}

/// One quantity of one of the two runs: its draws, chain by chain, and what they say alone.
pub struct Side<'a> {
    pub chains: &'a [&'a [f64]],
    pub estimate: &'a Estimate,
}

/// The mean of `second` less that of `first`. Chain c of one is driven by the random numbers of chain c of the
/// other. Where the chains of either disagree, there is no error: both may stray together, and their difference
/// would not show it. Where either has no mean, there is no difference.
///
/// # Panics
/// When the two differ in the number of chains or draws.
pub fn paired_difference(first: &Side, second: &Side) -> Difference {
    assert_eq!(first.chains.len(), second.chains.len(), "as many chains");
    let own = [first.estimate, second.estimate];
    if let Some(without) = own.iter().find(|e| e.value.is_none()) {
        return Difference {
            notes: without.notes.clone(),
            ..Difference::default()
        };
    }
    let pairs = first.chains.iter().zip(second.chains);
    let draws: Vec<Vec<f64>> = pairs
        .map(|(a, b)| {
            assert_eq!(a.len(), b.len(), "as many draws");
            a.iter().zip(*b).map(|(a, b)| b - a).collect()
        })
        .collect();
    let chains: Vec<&[f64]> = draws.iter().map(Vec::as_slice).collect();
    let found = estimate(&chains, false, &[]);
    let mut difference = Difference {
        value: found.value,
        mcse: found.mcse,
        notes: found.notes,
    };
    for e in own.iter().filter(|e| e.chains_disagree()) {
        difference.mcse = None;
        for note in e.notes.iter().filter(|note| note.is_disagreement()) {
            if !difference.notes.contains(note) {
                difference.notes.push(note.clone());
            }
        }
    }
    difference
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::maths::{absolute, normal_quantile};
    use crate::random::{Purpose, Stream};

    const CHAINS: usize = 8;
    const DRAWS: usize = 4000;
    const RHO: f64 = 0.6;
    /// Spread of what both points have in common, and of what each has of its own.
    const COMMON: f64 = 3.0;
    const OWN: f64 = 0.25;
    const SHIFT: f64 = 0.125;

    /// A stationary autoregressive chain of variance 1.
    fn walk(seed: u8, part: u8, chain: usize) -> Vec<f64> {
        let mut key = [seed; 32];
        (key[0], key[1]) = (chain as u8, part);
        let mut stream = Stream::new(&key, Purpose::Test);
        let mut normal = || normal_quantile(stream.open());
        let mut x = normal();
        let step = (1.0 - RHO * RHO).sqrt();
        (0..DRAWS)
            .map(|_| {
                x = RHO * x + step * normal();
                x
            })
            .collect()
    }

    /// Two points: `sign` times a common part, a part of its own each, the second shifted.
    fn points(seed: u8, sign: f64) -> [Vec<Vec<f64>>; 2] {
        let point = |part: u8, sign: f64, shift: f64| {
            (0..CHAINS)
                .map(|chain| {
                    let common = walk(seed, 0, chain);
                    let own = walk(seed, part, chain);
                    let both = common.iter().zip(&own);
                    both.map(|(c, o)| shift + sign * COMMON * c + OWN * o)
                        .collect()
                })
                .collect()
        };
        [point(1, 1.0, 0.0), point(2, sign, SHIFT)]
    }

    fn views(chains: &[Vec<f64>]) -> Vec<&[f64]> {
        chains.iter().map(Vec::as_slice).collect()
    }

    fn compare(first: &[Vec<f64>], second: &[Vec<f64>]) -> (Difference, f64) {
        let (first, second) = (views(first), views(second));
        let alone = [&first, &second].map(|chains| estimate(chains, false, &[]));
        let [a, b] = alone.each_ref().map(|e| e.mcse.unwrap());
        let difference = paired_difference(
            &Side {
                chains: &first,
                estimate: &alone[0],
            },
            &Side {
                chains: &second,
                estimate: &alone[1],
            },
        );
        (difference, (a * a + b * b).sqrt())
    }

    /// The error that theory gives for a mean of `CHAINS` x `DRAWS` draws of this spread.
    fn theory(spread: f64) -> f64 {
        spread * ((1.0 + RHO) / (1.0 - RHO) / (CHAINS * DRAWS) as f64).sqrt()
    }

    /// The mean of squared errors over replications meets theory, and so do the differences themselves; errors
    /// taken apart, or chains paired with others' chains, do not.
    #[test]
    fn what_is_common_cancels() {
        const RUNS: u8 = 20;
        let wanted = theory(OWN * 2.0_f64.sqrt());
        let (mut paired, mut apart, mut crossed, mut off) = (0.0, 0.0, 0.0, 0.0);
        for seed in 1..=RUNS {
            let [first, second] = points(seed, 1.0);
            let (difference, unpaired) = compare(&first, &second);
            let (value, error) = (difference.value.unwrap(), difference.mcse.unwrap());
            paired += error * error;
            apart += unpaired * unpaired;
            off += (value - SHIFT) * (value - SHIFT);
            let mut turned = second.clone();
            turned.rotate_left(1);
            let error = compare(&first, &turned).0.mcse.unwrap();
            crossed += error * error;
        }
        let runs = f64::from(RUNS);
        let meets = |squares: f64, tolerance: f64| {
            let ratio = (squares / runs).sqrt() / wanted;
            (1.0 - tolerance..1.0 + tolerance).contains(&ratio)
        };
        // The larger of two estimates with some 160 batches each: about 6 % each, a little above 1 on average.
        assert!(meets(paired, 0.15), "{} {wanted}", (paired / runs).sqrt());
        // The root of a mean of 20 squares: 1 / sqrt(40) = 16 %; four of them would be no test, three are.
        assert!(meets(off, 0.48), "{} {wanted}", (off / runs).sqrt());
        // Planted faults: sqrt(2 (9 + 1/16)) over sqrt(2/16), 12 times too large.
        for fault in [apart, crossed] {
            let ratio = (fault / runs).sqrt() / wanted;
            assert!(absolute(ratio / 12.04 - 1.0) < 0.15, "{ratio}");
        }
    }

    /// Where the common noise works against itself, errors taken apart would be too small.
    #[test]
    fn what_is_opposite_adds_up() {
        let [first, second] = points(3, -1.0);
        let (difference, unpaired) = compare(&first, &second);
        let wanted = theory((4.0 * COMMON * COMMON + 2.0 * OWN * OWN).sqrt());
        let error = difference.mcse.unwrap();
        assert!(absolute(error / wanted - 1.0) < 0.25, "{error} {wanted}");
        assert!(unpaired < 0.85 * wanted, "{unpaired} {wanted}");
    }

    /// Chains that stray alike at both points have a difference that looks well; it has no error.
    #[test]
    fn chains_that_disagree_alike_have_no_error() {
        let [mut first, mut second] = points(4, 1.0);
        for point in [&mut first, &mut second] {
            point[2].iter_mut().for_each(|x| *x += 50.0);
        }
        let (first, second) = (views(&first), views(&second));
        let alone = [&first, &second].map(|chains| estimate(chains, false, &[]));
        let side = |chains, estimate| Side { chains, estimate };
        let found = paired_difference(&side(&first, &alone[0]), &side(&second, &alone[1]));
        assert!(found.value.is_some() && found.mcse.is_none());
        assert!(found.notes.iter().any(Note::is_disagreement));
    }
}
