//! Points x chains x blocks over threads; reviews, stop reasons, resume; events and blocks go to the sink
//! that the engine declares.
//!
//! - [`conduct`] runs every [`Task`] (a point of the plan) to its end. Its workers compute blocks, hash
//!   them and hand them over a bounded channel; they never print and never write.
//! - [`Sink`] takes blocks and events; [`Reader`] gives draws back at reviews, so that memory while running
//!   does not grow with the draws.
//! - [`Judge`] decides at reviews from the draws alone.
//! - [`trail`] is the hash chain over a chain's blocks.
//!
//! Reviews fall on block ends that follow from the plan, and no chain goes past a review before it is
//! judged; so all chains of a point stop at the same draw, whatever the threads and lanes.

mod active;
mod blocks;
mod columns;
mod conduct;
mod halt;
mod judge;
mod lanes;
mod paired;
mod review;
mod sink;
mod standing;
mod task;
#[cfg(test)]
mod tests;
#[cfg(test)]
pub(crate) mod toy;
pub mod trail;
mod walk;

pub use blocks::{blocks, burn_in_reviews};
pub use columns::{Columns, Ledger};
pub use conduct::{Ended, Orders, PointEnd, conduct};
pub use halt::Halt;
pub use judge::{Judge, Settling, Verdict};
pub use lanes::WIDEST;
pub use paired::paired;
pub use review::{PlanJudge, Reviewed, summary};
pub use sink::{Event, Finished, Journal, Mark, Reader, Sink, Stood};
pub use standing::common;
pub use task::{Chain, Task};
