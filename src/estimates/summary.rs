//! What one point of a study says: its figures, beside how they came about.

use super::Estimate;
use crate::canon::Json;
use crate::plan::Give;

/// One line of a point's results: a quantity and its estimate.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// `rate["Cawdle"]`
    pub name: String,
    pub unit: Option<String>,
    /// A condition: the value is a probability.
    pub condition: bool,
    /// What the study asks to see of it.
    pub give: Vec<Give>,
    pub estimate: Estimate,
}

/// Whether the goal of a point was reached.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum GoalState {
    Met,
    Missed,
    /// The study states no goal.
    None,
}

impl GoalState {
    /// As written in `summary.json`.
    pub fn word(self) -> &'static str {
        match self {
            GoalState::Met => "met",
            GoalState::Missed => "missed",
            GoalState::None => "none",
        }
    }
}

/// The results of one point.
#[derive(Debug, Clone, PartialEq)]
pub struct Summary {
    /// The key of the point in the plan.
    pub key: String,
    /// The swept values with their dotted paths, in the order of the axes; empty without a sweep.
    pub values: Vec<(String, Json)>,
    pub chains: usize,
    pub draws_per_chain: u64,
    /// Draws a chain that were made before and left out.
    pub burn_in: u64,
    pub goal: GoalState,
    /// One sentence on what limits the goal and what would reach it.
    pub advice: Option<String>,
    pub figures: Vec<Figure>,
}
