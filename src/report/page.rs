//! `report.html`: the figures and their grounds on one page that stands alone, without any script, time or host.

use super::FOOT;
use super::figures::{Notes, main_columns, quantile_columns};
use super::grounds_html::grounds_html;
use super::html::{element, escape, table};
use super::outcome::Outcome;
use super::sweep::{SHARED, difference_columns, sweep_columns};
use super::text::{effort, fallen, values, worst};
use crate::canon;
use crate::estimates::{GoalState, Summary, count};
use crate::grounds::Grounds;
use crate::plan::Keep;

const STYLE: &str = include_str!("style.css");

/// Points of a sweep whose values are shown, and of these so many with all their figures.
const POINTS: usize = 200;
const IN_FULL: usize = 24;
/// Characters of text that a table of a sweep may be wide.
const WIDE: usize = 104;

/// The page of an outcome.
pub fn report_html(outcome: &Outcome<'_>) -> String {
    let plan = outcome.plan;
    let mut page = format!(
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'\">\n\
         <meta name=\"viewport\" content=\"width=device-width\">\n<title>{}</title>\n<style>\n{STYLE}</style>\n</head>\n\
         <body>\n<main>\n",
        escape(&plan.title)
    );
    page.push_str(&head(outcome));
    page.push_str(&marks(outcome));
    match outcome.points.as_slice() {
        [] => page.push_str(&section("Figures", &element("p", "No point was finished."))),
        [(summary, grounds)] => {
            let text = element("p", &effort(summary)) + &figures(summary);
            page.push_str(&section("Figures", &text));
            page.push_str(&section("Grounds", &grounds_html(grounds)));
        }
        points => page.push_str(&sweep(points)),
    }
    page.push_str(&failed(outcome));
    page.push_str(&section("What the seal shows", &seal(plan.keep)));
    page.push_str(&format!("<footer>{}</footer>\n", escape(FOOT)));
    page.push_str("</main>\n</body>\n</html>\n");
    page
}

fn section(heading: &str, inside: &str) -> String {
    format!(
        "<section>\n<h2>{}</h2>\n{inside}</section>\n",
        escape(heading)
    )
}

/// Title, question, digests and where the rest stands.
fn head(outcome: &Outcome<'_>) -> String {
    let plan = outcome.plan;
    let mut out = element("h1", &plan.title);
    if !plan.question.trim().is_empty() {
        let question = escape(&plan.question);
        out.push_str(&format!("<p class=\"question\">{question}</p>\n"));
    }
    out.push_str("<div class=\"course\"></div>\n<dl>\n");
    let digits = |digest: &[u8; 32]| {
        let hex = canon::hex(digest);
        let groups: Vec<&str> = (0..8).map(|at| &hex[8 * at..8 * (at + 1)]).collect();
        format!("<code>{}</code>", groups.join(" "))
    };
    let entries = [
        ("Result digest", digits(&outcome.digest())),
        ("Plan digest", digits(&plan.digest())),
        ("Root", format!("<code>{}</code>", escape(&plan.root))),
        (
            "Beside this page",
            "the study in <a href=\"study.toml\">study.toml</a>, every figure in \
             <a href=\"summary.csv\">summary.csv</a> and <a href=\"summary.json\">summary.json</a>; when, where and with \
             what it was run, and earlier runs under its name, in <a href=\"../circumstances.json\">circumstances.json</a>"
                .into(),
        ),
    ];
    for (term, text) in entries {
        out.push_str(&format!("<dt>{term}</dt><dd>{text}</dd>\n"));
    }
    out.push_str("</dl>\n");
    out
}

/// What must be seen before any figure.
fn marks(outcome: &Outcome<'_>) -> String {
    let plan = outcome.plan;
    let mut out = String::new();
    let mut mark = |text: String| {
        let text = escape(&text);
        out.push_str(&format!("<p class=\"mark\">{text}</p>\n"));
    };
    if !plan.accepted.conditions.is_empty() {
        mark(format!(
            "The study accepts conditions in spite of their standing: {}; because: {}",
            plan.accepted.conditions.join(", "),
            plan.accepted.because
        ));
    }
    if plan.closed.is_some() {
        mark(outcome.closed_text());
    }
    let missed = |(summary, _): &&(Summary, Grounds)| summary.goal == GoalState::Missed;
    match (
        outcome.points.iter().filter(missed).count(),
        outcome.points.len(),
    ) {
        (0, _) => {}
        (_, 1) => mark("The goal was missed.".into()),
        (missed, all) => mark(format!("The goal was missed at {missed} of {all} points.")),
    }
    let fallen = fallen(&outcome.points);
    if let Some((_, names)) = fallen.first() {
        let text = match outcome.points.len() {
            1 => format!("Conditions that have failed: {}.", names.join(", ")),
            all => format!(
                "Conditions have failed at {} of {all} points.",
                fallen.len()
            ),
        };
        mark(text);
    }
    if !outcome.failed.is_empty() {
        mark(format!(
            "Points that found no start: {} of {}.",
            outcome.failed.len(),
            plan.points.len()
        ));
    }
    out
}

/// Figures, quantiles and notes of a point.
fn figures(summary: &Summary) -> String {
    let notes = Notes::of(summary);
    let mut out = table(&main_columns(summary, &notes));
    for columns in quantile_columns(summary, 5) {
        out.push_str(&table(&columns));
    }
    if !notes.texts.is_empty() {
        out.push_str("<h3>Notes</h3>\n<ol>\n");
        for text in &notes.texts {
            out.push_str(&element("li", text));
        }
        out.push_str("</ol>\n");
    }
    out
}

/// The values over all points, their differences, the figures of the first points, and the worst grounds.
fn sweep(points: &[(Summary, Grounds)]) -> String {
    let summaries: Vec<Summary> = points.iter().map(|(summary, _)| summary.clone()).collect();
    let all = summaries.len();
    let first = |most: usize| {
        let most = count(most as u64);
        let all = count(all as u64);
        let text = format!("The first {most} of {all} points are shown; summary.csv has all.");
        element("p", &text)
    };
    let tables = |blocks: Vec<Vec<_>>| blocks.iter().map(|block| table(block)).collect::<String>();
    let mut values_of = tables(sweep_columns(&summaries, POINTS, WIDE));
    if values_of.contains("(?)") {
        let text =
            "(?) no error; the reasons stand with the figures of the point and in summary.csv";
        values_of.push_str(&element("p", text));
    }
    if all > POINTS {
        values_of.push_str(&first(POINTS));
    }
    let mut out = section("Value (Monte Carlo error) at each point", &values_of);

    let differences = difference_columns(&summaries, POINTS, WIDE);
    if !differences.is_empty() {
        let heading = "Difference from the first point (Monte Carlo error of the difference)";
        let text = tables(differences) + &element("p", SHARED);
        out.push_str(&section(heading, &text));
    }

    let mut figures_of = String::new();
    for summary in summaries.iter().take(IN_FULL) {
        let name = escape(&values(summary));
        let inside = element("p", &effort(summary)) + &figures(summary);
        figures_of.push_str(&format!(
            "<details><summary>{name}</summary>\n{inside}</details>\n"
        ));
    }
    if all > IN_FULL {
        figures_of.push_str(&first(IN_FULL));
    }
    out.push_str(&section("Figures of each point", &figures_of));

    if let Some(((summary, grounds), others)) = worst(points) {
        let text = match others {
            0 => "Of the first point; the claims stand alike at all points.".to_owned(),
            others => format!(
                "Of the worst point, {}; at {} others a claim stands differently, see grounds.json.",
                values(summary),
                count(others as u64)
            ),
        };
        let text = element("p", &text) + &grounds_html(grounds);
        out.push_str(&section("Grounds", &text));
    }
    out.push_str(&fallen_list(points));
    out
}

/// Each point at which conditions have failed, with their names.
fn fallen_list(points: &[(Summary, Grounds)]) -> String {
    let found = fallen(points);
    if found.is_empty() {
        return String::new();
    }
    let lines = found
        .iter()
        .map(|(summary, names)| format!("{}: {}", values(summary), names.join(", ")));
    section("Conditions that have failed", &list(lines, found.len()))
}

fn failed(outcome: &Outcome<'_>) -> String {
    if outcome.failed.is_empty() {
        return String::new();
    }
    let lines = outcome
        .failed
        .iter()
        .map(|(point, words)| format!("{}: {words}", outcome.values_text(*point)));
    section(
        "Points that found no start",
        &list(lines, outcome.failed.len()),
    )
}

/// A list that ends after so many lines and says so.
fn list(lines: impl Iterator<Item = String>, all: usize) -> String {
    let mut out = String::from("<ul>\n");
    for line in lines.take(POINTS) {
        out.push_str(&element("li", &line));
    }
    if all > POINTS {
        let more = count((all - POINTS) as u64);
        out.push_str(&element("li", &format!("and {more} more")));
    }
    out.push_str("</ul>\n");
    out
}

fn seal(keep: Keep) -> String {
    let how = match keep {
        Keep::Draws => {
            "odograph verify makes plan, figures and this page again from the study and the draws, and draws \
                        the draws again, all of them or some chosen by lot."
        }
        Keep::Summary => {
            "The record keeps no draws: odograph verify checks its figures by running the whole plan again."
        }
    };
    let shows = "A record that is verified shows that these figures follow from this study, its data and its root, draw for \
                 draw. It does not show that the model is true, that no other study or root was tried before this one, and \
                 by whom and when the record was made.";
    let meaning = "The digits in parentheses are the Monte Carlo error of the last digits: what a longer run would make \
                   smaller. The standard uncertainty is the spread of the quantity itself, what only more data would make \
                   smaller.";
    [meaning, shows, how]
        .map(|text| element("p", text))
        .concat()
}

#[cfg(test)]
mod tests {
    use super::super::samples;
    use super::*;
    use crate::plan::{self, Accepted, Plan};

    fn outcome(plan: &Plan, summaries: Vec<Summary>) -> Outcome<'_> {
        let mut outcome = Outcome::of(plan, &[], Vec::new());
        outcome.points = summaries
            .into_iter()
            .map(|summary| {
                let grounds = samples::standings(&summary);
                (summary, grounds)
            })
            .collect();
        outcome
    }

    #[test]
    fn nothing_that_a_study_says_becomes_a_tag_or_leads_out() {
        let evil = "<script>alert(1)</script><img src=\"https://x.example/\" onerror='y'>";
        let mut plan = plan::sample();
        (plan.title, plan.question, plan.root) = (evil.into(), evil.into(), evil.into());
        plan.accepted = Accepted {
            conditions: vec![evil.into()],
            because: evil.into(),
        };
        let mut summary = samples::summary();
        (summary.figures[0].name, summary.figures[0].unit) = (evil.into(), Some(evil.into()));
        summary.advice = Some(evil.into());
        let mut outcome = outcome(&plan, vec![summary]);
        outcome.points[0].1.claims[0].conditions[0].evidence = evil.into();
        outcome.failed.push((0, evil.into()));
        let page = report_html(&outcome);
        for tag in ["<script", "<img", "src=\"", "onerror='"] {
            assert!(!page.contains(tag), "{tag} stands in the page");
        }
        assert!(page.matches("&lt;script&gt;").count() >= 9);
        let links = page.split("href=\"").skip(1);
        for link in links {
            let own = [
                "study.toml",
                "summary.csv",
                "summary.json",
                "../circumstances.json",
            ];
            assert!(own.iter().any(|own| link.starts_with(own)), "{link:.30}");
        }
    }

    #[test]
    fn what_was_accepted_or_missed_stands_before_the_figures() {
        let mut plan = plan::sample();
        plan.accepted = Accepted {
            conditions: vec!["finite mass".into()],
            because: "the counts bound b".into(),
        };
        let page = report_html(&outcome(&plan, vec![samples::summary()]));
        let at = |text: &str| page.find(text).unwrap_or_else(|| panic!("no {text:?}"));
        let figures = at("<h2>Figures</h2>");
        assert!(at("because: the counts bound b") < figures);
        assert!(at("The goal was missed.") < figures);
        assert!(at(">0.05983(27)<") > figures);
        assert!(at("no other study or root was tried") > figures);
        assert!(at("licensed practice decide") > figures);
    }

    #[test]
    fn a_long_sweep_is_cut_and_says_so() {
        let plan = plan::sample();
        let sweep = samples::sweep();
        let long: Vec<Summary> = sweep.iter().cycle().take(1_000).cloned().collect();
        let page = report_html(&outcome(&plan, long));
        assert!(page.contains("The first 200 of 1,000 points are shown"));
        assert!(page.contains("The first 24 of 1,000 points are shown"));
        assert_eq!(page.matches("<details>").count(), IN_FULL);
        assert!(page.len() < 400_000, "{} bytes", page.len());
        let short = report_html(&outcome(&plan, sweep));
        assert!(!short.contains("points are shown"));
    }
}
