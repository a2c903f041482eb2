//! (d) The decisions of the run taken again and every figure computed again, from the stored draws.

use super::draws::{PointTrail, Trails};
use super::opened::Opened;
use crate::engine::{
    Ended, Judge, PlanJudge, PointEnd, Reviewed, Settling, burn_in_reviews, paired,
};
use crate::plan::{self, BurnIn, Plan};
use crate::record::draws_file::DrawsFile;
use crate::report::Outcome;
use std::sync::Arc;
use std::sync::atomic::AtomicBool;

/// What the stored draws come to, or in words where the run did not end as its plan says. `Err(None)` when the
/// record keeps no draws.
pub fn outcome<'a>(
    opened: &'a Opened,
    trails: &Trails,
    threads: usize,
    stop: &AtomicBool,
) -> Result<Outcome<'a>, Option<Vec<String>>> {
    let plan = &opened.plan;
    let judge = PlanJudge::new(plan);
    let mut ends = Vec::with_capacity(trails.len());
    let mut found = Vec::new();
    for (point, trail) in trails.iter().enumerate() {
        let ended = match trail {
            Err(words) => Err(words.clone()),
            Ok(trail) if trail.kept.is_none() => return Err(None),
            Ok(trail) => match decide(plan, &judge, point, trail, stop) {
                Ok(ended) => Ok(ended),
                Err(words) => {
                    found.push(format!("point {}: {words}", point + 1));
                    continue;
                }
            },
        };
        ends.push(PointEnd { point, ended });
    }
    if !found.is_empty() {
        return Err(Some(found));
    }
    let paired = paired(plan, &ends, threads, stop).map_err(|halt| Some(vec![halt.words()]))?;
    Ok(Outcome::of(plan, &ends, paired))
}

/// Reviews a point at every draw at which the plan has it reviewed, and holds the end against the trail.
fn decide(
    plan: &Plan,
    judge: &PlanJudge<'_>,
    index: usize,
    trail: &PointTrail,
    stop: &AtomicBool,
) -> Result<Ended<Reviewed>, String> {
    let point = &plan.points[index];
    let [burn_in, draws] = trail.kept.as_ref().expect("asked before");
    let closed = plan.closed.is_some();
    let settling = match point.ensemble.burn_in {
        BurnIn::Fixed(_) => None,
        BurnIn::Chosen { .. } => {
            let reviews = burn_in_reviews(point.ensemble.burn_in);
            Some(settle(
                judge,
                index,
                &reviews,
                burn_in.as_ref(),
                trail.burn_in,
            )?)
        }
    };
    let Some(kept) = draws else {
        return Err("it has no draws".into());
    };
    let reviews = plan::reviews(&point.ensemble, point.goal.as_ref(), point.block);
    let earlier = reviews.iter().filter(|review| **review < trail.draws);
    for review in earlier {
        let verdict = judge.review(index, &kept.columns(0..*review), stop)?;
        if verdict.met == Some(true) {
            return Err(format!(
                "by the plan it ends after {review} draws, where the goal is met, and it has {}",
                trail.draws
            ));
        }
    }
    let verdict = judge.review(index, &kept.columns(0..trail.draws), stop)?;
    let last = reviews.last() == Some(&trail.draws);
    let met = reviews.contains(&trail.draws) && verdict.met == Some(true);
    if !(closed || last || met) {
        return Err(format!(
            "it ends after {} draws, where the plan does not end it",
            trail.draws
        ));
    }
    Ok(Ended {
        burn_in: trail.burn_in,
        settling,
        draws: trail.draws,
        met: verdict.met,
        figures: verdict.figures,
        links: trail.links(),
        notes: Vec::new(),
    })
}

/// Reviews a self-chosen burn-in again: it must end at its first review that finds it settled, or at its last.
fn settle(
    judge: &PlanJudge<'_>,
    point: usize,
    reviews: &[u64],
    kept: Option<&Arc<DrawsFile>>,
    burn_in: u64,
) -> Result<Settling, String> {
    for &review in reviews {
        let Some(kept) = kept.filter(|kept| review <= kept.draws()) else {
            return Err(format!(
                "the burn-in ends after {burn_in} draws, and by the plan goes on to {review}"
            ));
        };
        let settling = judge.burn_in(point, &kept.columns(review / 2..review))?;
        if settling.settled || reviews.last() == Some(&review) {
            return if review == burn_in {
                Ok(settling)
            } else {
                Err(format!(
                    "the burn-in ends after {burn_in} draws, and by the plan after {review}"
                ))
            };
        }
    }
    Err("the plan has no review of the burn-in".into())
}
