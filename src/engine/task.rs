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

    /// The task of one point.
    pub fn of(plan: &Plan, index: usize) -> Task {
        let point = &plan.points[index];
        let all = 0..point.ensemble.chains;
        let stream_keys = plan.stream_keys(index, all.clone());
        let keys = plan.chain_keys(index, all);
        let chains = stream_keys.into_iter().zip(keys).enumerate();
        Task {
            model: point.model.clone(),
            chains: chains
                .map(|(chain, (stream_key, key))| Chain {
                    seed: ChainSeed { chain, stream_key },
                    key,
                })
                .collect(),
            burn_in: point.ensemble.burn_in,
            reviews: plan::reviews(&point.ensemble, point.goal.as_ref(), point.block),
            block: point.block,
        }
    }
}
