//! `[goal]` and the goal of a single estimand.

use crate::place::{Fault, Faults};
use crate::plan::{Ensemble, EstimandGoal, Goal, MOST_DRAWS};
use crate::reading::{Section, Value};

const R_HAT: f64 = 1.01;
const EFFECTIVE_A_CHAIN: f64 = 100.0;
/// Draws at most, as a multiple of those of the first review.
const AT_MOST: u64 = 100;

/// The goal of a point; `implied` by the goal of an estimand even where the study has no `[goal]`. Checked
/// against the ensemble's draws only if that is `sound`.
pub(super) fn read(
    root: &Section,
    ensemble: &Ensemble,
    sound: bool,
    implied: bool,
    faults: &mut Faults,
) -> Option<Goal> {
    let longest = MOST_DRAWS / ensemble.chains;
    let mut goal = Goal {
        error: None,
        r_hat: R_HAT,
        effective: EFFECTIVE_A_CHAIN * ensemble.chains as f64,
        at_most: ensemble.draws.saturating_mul(AT_MOST).min(longest),
    };
    if !root.has("goal") {
        return implied.then_some(goal);
    }
    let section = root.section("goal", faults)?;
    goal.error = section.positive("error", faults);
    if let Some(value) = section.value("r_hat")
        && let Some(r_hat) = value.number(faults)
    {
        if r_hat > 1.0 {
            goal.r_hat = r_hat;
        } else {
            let what = "`goal.r_hat` must be above 1, where it tends as chains agree";
            faults.push(Fault::at(value.place, what).label("not above 1"));
        }
    }
    if let Some(effective) = section.positive("effective", faults) {
        goal.effective = effective;
    }
    if let Some(value) = section.value("at_most")
        && let Some(at_most) = value.count(1..=longest, faults)
    {
        if at_most >= ensemble.draws || !sound {
            goal.at_most = at_most;
        } else {
            let draws = ensemble.draws;
            let what = format!(
                "`goal.at_most` is less than the {draws} draws a chain of the first review"
            );
            faults.push(
                Fault::at(value.place, what)
                    .label(format!("must be {draws} or more"))
                    .help("both count draws a chain; `ensemble.draws` is the first review"),
            );
        }
    }
    section.finish(faults);
    Some(goal)
}

/// `{ absolute = 0.01 }`, `{ relative = 0.1 }` or `{ digits = 2 }`.
pub(super) fn of_estimand(value: &Value, faults: &mut Faults) -> Option<EstimandGoal> {
    if !value.is_table() {
        value.refuse(
            "one of { absolute = … }, { relative = … } and { digits = … }",
            faults,
        );
        return None;
    }
    let before = faults.count();
    let section = value.section(faults)?;
    let goals = [
        section
            .positive("absolute", faults)
            .map(EstimandGoal::Absolute),
        section
            .positive("relative", faults)
            .map(EstimandGoal::Relative),
        section
            .count("digits", 1..=15, faults)
            .map(EstimandGoal::Digits),
    ];
    section.finish(faults);
    let mut given = goals.into_iter().flatten();
    match (given.next(), given.next()) {
        (Some(goal), None) => Some(goal),
        (one, _) => {
            if faults.count() == before {
                let what = match one {
                    Some(_) => format!("`{}` has more than one goal", value.path),
                    None => format!("`{}` has no goal", value.path),
                };
                faults.push(
                    Fault::at(value.place.clone(), what)
                        .label("one of `absolute`, `relative` and `digits` is needed"),
                );
            }
            None
        }
    }
}
