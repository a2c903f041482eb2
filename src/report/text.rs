//! What a run ends with on a terminal.

use super::figures::figures_text;
use super::grounds_text::grounds_text;
use super::layout::{cell, wrap};
use super::sweep::{differences_text, sweep_text, value_text};
use crate::course::Condition;
use crate::estimates::{GoalState, Summary, count};
use crate::grounds::{Grounds, rank};

/// Stands under every report.
pub const FOOT: &str = "These figures describe the model as stated. Where one of them bears on safety, local codes and \
                        licensed practice decide.";

/// Points of a sweep shown on a terminal.
const POINTS: usize = 60;

/// Title, question and what else heads it, then the figures of the only point or a table over the points, then the grounds.
pub fn run_text(head: &[&str], points: &[(Summary, Grounds)], page: usize) -> String {
    let mut out = String::new();
    for line in head {
        if !line.trim().is_empty() {
            out.push_str(&wrap(line, page, 0, 0));
        }
    }
    match points {
        [] => out.push_str("\nNo point was finished.\n"),
        [(summary, grounds)] => {
            out.push('\n');
            out.push_str(&wrap(&effort(summary), page, 0, 0));
            out.push('\n');
            out.push_str(&figures_text(summary, page));
            out.push_str("\nGrounds\n");
            out.push_str(&grounds_text(grounds, page));
        }
        _ => {
            let summaries: Vec<Summary> = points.iter().map(|(s, _)| s.clone()).collect();
            out.push_str("\nvalue (Monte Carlo error) at each point\n");
            out.push_str(&sweep_text(&summaries, POINTS, page));
            out.push_str(&differences_text(&summaries, POINTS, page));
            out.push_str(&shared_grounds(points, page));
            out.push_str(&failed_conditions(points, page));
        }
    }
    out.push('\n');
    out.push_str(&wrap(FOOT, page, 0, 0));
    out
}

/// How the figures came about, in a sentence or two.
pub(super) fn effort(s: &Summary) -> String {
    let chains = if s.chains == 1 {
        "1 chain".into()
    } else {
        format!("{} chains", s.chains)
    };
    let goal = match s.goal {
        GoalState::Met => "; the goal is met",
        GoalState::Missed => "; the goal is MISSED",
        GoalState::None => "",
    };
    let each = if s.chains == 1 { "" } else { " each" };
    let advice = s.advice.as_ref().filter(|_| s.goal == GoalState::Missed);
    let advice = advice.map_or(String::new(), |a| format!(": {a}"));
    format!(
        "{chains} of {} draws{each}, after a burn-in of {}{goal}{advice}.",
        count(s.draws_per_chain),
        count(s.burn_in)
    )
}

/// The grounds of a sweep: those of the worst point, which is named where others stand better.
fn shared_grounds(points: &[(Summary, Grounds)], page: usize) -> String {
    let Some(((summary, grounds), other)) = worst(points) else {
        return String::new();
    };
    let heading = if other == 0 {
        "\nGrounds (of the first point; the claims stand alike at all points)\n".to_string()
    } else {
        let text = format!(
            "Grounds (of the worst point, {}; at {} others a claim stands differently, see grounds.json)",
            values(summary),
            count(other as u64)
        );
        format!("\n{}", wrap(&text, page, 0, 2))
    };
    heading + &grounds_text(grounds, page)
}

/// The point that stands worst, and at how many others a claim stands differently.
pub(super) fn worst(points: &[(Summary, Grounds)]) -> Option<(&(Summary, Grounds), usize)> {
    let standings = |g: &Grounds| g.claims.iter().map(|c| c.standing).collect::<Vec<_>>();
    let (mut worst, rest) = points.split_first()?;
    for point in rest {
        // Of equals the first stays.
        if weakness(&point.1) > weakness(&worst.1) {
            worst = point;
        }
    }
    let differs = |(_, g): &&(Summary, Grounds)| standings(g) != standings(&worst.1);
    Some((worst, points.iter().filter(differs).count()))
}

/// The points at which conditions have failed, with the names of these.
pub(super) fn fallen(points: &[(Summary, Grounds)]) -> Vec<(&Summary, Vec<String>)> {
    let failed = |g: &Grounds| {
        let name = |c: &Condition| {
            let accepted = if g.accepts(c.name) { " (accepted)" } else { "" };
            format!("{}{accepted}", c.name)
        };
        g.failed().into_iter().map(name).collect::<Vec<_>>()
    };
    points
        .iter()
        .map(|(summary, grounds)| (summary, failed(grounds)))
        .filter(|(_, names)| !names.is_empty())
        .collect()
}

/// Each point at which conditions have failed, with their names.
fn failed_conditions(points: &[(Summary, Grounds)], page: usize) -> String {
    let found = fallen(points);
    if found.is_empty() {
        return String::new();
    }
    let mut out = String::from("\nConditions that have failed\n");
    for (summary, names) in found.iter().take(POINTS) {
        let line = format!("{}: {}", values(summary), names.join(", "));
        out.push_str(&wrap(&line, page, 2, 4));
    }
    if found.len() > POINTS {
        let more = count((found.len() - POINTS) as u64);
        out.push_str(&format!("  ... and at {more} more points\n"));
    }
    out
}

/// The swept values of a point.
pub(super) fn values(summary: &Summary) -> String {
    let values = summary.values.iter();
    let values = values.map(|(path, value)| format!("{} = {}", cell(path), value_text(value)));
    values.collect::<Vec<_>>().join(", ")
}

/// Orders points from the strongest to the weakest: failed conditions of needed claims first, then the standings
/// of the claims, the weakest of them first.
fn weakness(grounds: &Grounds) -> (usize, Vec<u8>) {
    let mut ranks: Vec<u8> = grounds.claims.iter().map(|c| rank(c.standing)).collect();
    ranks.sort_unstable_by(|a, b| b.cmp(a));
    (grounds.failed().len(), ranks)
}
