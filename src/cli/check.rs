//! `check`: what a study would run, why, on what grounds and at what cost; no draws.

use super::output::{say, tell};
use super::status::Status;
use super::study;
use crate::canon::{self, Json};
use crate::engine::Task;
use crate::plan::{BurnIn, Estimand, EstimandGoal, Goal, Plan, Point};
use crate::record;
use crate::report::{self, grounds_of};
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
    let mut lines = vec![plan.title.clone()];
    if !plan.question.trim().is_empty() {
        lines.push(plan.question.clone());
    }
    lines.push(String::new());
    if plan.points.len() > 1 {
        lines.push(format!("{} points; the first:", plan.points.len()));
        for (path, value) in &point.values {
            lines.push(format!("  {path} = {}", value.canonical()));
        }
        lines.push(String::new());
    }
    lines.push(ensemble(point));
    lines.push(goal(point.goal.as_ref()));
    lines.extend(point.estimands.iter().filter_map(own_goal));
    lines.push(quantities(point));
    lines.push("Steps of the sampler".into());
    lines.extend(steps(point));
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
        &grounds_of(plan, 0, None),
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
    let chains = match ensemble.chains {
        1 => "1 chain".to_owned(),
        chains => format!("{chains} chains"),
    };
    format!(
        "{chains} of {} draws{every}, after {burn_in}; blocks of {} draws",
        ensemble.draws, point.block
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

/// The goal of an estimand that has one of its own.
fn own_goal(estimand: &Estimand) -> Option<String> {
    let words = match estimand.goal? {
        EstimandGoal::Absolute(error) => format!("error at most {error}"),
        EstimandGoal::Relative(part) => format!("error at most {part} of its value"),
        EstimandGoal::Digits(1) => "1 digit of its standard uncertainty".into(),
        EstimandGoal::Digits(digits) => format!("{digits} digits of its standard uncertainty"),
    };
    Some(format!("  {}: {words}", estimand.name))
}

/// A step a line: its name, weight, what it moves, and each method with every option.
fn steps(point: &Point) -> Vec<String> {
    let model = point.model.canonical();
    let sampler = model.get("sampler");
    let items = |json: Option<&Json>| json.map_or(Vec::new(), |list| list.items().to_vec());
    let texts = |json: Option<&Json>| {
        let names = items(json);
        let names = names.iter().filter_map(Json::as_text).map(str::to_owned);
        names.collect::<Vec<_>>().join(", ")
    };
    let told = |json: &Json, name: &str| json.get(name).map(word);
    let step = |step: &Json| {
        let moves = items(step.get("moves"));
        let moves = moves.iter().map(|one| {
            let options = ["scale", "adapt", "width", "limit"].into_iter();
            let options = options.filter_map(|name| Some(format!("{name} {}", told(one, name)?)));
            let options = options.collect::<Vec<_>>().join(", ");
            let method = told(one, "method").unwrap_or_default();
            match options.is_empty() {
                true => method,
                false => format!("{method} ({options})"),
            }
        });
        let moves = moves.collect::<Vec<_>>().join(", ");
        let weight = told(step, "weight").map_or(String::new(), |w| format!(", weight {w}"));
        let times = match told(step, "times") {
            Some(times) if times != "1" => format!(", {times} times a step"),
            _ => String::new(),
        };
        let name = told(step, "name").unwrap_or_default();
        format!(
            "  {name}: {moves} on {}{weight}{times}",
            texts(step.get("on"))
        )
    };
    items(sampler.and_then(|sampler| sampler.get("steps")))
        .iter()
        .map(step)
        .collect()
}

/// A word as it is, a number as in canonical form.
fn word(json: &Json) -> String {
    json.as_text()
        .map_or_else(|| json.canonical(), str::to_owned)
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
