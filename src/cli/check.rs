//! `check`: what a study would run, why, on what grounds and at what cost; no draws.

use super::output::{say, tell};
use super::status::Status;
use super::study;
use crate::canon;
use crate::engine::Task;
use crate::plan::{BurnIn, Goal, Plan, Point};
use crate::record;
use crate::report;
use std::path::Path;
use std::time::Duration;

/// Nanoseconds an operation takes, about.
const NANOSECONDS: f64 = 1.0;

/// Reads a study and says what would be run.
pub fn check(file: &Path) -> Status {
    let plan = match study::read(file) {
        Ok(read) => read.plan,
        Err(status) => return status,
    };
    if let Err(fault) = say(&words(&plan)) {
        tell(&format!("cannot write to stdout: {fault}"));
        return Status::Interrupted;
    }
    match study::stops(&plan) {
        stops if stops.is_empty() => Status::Done,
        stops => study::tell_stops(&stops),
    }
}

fn words(plan: &Plan) -> String {
    let point = &plan.points[0];
    let mut lines = vec![plan.title.clone(), plan.question.clone(), String::new()];
    if plan.points.len() > 1 {
        lines.push(format!("{} points; the first:", plan.points.len()));
        for (path, value) in &point.values {
            lines.push(format!("  {path} = {}", value.canonical()));
        }
        lines.push(String::new());
    }
    lines.push(ensemble(point));
    lines.push(goal(point.goal.as_ref()));
    lines.push(quantities(point));
    lines.extend(point.model.reasons());
    lines.push(String::new());
    lines.push(cost(plan));
    lines.push(format!("Plan {}", canon::hex(&plan.digest())));
    let mut text = String::new();
    for line in &lines {
        text.push_str(line);
        text.push('\n');
    }
    text.push_str("\nGrounds before any draw\n");
    text.push_str(&report::grounds_text(
        &study::grounds_of(plan, 0, None),
        report::WIDTH,
    ));
    text
}

fn ensemble(point: &Point) -> String {
    let ensemble = &point.ensemble;
    let burn_in = match ensemble.burn_in {
        BurnIn::Fixed(draws) => format!("a burn-in of {draws}"),
        BurnIn::Chosen { from, at_most } => {
            format!("a burn-in of {from}, doubled until R-hat is small, at most {at_most}")
        }
    };
    let every = match ensemble.every {
        1 => String::new(),
        every => format!(", one recorded every {every} steps"),
    };
    format!(
        "{} chains of {} draws{every}, after {burn_in}; blocks of {} draws",
        ensemble.chains, ensemble.draws, point.block
    )
}

fn goal(goal: Option<&Goal>) -> String {
    let Some(goal) = goal else {
        return "No goal: the draws asked for are made, and their errors reported".into();
    };
    let error = goal
        .error
        .map_or(String::new(), |error| format!("error over sd {error}, "));
    format!(
        "Goal: {error}R-hat {}, effective size {}; at most {} draws a chain",
        goal.r_hat, goal.effective, goal.at_most
    )
}

fn quantities(point: &Point) -> String {
    let quantities = point.model.quantities();
    let names: Vec<&str> = quantities.iter().map(|q| q.name.as_str()).collect();
    let shown = names.len().min(12);
    let more = match names.len() - shown {
        0 => String::new(),
        more => format!(" and {more} more"),
    };
    let each = if names.len() == 1 {
        "quantity"
    } else {
        "quantities"
    };
    format!(
        "{} {each}: {}{more}",
        names.len(),
        names[..shown].join(", ")
    )
}

/// Arithmetic and room on disk, up to the first review and at most.
fn cost(plan: &Plan) -> String {
    let (mut least, mut most) = (0.0, 0.0);
    let tasks = Task::all(plan);
    for task in &tasks {
        let (from, to) = match task.burn_in {
            BurnIn::Fixed(draws) => (draws, draws),
            BurnIn::Chosen { from, at_most } => (from, at_most),
        };
        let each = task.chains.len() as f64 * task.model.cost();
        least += each * (from + task.reviews[0]) as f64;
        most += each * (to + task.reviews[task.reviews.len() - 1]) as f64;
    }
    let time = |operations: f64| {
        let seconds = operations * NANOSECONDS * 1e-9;
        match Duration::try_from_secs_f64(seconds) {
            Ok(time) if seconds < 1.0 => format!("{} ms", time.as_millis().max(1)),
            Ok(time) => super::progress::span(time),
            Err(_) => "longer than anyone waits".into(),
        }
    };
    let needs = record::needs(&tasks);
    format!(
        "About {:.0} operations a draw; up to the first review about {} of one core and {} on disk, at most \
         {} and {}",
        plan.points[0].model.cost(),
        time(least),
        record::size(needs.least),
        time(most),
        record::size(needs.most)
    )
}
