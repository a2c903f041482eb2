//! `list`: the records under a folder, at a glance.

use super::output::{say, tell};
use super::status::Status;
use crate::canon::Json;
use crate::estimates::figure;
use crate::record::survey::{Glance, Headline, State, survey};
use crate::record::{Index, written};
use clap::ValueEnum;
use std::path::Path;

/// Which records are listed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
pub enum Only {
    Sealed,
    Open,
    Unreadable,
    Met,
    Missed,
}

/// Lists the records under a folder.
pub fn list(folder: &Path, with: Option<&str>, only: Option<Only>, json: bool) -> Status {
    if !folder.is_dir() {
        tell(&format!("{} is no folder", folder.display()));
        return Status::Fault;
    }
    let found = survey(folder);
    let index = Index::open(folder);
    index.keep_only(&found);
    let all: Vec<Glance> = found.iter().map(|found| index.glance(found)).collect();
    let listed: Vec<&Glance> = all.iter().filter(|one| wanted(one, with, only)).collect();
    let text = if json {
        let records = Json::array(listed.iter().map(|glance| written(glance)));
        Json::object([("schema", Json::Count(1)), ("records", records)]).pretty()
    } else {
        let mut text: String = listed.iter().map(|glance| entry(glance)).collect();
        text.push_str(&format!("{} of {} records\n", listed.len(), all.len()));
        text
    };
    match say(&text) {
        Ok(()) => Status::Done,
        Err(fault) => {
            tell(&format!("the list cannot be written: {fault}"));
            Status::Interrupted
        }
    }
}

fn wanted(glance: &Glance, with: Option<&str>, only: Option<Only>) -> bool {
    let holds =
        |text: &str| with.is_none_or(|with| text.to_lowercase().contains(&with.to_lowercase()));
    let texts = [
        &glance.path,
        &glance.title,
        &glance.question,
        &glance.plan_digest,
        &glance.result_digest,
    ];
    let state = match only {
        None => true,
        Some(Only::Sealed) => glance.state == State::Sealed,
        Some(Only::Open) => glance.state == State::Open,
        Some(Only::Unreadable) => glance.state == State::Unreadable,
        Some(Only::Met) => glance.goal == "met",
        Some(Only::Missed) => glance.goal == "missed",
    };
    state && texts.into_iter().any(|text| holds(text))
}

/// A record in three lines.
fn entry(glance: &Glance) -> String {
    let goal = match &*glance.goal {
        "" | "none" => String::new(),
        goal => format!(", goal {goal}"),
    };
    let result = match glance.result_digest.get(..12) {
        Some(digest) => format!(", result {digest}"),
        None => String::new(),
    };
    let words = if glance.words.is_empty() {
        String::new()
    } else {
        format!(": {}", clean(&glance.words))
    };
    let mut text = format!(
        "{}  {}{goal}{result}{words}\n",
        clean(&glance.path),
        glance.state.word()
    );
    if !glance.title.is_empty() {
        text.push_str(&format!("    {}\n", clean(&glance.title)));
    }
    if !glance.headlines.is_empty() {
        let figures: Vec<String> = glance.headlines.iter().map(told).collect();
        let more = glance.estimands - glance.headlines.len() as u64;
        let more = match (more, glance.points) {
            (0, 0..=1) => String::new(),
            (0, points) => format!("; {points} points"),
            (more, 0..=1) => format!("; {more} more"),
            (more, points) => format!("; {more} more, at {points} points"),
        };
        text.push_str(&format!("    {}{more}\n", figures.join(", ")));
    }
    text.push('\n');
    text
}

fn told(one: &Headline) -> String {
    let unit = one
        .unit
        .as_ref()
        .map_or(String::new(), |unit| format!(" {unit}"));
    clean(&format!(
        "{} = {}{unit}",
        one.name,
        figure(one.value, one.mcse)
    ))
}

/// Names may come from strangers: no control characters reach the screen.
fn clean(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect()
}
