//! Into which blocks a chain is cut: from the plan and how far it went.

use super::task::Task;
use crate::course::Phase;
use crate::plan::BurnIn;

/// Where the next block ends: at the next multiple of the block length, or at the target before it.
pub(super) fn block_end(done: u64, target: u64, block: u64) -> u64 {
    let end = (done / block + 1) * block;
    if end < target { end } else { target }
}

/// The draws a chain in burn-in at which a self-chosen burn-in is looked at, rising.
pub fn burn_in_reviews(burn_in: BurnIn) -> Vec<u64> {
    match burn_in {
        BurnIn::Fixed(draws) => vec![draws],
        BurnIn::Chosen { from, at_most } => {
            let mut reviews = vec![from.min(at_most)];
            while let Some(&last) = reviews.last()
                && last < at_most
            {
                reviews.push(last.saturating_mul(2).min(at_most));
            }
            reviews
        }
    }
}

/// Phase and draws of every block of a chain that went through `burn_in` draws of burn-in and `draws` draws;
/// `None` when no block of this plan ends there.
pub fn blocks(task: &Task, burn_in: u64, draws: u64) -> Option<Vec<(Phase, u64)>> {
    let mut all = Vec::new();
    let phases = [
        (Phase::BurnIn, burn_in_reviews(task.burn_in), burn_in),
        (Phase::Draws, task.reviews.clone(), draws),
    ];
    for (phase, targets, length) in phases {
        let mut done = 0;
        for target in targets {
            while done < target && done < length {
                let end = block_end(done, target, task.block);
                all.push((phase, end - done));
                done = end;
            }
        }
        if done != length {
            return None;
        }
    }
    Some(all)
}

#[cfg(test)]
mod tests {
    use super::super::toy::{Planted, Toy};
    use super::*;

    #[test]
    fn blocks_end_at_multiples_and_at_reviews() {
        use Phase::{BurnIn as B, Draws as D};
        let toy = Toy::new(0.5, Planted::Nothing);
        let chosen = BurnIn::Chosen {
            from: 150,
            at_most: 450,
        };
        let mut task = toy.task(1, 1, chosen, &[250, 400]);
        task.block = 100;
        let cut = blocks(&task, 300, 400).unwrap();
        let wanted = [
            (B, 100),
            (B, 50),
            (B, 50),
            (B, 100),
            (D, 100),
            (D, 100),
            (D, 50),
            (D, 50),
            (D, 100),
        ];
        assert_eq!(cut, wanted);
        assert_eq!(blocks(&task, 300, 250).unwrap(), wanted[..7]);
        assert_eq!(blocks(&task, 310, 250), None);
        assert_eq!(blocks(&task, 300, 500), None);
        assert_eq!(burn_in_reviews(chosen), [150, 300, 450]);
    }
}
