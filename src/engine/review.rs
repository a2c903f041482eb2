//! The judge that follows a plan: estimates of every quantity from the journal, one quantity at a time,
//! against the goal.

use super::columns::Columns;
use super::conduct::PointEnd;
use super::judge::{Judge, Settling, Verdict};
use crate::canon;
use crate::course::Quantity;
use crate::estimates::{self, Estimate, Figure, GoalState, Summary};
use crate::plan::{Plan, Point};
use rayon::prelude::*;
use std::sync::atomic::{AtomicBool, Ordering};

/// A self-chosen burn-in ends once every R-hat over its last half is under this.
const BURN_IN_R_HAT: f64 = 1.05;
/// Bytes that the estimates of quantities side by side may take.
const MEMORY: usize = 1 << 30;
/// Copies of a quantity's draws that its estimate makes, about.
const COPIES: usize = 8;

/// Judges by what a plan asks for.
pub struct PlanJudge<'a> {
    plan: &'a Plan,
}

/// What a review leaves when it is the last.
#[derive(Debug, Clone, PartialEq)]
pub struct Reviewed {
    pub figures: Vec<Figure>,
    /// What limits the goal, and what would reach it.
    pub advice: Option<String>,
}

impl<'a> PlanJudge<'a> {
    pub fn new(plan: &'a Plan) -> PlanJudge<'a> {
        PlanJudge { plan }
    }

    /// One estimate a quantity, in order.
    fn estimates(
        &self,
        point: &Point,
        columns: &Columns,
        quit: &AtomicBool,
    ) -> Result<Vec<Estimate>, String> {
        let quantities = point.model.quantities();
        let one = |(index, quantity): (usize, &Quantity)| {
            if quit.load(Ordering::Relaxed) {
                return Err("interrupted".to_owned());
            }
            let draws = columns.quantity(index)?;
            let chains: Vec<&[f64]> = draws.iter().map(Vec::as_slice).collect();
            let levels = estimates::levels(&point.estimands[quantity.estimand].give);
            Ok(estimates::estimate(&chains, quantity.condition, &levels))
        };
        let mut all = Vec::with_capacity(quantities.len());
        let indexed: Vec<_> = quantities.iter().enumerate().collect();
        for some in indexed.chunks(side_by_side(columns)) {
            let some: Result<Vec<_>, String> = some
                .par_iter()
                .map(|(i, quantity)| one((*i, quantity)))
                .collect();
            all.extend(some?);
        }
        estimates::settle(&mut all);
        Ok(all)
    }
}

/// Quantities whose draws fit in memory together.
fn side_by_side(columns: &Columns) -> usize {
    let each = columns.chains() * columns.draws() * 8 * COPIES;
    (MEMORY / each.max(1)).max(1)
}

impl Judge for PlanJudge<'_> {
    type Figures = Reviewed;

    fn burn_in(&self, point: usize, columns: &Columns) -> Result<Settling, String> {
        let count = self.plan.points[point].model.quantities().len();
        let mut worst: Option<f64> = None;
        let mut settled = true;
        let all: Vec<usize> = (0..count).collect();
        for some in all.chunks(side_by_side(columns)) {
            let some: Result<Vec<_>, String> = some
                .par_iter()
                .map(|quantity| columns.quantity(*quantity).map(agreement))
                .collect();
            for agreement in some? {
                match agreement {
                    Agreement::RHat(r_hat) => {
                        settled &= r_hat < BURN_IN_R_HAT;
                        if worst.is_none_or(|worst| r_hat > worst) {
                            worst = Some(r_hat);
                        }
                    }
                    Agreement::Constant => {}
                    Agreement::None => settled = false,
                }
            }
        }
        Ok(Settling {
            r_hat: worst,
            settled,
        })
    }

    fn review(
        &self,
        index: usize,
        columns: &Columns,
        quit: &AtomicBool,
    ) -> Result<Verdict<Reviewed>, String> {
        let point = &self.plan.points[index];
        let estimates = self.estimates(point, columns, quit)?;
        let figures: Vec<Figure> = point
            .model
            .quantities()
            .iter()
            .zip(estimates)
            .map(|(quantity, estimate)| {
                let estimand = &point.estimands[quantity.estimand];
                Figure {
                    name: quantity.name.clone(),
                    unit: quantity.unit.clone(),
                    condition: quantity.condition,
                    give: estimand.give.clone(),
                    goal: estimand.goal,
                    estimate,
                }
            })
            .collect();
        let verdict = point
            .goal
            .as_ref()
            .map(|goal| estimates::review(&figures, goal));
        let advice = verdict.as_ref().and_then(estimates::Verdict::advice);
        Ok(Verdict {
            met: verdict.map(|verdict| verdict.met),
            standing: advice.clone().unwrap_or_default(),
            figures: Reviewed { figures, advice },
        })
    }
}

/// How far the chains agree about one quantity.
enum Agreement {
    RHat(f64),
    /// Every draw of every chain is the same.
    Constant,
    /// Not to be told: chains that stand still apart, or draws that are not numbers.
    None,
}

fn agreement(draws: Vec<Vec<f64>>) -> Agreement {
    let all = || draws.iter().flatten();
    if all().any(|x| x.is_nan()) {
        return Agreement::None;
    }
    let first = draws.first().and_then(|chain| chain.first());
    if all().all(|x| Some(x) == first) {
        return Agreement::Constant;
    }
    let chains: Vec<&[f64]> = draws.iter().map(Vec::as_slice).collect();
    match estimates::r_hat(&chains).larger() {
        Some(r_hat) => Agreement::RHat(r_hat),
        None => Agreement::None,
    }
}

/// The summary of a point that ended with figures; `None` for one whose chains found no start.
pub fn summary(plan: &Plan, end: &PointEnd<Reviewed>) -> Option<Summary> {
    let ended = end.ended.as_ref().ok()?;
    let point = &plan.points[end.point];
    Some(Summary {
        key: canon::hex(&plan.point_key(end.point)),
        values: point.values.clone(),
        chains: ended.links.len(),
        draws_per_chain: ended.draws,
        burn_in: ended.burn_in,
        goal: match ended.met {
            None => GoalState::None,
            Some(true) => GoalState::Met,
            Some(false) => GoalState::Missed,
        },
        advice: ended.figures.advice.clone(),
        figures: ended.figures.figures.clone(),
    })
}
