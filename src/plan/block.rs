//! How long a block is, and after which draws a goal is reviewed: from the plan alone.

use crate::plan::{Ensemble, Goal};

/// A block of draws of one chain should cost about this many arithmetic operations (at a nanosecond an
/// operation, a tenth of a second).
const OPERATIONS: f64 = 1e8;
const SHORTEST: u64 = 100;
const LONGEST: u64 = 100_000;
/// Blocks at least, up to the first review, so that a run interrupted before it loses little.
const BEFORE_FIRST_REVIEW: u64 = 8;
/// A saved state may be this part of the bytes of the draws beside it.
const STATE_PART: f64 = 1.0 / 16.0;

/// Draws in a block, for a draw of `cost` operations and `quantities` recorded values, a saved state of
/// `state_size` bytes, and a first review after `draws` draws.
///
/// The tenth of a second decides, within 100 to 100,000 draws; then at least 8 blocks up to the first
/// review, where blocks of 100 draws allow it; then long enough that states take little room beside draws,
/// as far as one block up to the first review.
pub fn block_length(cost: f64, quantities: usize, state_size: usize, draws: u64) -> u64 {
    let by_cost = OPERATIONS / if cost > 1.0 { cost } else { 1.0 };
    let mut length = whole(by_cost).clamp(SHORTEST, LONGEST);
    let by_review = (draws / BEFORE_FIRST_REVIEW).max(SHORTEST);
    length = length.min(by_review);
    let draw_bytes = 8.0 * quantities.max(1) as f64;
    let by_state = whole(state_size as f64 / (draw_bytes * STATE_PART)).min(LONGEST);
    length = length.max(by_state);
    length.min(draws).max(1)
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
