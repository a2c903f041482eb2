//! How long a block is, and after which draws a goal is reviewed: from the plan alone.

use crate::plan::{Ensemble, Goal};

/// A block of draws of one chain should cost about this many arithmetic operations (at a nanosecond an
/// operation, a tenth of a second).
const OPERATIONS: f64 = 1e8;
const SHORTEST: u64 = 100;
/// So long only where a state takes much room: it is by blocks that a run is audited, and a long run should have
/// hundreds of them.
const LONGEST: u64 = SHORTEST << 10;
const LONGEST_BY_COST: u64 = SHORTEST << 6;
/// Blocks at least, up to the first review, so that a run interrupted before it loses little.
const BEFORE_FIRST_REVIEW: u64 = 8;
/// A saved state may be this part of the bytes of the draws beside it.
const STATE_PART: f64 = 1.0 / 16.0;

/// Bytes of the draws in a block of one chain, at most: as many chains as run in lockstep, and blocks on their way to
/// the journal beside them, are in memory at a time.
const MOST_BYTES: u64 = 32 << 20;

/// Draws in a block, for a draw of `cost` operations and `quantities` recorded values, a saved state of
/// `state_size` bytes, and a first review after `draws` draws.
///
/// The tenth of a second decides, within 100 to 6,400 draws; then at least 8 blocks up to the first
/// review, where blocks of 100 draws allow it; then long enough that states take little room beside draws.
/// It is 100 times a power of two, so that small changes of a study leave its blocks as they are, but never
/// more than the draws up to the first review, nor more than 32 MB of draws, down to a power of two under 100 where
/// very many quantities are recorded.
pub fn block_length(cost: f64, quantities: usize, state_size: usize, draws: u64) -> u64 {
    let by_cost = OPERATIONS / if cost > 1.0 { cost } else { 1.0 };
    let mut length = whole(by_cost).clamp(SHORTEST, LONGEST_BY_COST);
    let by_review = (draws / BEFORE_FIRST_REVIEW).max(SHORTEST);
    length = length.min(by_review);
    let draw_bytes = 8.0 * quantities.max(1) as f64;
    let by_state = whole(state_size as f64 / (draw_bytes * STATE_PART)).min(LONGEST);
    length = length.max(by_state);
    let doublings = (length / SHORTEST).ilog2();
    let length = (SHORTEST << doublings).min(draws).max(1);
    let by_bytes = (MOST_BYTES / (8 * quantities.max(1) as u64)).max(1);
    if length <= by_bytes {
        length
    } else if by_bytes < SHORTEST {
        1 << by_bytes.ilog2()
    } else {
        SHORTEST << (by_bytes / SHORTEST).ilog2()
    }
}

fn whole(x: f64) -> u64 {
    // A cast of a float saturates: NaN gives 0, infinity the largest.
    x.floor() as u64
}

/// Draws a chain at each review, the last being the last that may be done: `ensemble.draws`, then half as
/// much again each time, rounded up to whole blocks, up to `goal.at_most`. Without a goal, one entry.
///
/// All but the first and the last are whole numbers of blocks.
pub fn reviews(ensemble: &Ensemble, goal: Option<&Goal>, block: u64) -> Vec<u64> {
    let first = ensemble.draws;
    let Some(goal) = goal else {
        return vec![first];
    };
    let last = goal.at_most.max(first);
    let mut reviews = vec![first];
    let mut at = first;
    while at < last {
        let next = (at + at / 2)
            .max(at + 1)
            .div_ceil(block)
            .saturating_mul(block);
        at = next.min(last);
        reviews.push(at);
    }
    reviews
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::plan::BurnIn;
    use proptest::prelude::*;

    #[test]
    fn blocks_of_a_tenth_of_a_second() {
        // A draw of 100 µs and a first review far off: the cost decides.
        assert_eq!(block_length(1e5, 10, 200, 1_000_000), 800);
        // Cheap draws: the longest block; the first review after 8 blocks.
        assert_eq!(block_length(100.0, 10, 200, 10_000_000), 6400);
        assert_eq!(block_length(100.0, 10, 200, 4000), 400);
        // Dear draws: the shortest, and never more than are asked for.
        assert_eq!(block_length(1e9, 10, 200, 4000), 100);
        assert_eq!(block_length(1e9, 10, 200, 30), 30);
        // A large state beside few quantities: longer, so that states do not fill the disk.
        assert_eq!(block_length(1e9, 1, 8000, 100_000), 12_800);
        assert_eq!(block_length(f64::NAN, 0, 0, 4000), 400);
        assert_eq!(block_length(f64::INFINITY, 0, usize::MAX, 1), 1);
    }

    #[test]
    fn blocks_of_very_many_quantities_are_bounded_in_bytes() {
        for (quantities, state, length) in [
            (40_000, 0, 100),
            (100_000, 0, 32),
            (1_000_000, 0, 4),
            (10_000_000, 0, 1),
            // Cheap draws, and a large state: the bound holds against both.
            (100, 1 << 40, 25_600),
            (10_000, 1 << 40, 400),
        ] {
            let found = block_length(100.0, quantities, state, 10_000_000);
            assert_eq!(found, length, "{quantities} {state}");
        }
    }

    fn ensemble(draws: u64) -> Ensemble {
        Ensemble {
            chains: 1,
            burn_in: BurnIn::Fixed(0),
            draws,
            every: 1,
        }
    }

    fn goal(at_most: u64) -> Goal {
        Goal {
            error: None,
            r_hat: 1.01,
            effective: 100.0,
            at_most,
        }
    }

    #[test]
    fn reviews_grow_by_half() {
        assert_eq!(reviews(&ensemble(2000), None, 250), [2000]);
        assert_eq!(
            reviews(&ensemble(2000), Some(&goal(12_000)), 250),
            [2000, 3000, 4500, 6750, 10_250, 12_000]
        );
        assert_eq!(reviews(&ensemble(2000), Some(&goal(2000)), 250), [2000]);
    }

    proptest! {
        #[test]
        fn any_plan_has_sane_blocks_and_reviews(
            cost in prop::num::f64::ANY,
            quantities in 0_usize..10_000_000,
            state in 0_usize..1_000_000_000,
            draws in 1_u64..1 << 53,
            more in 0_u64..1 << 53,
        ) {
            let block = block_length(cost, quantities, state, draws);
            prop_assert!((1..=LONGEST).contains(&block) && block <= draws);
            prop_assert!(block == 1 || block * 8 * quantities as u64 <= MOST_BYTES);
            let reviews = reviews(&ensemble(draws), Some(&goal(draws.saturating_add(more))), block);
            prop_assert_eq!(reviews[0], draws);
            prop_assert_eq!(reviews[reviews.len() - 1], draws.saturating_add(more));
            prop_assert!(reviews.windows(2).all(|pair| pair[0] < pair[1]));
            prop_assert!(reviews.len() < 150);
            for review in &reviews[1..reviews.len().max(2) - 1] {
                prop_assert_eq!(review % block, 0);
            }
        }
    }
}
