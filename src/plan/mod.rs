//! The study resolved: no default left unsaid; canonical form and keys.

mod block;
mod identity;
mod json;
mod types;

#[cfg(test)]
pub(crate) use identity::tests::plan as sample;

pub use block::{block_length, reviews};
pub use types::{
    Accepted, BurnIn, CHECKPOINT_BYTES, Closed, Combine, Data, Ensemble, Estimand, EstimandGoal,
    Give, Goal, Input, Keep, MOST_DRAWS, NUMERICS, Numerics, Plan, Point, Prediction, Streams,
    SweepAxis,
};
