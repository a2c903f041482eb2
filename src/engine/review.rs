//! The judge that follows a plan: estimates of every quantity from the journal, one quantity at a time,
//! against the goal.

use super::columns::Columns;
use super::conduct::PointEnd;
use super::judge::{Judge, Settling, Verdict};
use crate::canon;
use crate::course::Quantity;
use crate::estimates::{self, Estimate, Figure, GoalState, Paired, Summary};
use crate::plan::{Plan, Point};
use rayon::prelude::*;
use std::sync::atomic::{AtomicBool, Ordering};

/// A self-chosen burn-in ends once every R-hat over its last half is under this.
const BURN_IN_R_HAT: f64 = 1.05;
/// Bytes that the estimates of quantities side by side may take.
const MEMORY: usize = 448 << 20;
/// Copies of a quantity's draws that its estimate makes, about.
const COPIES: usize = 8;

/// Judges by what a plan asks for.
pub struct PlanJudge<'a> {
    plan: &'a Plan,
}

/// What a review leaves when it is the last.
#[derive(Clone)]
pub struct Reviewed {
    pub figures: Vec<Figure>,
    /// What limits the goal, and what would reach it.
    pub advice: Option<String>,
    /// The draws looked at.
    pub(super) columns: Columns,
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
pub(super) fn side_by_side(columns: &Columns) -> usize {
    let each = columns.chains() * columns.draws() * 8 * COPIES;
    (MEMORY / each.max(1)).max(1)
}

impl Judge for PlanJudge<'_> {
    type Figures = Reviewed;

    fn burn_in(&self, point: usize, columns: &Columns) -> Result<Settling, String> {
        let count = self.plan.points[point].model.quantities().len();
        let mut all = Vec::with_capacity(count);
        let indices: Vec<usize> = (0..count).collect();
        for some in indices.chunks(side_by_side(columns)) {
            let some: Result<Vec<_>, String> = some
                .par_iter()
                .map(|quantity| columns.quantity(*quantity).map(agreement))
                .collect();
            all.extend(some?);
        }
        let names = self.plan.points[point].model.quantities();
        let names: Vec<&str> = names.iter().map(|q| q.name.as_str()).collect();
        Ok(settling(&names, &all))
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
                let mut figure = Figure {
                    name: quantity.name.clone(),
                    unit: quantity.unit.clone(),
                    condition: quantity.condition,
                    give: estimand.give.clone(),
                    goal: estimand.goal,
                    estimate,
                };
                let unjudged = estimates::unjudged(&figure);
                figure.estimate.notes.extend(unjudged);
                figure
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
            figures: Reviewed {
                figures,
                advice,
                columns: columns.clone(),
            },
        })
    }
}

/// How far the chains agree about one quantity.
enum Agreement {
    RHat(f64),
    /// Every draw of every chain is the same.
    Constant,
    /// Not to be told, and why: chains that stand still apart, or draws that are not numbers.
    None(&'static str),
}

/// What the agreements say together. A constant quantity counts as settled.
fn settling(names: &[&str], all: &[Agreement]) -> Settling {
    let mut worst: Option<(&str, f64)> = None;
    let mut without: Option<(&str, &str)> = None;
    let mut constant = 0;
    for (name, agreement) in names.iter().zip(all) {
        match agreement {
            Agreement::RHat(r_hat) if worst.is_none_or(|(_, worst)| *r_hat > worst) => {
                worst = Some((name, *r_hat));
            }
            Agreement::RHat(_) => {}
            Agreement::Constant => constant += 1,
            Agreement::None(why) => without = without.or(Some((name, why))),
        }
    }
    let mut words = match (without, worst) {
        (Some((name, why)), _) => format!("no R-hat of {name}, {why}"),
        (None, Some((name, r_hat))) => {
            format!("largest R-hat {} ({name})", estimates::r_hat_text(r_hat))
        }
        (None, None) => "no quantity varies".into(),
    };
    match constant {
        0 => {}
        1 => words.push_str(", 1 constant quantity counts as settled"),
        many => words.push_str(&format!(", {many} constant quantities count as settled")),
    }
    Settling {
        r_hat: worst.map(|(_, r_hat)| r_hat),
        settled: without.is_none() && worst.is_none_or(|(_, r_hat)| r_hat < BURN_IN_R_HAT),
        words,
    }
}

fn agreement(draws: Vec<Vec<f64>>) -> Agreement {
    let all = || draws.iter().flatten();
    if all().any(|x| x.is_nan()) {
        return Agreement::None("some of whose draws are not numbers");
    }
    let first = draws.first().and_then(|chain| chain.first());
    if all().all(|x| Some(x) == first) {
        return Agreement::Constant;
    }
    let chains: Vec<&[f64]> = draws.iter().map(Vec::as_slice).collect();
    match estimates::r_hat(&chains)
        .larger()
        .filter(|r_hat| !r_hat.is_nan())
    {
        Some(r_hat) => Agreement::RHat(r_hat),
        None => Agreement::None("whose chains stand still apart"),
    }
}

/// The summary of a point that ended with figures, beside the first where they share their streams; `None` for one
/// whose chains found no start.
pub fn summary(plan: &Plan, end: &PointEnd<Reviewed>, paired: Option<Paired>) -> Option<Summary> {
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
        paired,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_holds_a_burn_in_up_is_named() {
        let told = |all: &[Agreement]| {
            let found = settling(&["a", "b", "c"], all);
            (found.settled, found.words)
        };
        let not_numbers = agreement(vec![vec![0.5, f64::NAN]; 2]);
        let (settled, words) = told(&[Agreement::RHat(1.0), not_numbers, Agreement::Constant]);
        assert!(!settled);
        assert!(
            words.starts_with("no R-hat of b, some of whose draws are not numbers"),
            "{words}"
        );
        let (settled, words) = told(&[Agreement::RHat(1.0), Agreement::RHat(1.2)]);
        assert_eq!((settled, &*words), (false, "largest R-hat 1.200 (b)"));
        let (settled, words) = told(&[Agreement::RHat(1.883e15)]);
        assert_eq!((settled, &*words), (false, "largest R-hat > 100 (a)"));
        let constant = || agreement(vec![vec![2.0; 4]; 2]);
        let (settled, words) = told(&[constant(), constant()]);
        let expected = "no quantity varies, 2 constant quantities count as settled";
        assert_eq!((settled, &*words), (true, expected));
    }
}
