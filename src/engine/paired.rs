//! Points that share their random numbers, each beside the first.

use super::columns::Columns;
use super::conduct::PointEnd;
use super::halt::Halt;
use super::review::{Reviewed, side_by_side};
use crate::canon;
use crate::estimates::{Difference, Figure, Paired, Side, count, paired_difference};
use crate::plan::{Give, Plan, Streams};
use rayon::prelude::*;
use std::sync::atomic::{AtomicBool, Ordering};

/// Every point beside the first one that has figures, in the order of the points; `None` for that one, for points
/// without figures, and for all points where streams are not shared.
///
/// # Errors
/// When the journal can't be read, or when `stop` is set.
pub fn paired(
    plan: &Plan,
    ends: &[PointEnd<Reviewed>],
    threads: usize,
    stop: &AtomicBool,
) -> Result<Vec<Option<Paired>>, Halt> {
    let mut out = vec![None; ends.len()];
    let mut with_figures = ends
        .iter()
        .enumerate()
        .filter_map(|(index, end)| Some((index, &end.ended.as_ref().ok()?.figures)));
    let Some((at, first)) = with_figures.next() else {
        return Ok(out);
    };
    if plan.streams != Streams::Shared {
        return Ok(out);
    }
    let key = canon::hex(&plan.point_key(ends[at].point));
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(threads.max(1))
        .build()
        .map_err(|fault| Halt::Own(format!("threads could not be started: {fault}")))?;
    for (index, point) in with_figures {
        let differences = match unlike(&first.columns, &point.columns) {
            Some(words) => Err(words),
            None => Ok(pool.install(|| differences(first, point, stop))?),
        };
        let first = key.clone();
        out[index] = Some(Paired { first, differences });
    }
    Ok(out)
}

/// Why the draws of a point cannot be paired with those of the first.
fn unlike(first: &Columns, point: &Columns) -> Option<String> {
    let words = |what: &str, one: usize, other: usize| {
        let [one, other] = [one, other].map(|n| count(n as u64));
        format!("it has {other} {what}, the first point {one}, so that they cannot be paired")
    };
    if first.chains() != point.chains() {
        Some(words("chains", first.chains(), point.chains()))
    } else if first.draws() != point.draws() {
        Some(words("draws a chain", first.draws(), point.draws()))
    } else {
        None
    }
}

fn differences(
    first: &Reviewed,
    point: &Reviewed,
    stop: &AtomicBool,
) -> Result<Vec<Option<Difference>>, Halt> {
    let one = |(index, figure): (usize, &Figure)| {
        if stop.load(Ordering::Relaxed) {
            return Err(Halt::Interrupted);
        }
        let wanted = |f: &Figure| f.give.contains(&Give::Value);
        let other = first.figures.iter().position(|f| f.name == figure.name);
        let Some(other) = other.filter(|other| wanted(figure) && wanted(&first.figures[*other]))
        else {
            return Ok(None);
        };
        let theirs = first.columns.quantity(other).map_err(Halt::Journal)?;
        let ours = point.columns.quantity(index).map_err(Halt::Journal)?;
        let [theirs, ours] = [&theirs, &ours]
            .map(|chains| chains.iter().map(Vec::as_slice).collect::<Vec<&[f64]>>());
        Ok(Some(paired_difference(
            &Side {
                chains: &theirs,
                estimate: &first.figures[other].estimate,
            },
            &Side {
                chains: &ours,
                estimate: &figure.estimate,
            },
        )))
    };
    let mut all = Vec::with_capacity(point.figures.len());
    let indexed: Vec<_> = point.figures.iter().enumerate().collect();
    // Two columns of draws a quantity beside the copies that its estimate makes.
    for some in indexed.chunks(side_by_side(&point.columns).div_ceil(2)) {
        let some: Result<Vec<_>, Halt> = some.par_iter().map(|(i, f)| one((*i, f))).collect();
        all.extend(some?);
    }
    Ok(all)
}
