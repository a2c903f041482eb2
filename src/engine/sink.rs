//! What the engine asks of the place it hands blocks to, and what it tells the onlooker.

use super::trail::{Digest, StateHash};
use crate::course::{Phase, State};
use std::sync::Arc;

/// A whole block of one chain, hashed and linked.
#[derive(Debug, Clone)]
pub struct Finished {
    pub point: usize,
    pub chain: usize,
    /// From 1, burn-in and draws counted together.
    pub number: u64,
    pub phase: Phase,
    pub draws: usize,
    /// Quantity-major little-endian doubles; see [`super::trail::payload`].
    pub payload: Vec<u8>,
    pub draws_digest: Digest,
    /// The state after it; `None` of a block that an earlier run drew and whose state it did not keep.
    pub state: Option<State>,
    pub state_hash: StateHash,
    pub link: Digest,
}

/// Where the journal keeps a block; means nothing to the engine.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Mark(pub u64);

/// A block that stands in the journal from an earlier start.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Stood {
    pub phase: Phase,
    pub draws: usize,
    pub draws_digest: Digest,
    pub state_hash: StateHash,
    pub link: Digest,
    pub mark: Mark,
    /// Whether the state after this block is kept.
    pub kept: bool,
    /// Where the frozen part of the state after this block is kept.
    pub frozen: Mark,
}

/// The journal as the engine sees it. Every failure is words for the reader: what could not be done, and why.
pub trait Journal {
    /// The blocks of a chain that stand already, in order from number 1. Asked once for each chain.
    fn standing(&mut self, point: usize, chain: usize) -> Vec<Stood>;
    /// Appends a block.
    fn append(&mut self, block: &Finished) -> Result<Mark, String>;
    /// Everything appended is on the disk when this returns.
    fn sync(&mut self) -> Result<(), String>;
    /// Reads blocks back, from any thread, while others are appended.
    fn reader(&self) -> Arc<dyn Reader>;
}

/// Reads back from the journal.
pub trait Reader: Send + Sync {
    /// Appends the draws of one quantity of a block to `into`.
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String>;
    /// The state after a block that stood and whose state is kept.
    fn state(&self, block: &Stood) -> Result<State, String>;
}

/// What happens, for the onlooker. Nothing that is computed depends on it.
#[derive(Debug, Clone, PartialEq)]
pub enum Event {
    /// The run is set up: `threads` at work, `lanes` at most in lockstep.
    Begun {
        points: usize,
        threads: usize,
        lanes: usize,
    },
    /// A point is about to draw.
    PointBegun {
        point: usize,
        chains: usize,
        /// Blocks that stood in the journal.
        stood: u64,
    },
    /// A chain stands after `done` draws of its phase; its next stop is at `target`.
    Advanced {
        point: usize,
        chain: usize,
        phase: Phase,
        done: u64,
        target: u64,
        /// Draws computed since the chain's last event (none for blocks that stood).
        fresh: u64,
    },
    /// A review is under way.
    Reviewing {
        point: usize,
        phase: Phase,
        draws: u64,
    },
    /// A review of the burn-in: in words, how far the chains agree over its last half.
    BurnInReviewed {
        point: usize,
        draws: u64,
        words: String,
        settled: bool,
    },
    /// A review of the goal.
    Reviewed {
        point: usize,
        draws: u64,
        /// In words: the worst figures against the goal.
        standing: String,
        met: bool,
    },
    PointDone {
        point: usize,
    },
}

/// Takes whole blocks and events. The engine calls it from one thread only, the one that called the engine.
pub trait Sink: Journal {
    fn event(&mut self, event: &Event);
}
