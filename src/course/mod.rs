//! Course, Target, Block, Condition, Standing; how a family declares itself and reads its section.

mod conditions;
mod family;

pub use conditions::CONDITIONS;
pub use family::{EstimandSpec, Family, Request, StartSpec};

use crate::canon::Json;
use std::sync::Arc;

/// Burn-in (kernels may adapt) or draws (nothing adapts).
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Phase {
    BurnIn,
    Draws,
}

/// A run of consecutive draws of one chain.
#[derive(Debug, Clone, PartialEq)]
pub struct Block {
    pub draws: usize,
    /// Draw `i` of quantity `q` is at `q * draws + i`. NaN is canonical.
    pub values: Vec<f64>,
}

/// The exact state of a chain between two draws, each part in declared field order, little-endian.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct State {
    /// What must not change after burn-in: adapted scales and covariances.
    pub frozen: Vec<u8>,
    /// Position, generator state, counts.
    pub moving: Vec<u8>,
}

/// One or several chains under way, in lockstep. How many can't be seen in any digit.
pub trait Course: Send {
    /// Chains carried.
    fn chains(&self) -> usize;
    /// Advances every chain by `draws` draws and gives a block for each, in chain order. With
    /// [`Phase::Draws`] nothing adapts.
    fn advance(&mut self, phase: Phase, draws: usize) -> Vec<Block>;
    /// The exact state of one chain.
    fn save(&self, chain: usize) -> State;
    /// Puts one chain into a saved state. Fails with words for the reader when the bytes do not fit.
    fn load(&mut self, chain: usize, state: &State) -> Result<(), String>;
    /// Counts and rates for the reader (acceptance rate of a kernel …) of one chain since the start of
    /// the draws. Outside every digest.
    fn notes(&self, chain: usize) -> Vec<(String, f64)>;
}

/// A quantity recorded at every draw: one element of an estimand.
#[derive(Debug, Clone, PartialEq)]
pub struct Quantity {
    /// `rate["Cawdle"]`, `a`, `beta[2]`
    pub name: String,
    pub unit: Option<String>,
    /// A condition: its mean is a probability, recorded as 0 and 1.
    pub condition: bool,
    /// Index of the estimand it belongs to.
    pub estimand: usize,
}

/// Why a start could not be made.
#[derive(Debug, Clone, PartialEq)]
pub struct StartFault(pub String);

/// Model, sampler and estimands of one point of a study, resolved: what builds courses.
pub trait Model: Send + Sync {
    /// `model`, `sampler`, `start`, each in canonical form with every default said: the part under the
    /// stream key.
    fn canonical(&self) -> Json;
    /// The recorded quantities, in order.
    fn quantities(&self) -> &[Quantity];
    /// Estimated arithmetic operations a draw, from the plan alone.
    fn cost(&self) -> f64;
    /// Bytes of a chain's saved state, about.
    fn state_size(&self) -> usize;
    /// Chains with these stream keys, at their starts, in lockstep.
    fn course(self: Arc<Self>, chains: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault>;
    /// The conditions that the family and its kernels can speak about before any draw.
    fn conditions(&self) -> Vec<Condition>;
    /// Sentences about choices made for the reader (why this kernel).
    fn reasons(&self) -> Vec<String>;
}

/// How far a condition can be relied on.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Standing {
    Proved,
    ByConstruction,
    NotContradicted,
    Assumed,
    NotKnown,
    Failed,
}

/// A condition that a claim rests on, with its standing and the evidence in words.
#[derive(Debug, Clone, PartialEq)]
pub struct Condition {
    /// `finite mass`, `invariant`, `irreducible`, `integrable` …
    pub name: &'static str,
    pub standing: Standing,
    pub evidence: String,
}

/// A target on `dimension` continuous coordinates (unconstrained) and integer coordinates, evaluated for
/// several chains in lockstep. Layout of positions: coordinate `c` of lane `l` is at `c * lanes + l`.
pub trait Target: Send {
    fn lanes(&self) -> usize;
    fn coordinates(&self) -> &[Coordinate];
    /// Log density (up to a constant, Jacobians included) of each lane; NaN never: a density that cannot be
    /// computed is minus infinity. Each lane's bits depend on that lane's position alone.
    fn log_density(&mut self, position: &[f64], out: &mut [f64]);
}

/// One coordinate of a target.
#[derive(Debug, Clone, PartialEq)]
pub struct Coordinate {
    /// `rate["Cawdle"]`
    pub name: String,
    /// Index of the unknown it belongs to.
    pub unknown: usize,
    pub kind: CoordinateKind,
}

#[derive(Debug, Clone, Copy, PartialEq)]
pub enum CoordinateKind {
    /// Any real number; the transform to the unknown's support is inside the target.
    Real,
    /// A whole number between these bounds (`None`: unbounded), held as a double.
    Integer {
        lower: Option<i64>,
        upper: Option<i64>,
    },
}

/// What one chain needs to begin.
#[derive(Debug, Clone, PartialEq)]
pub struct ChainSeed {
    /// Index of the chain in its ensemble, from 0 (a start file has one row a chain).
    pub chain: usize,
    pub stream_key: [u8; 32],
}
