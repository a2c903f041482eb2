//! What every method is to the rest of the house.

use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};

/// A Markov kernel that leaves the target's law invariant, moving several chains in lockstep.
///
/// In [`Phase::BurnIn`] a kernel may adapt, each lane by its own past alone. In [`Phase::Draws`] it adapts
/// nothing, so that every chain is time-homogeneous, and counts what its notes tell.
pub trait Kernel: Send {
    /// Moves every active lane once. `walkers.log_density` holds the target's value at `walkers.position`
    /// before and after.
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase);

    /// Appends a lane's state: to `frozen` what adaptation set (and its accumulators), which no step of
    /// [`Phase::Draws`] changes; to `moving` its counts.
    fn save(&self, lane: usize, state: &mut State);

    /// Takes back what [`Kernel::save`] wrote.
    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String>;

    /// Rates of a lane for the reader, over the draws so far (outside every digest).
    fn notes(&self, lane: usize) -> Vec<(String, f64)>;
}
