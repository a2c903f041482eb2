//! Kernels on a Target: Metropolis, slice, full conditional; adaptation; cycles and mixtures.
//!
//! [`Sampler`] is the `[sampler]` section resolved; [`Sampler::kernel`] builds the [`Kernel`] that makes
//! one draw's step for several chains in lockstep, on [`Walkers`].

mod choose;
mod combine;
mod conditional;
mod conditions;
mod covariance;
mod declaration;
mod gain;
mod integer_walk;
mod kernel;
mod lockstep;
mod random_walk;
mod read;
mod sampler;
mod saved;
mod slice;
mod walkers;

pub use combine::{Cycle, Mixture, Repeat};
pub use conditional::Conditional;
pub use declaration::{Choice, Method, find, table};
pub use integer_walk::IntegerWalk;
pub use kernel::Kernel;
pub use random_walk::{Adapt, RandomWalk};
pub use read::read;
pub use sampler::{Move, Sampler, Settings, Step};
pub use saved::Reader;
pub use slice::Slice;
pub use walkers::Walkers;
