//! What one point of a study says: its figures, beside how they came about.

use super::{Difference, Estimate};
use crate::canon::Json;
use crate::plan::{EstimandGoal, Give};

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
    /// Its own goal, beside that of the run.
    pub goal: Option<EstimandGoal>,
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
    /// With shared streams: this point beside the first.
    pub paired: Option<Paired>,
}

/// A point beside the first one of a sweep whose points share their random numbers.
#[derive(Debug, Clone, PartialEq)]
pub struct Paired {
    /// The key of the first point that has figures.
    pub first: String,
    /// One a figure, `None` for a quantity that the first point does not have or whose value was not asked
    /// for; or why there are none at all.
    pub differences: Result<Vec<Option<Difference>>, String>,
}

/// The quantiles that an estimand's figures need, each once, ascending.
pub fn levels(give: &[Give]) -> Vec<f64> {
    let mut levels: Vec<f64> = Vec::new();
    for wanted in give {
        match wanted {
            Give::Value | Give::Uncertainty => {}
            Give::Quantile(level) => levels.push(tidy(*level)),
            Give::Interval(part) => levels.extend(ends(*part)),
        }
    }
    levels.sort_by(f64::total_cmp);
    levels.dedup();
    levels
}

/// The levels at the ends of the central interval of a probability: 0.025 and 0.975 of 0.95.
pub fn ends(part: f64) -> [f64; 2] {
    [tidy((1.0 - part) / 2.0), tidy((1.0 + part) / 2.0)]
}

/// The nearest decimal of fifteen places, so that a level computed in binary is the one a reader would write.
fn tidy(level: f64) -> f64 {
    format!("{level:.15}").parse().unwrap_or(level)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn levels_are_those_a_reader_would_write() {
        let give = [
            Give::Value,
            Give::Quantile(0.5),
            Give::Interval(0.95),
            Give::Interval(0.9),
            Give::Quantile(0.05),
        ];
        assert_eq!(levels(&give), [0.025, 0.05, 0.5, 0.95, 0.975]);
        assert_eq!(levels(&[Give::Value, Give::Uncertainty]), [0.0; 0]);
    }
}
