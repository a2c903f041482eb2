//! What the engine is to do for one point, as the plan says it.

use super::trail::Digest;
use crate::course::{ChainSeed, Model};
use crate::plan::{self, BurnIn, Plan};
use std::sync::Arc;

/// One chain of a point.
#[derive(Debug, Clone, PartialEq)]
pub struct Chain {
    pub seed: ChainSeed,
    /// Heads the chain's trail.
    pub key: Digest,
}

/// One point of a plan.
#[derive(Clone)]
pub struct Task {
    pub model: Arc<dyn Model>,
    pub chains: Vec<Chain>,
    pub burn_in: BurnIn,
    /// Draws a chain at which the goal is reviewed, rising; the run ends at the last of them at the latest.
    /// One entry when no goal is set.
    pub reviews: Vec<u64>,
    /// Draws in a block.
    pub block: u64,
}

impl Task {
    /// The tasks of a plan, in the order of its points.
    pub fn all(plan: &Plan) -> Vec<Task> {
        (0..plan.points.len())
            .map(|point| Task::of(plan, point))
            .collect()
    }

    fn of(plan: &Plan, index: usize) -> Task {
        let point = &plan.points[index];
        let chain = |chain: u64| Chain {
            seed: ChainSeed {
                chain: chain as usize,
                stream_key: plan.stream_key(index, chain),
            },
            key: plan.chain_key(index, chain),
        };
        Task {
            model: point.model.clone(),
            chains: (0..point.ensemble.chains).map(chain).collect(),
            burn_in: point.ensemble.burn_in,
            reviews: plan::reviews(&point.ensemble, point.goal.as_ref(), point.block),
            block: point.block,
        }
    }
}
