//! Who decides at reviews whether a point goes on.

use super::columns::Columns;
use std::sync::atomic::AtomicBool;

/// What a review of the burn-in found.
#[derive(Debug, Clone, PartialEq)]
pub struct Settling {
    /// The worst R-hat of all quantities, where one exists.
    pub r_hat: Option<f64>,
    pub settled: bool,
    /// How far the quantities agree, the one that holds it up by name.
    pub words: String,
}

/// What a review of the draws found.
#[derive(Debug, Clone, PartialEq)]
pub struct Verdict<F> {
    /// `None` when the point has no goal.
    pub met: Option<bool>,
    /// The worst figures against the goal, in a few words.
    pub standing: String,
    pub figures: F,
}

/// Decides at reviews, from the draws alone. Called on the engine's threads; may use all of them.
pub trait Judge: Sync {
    type Figures: Send;
    /// Whether the chains agree over the given part of the burn-in.
    fn burn_in(&self, point: usize, columns: &Columns) -> Result<Settling, String>;
    /// The figures over all draws so far, and whether they meet the goal. May give up with any words once
    /// `quit` is set.
    fn review(
        &self,
        point: usize,
        columns: &Columns,
        quit: &AtomicBool,
    ) -> Result<Verdict<Self::Figures>, String>;
}
