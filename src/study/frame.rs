//! What a study says of itself, the same at every point: title, question, root of the streams, what is kept,
//! what is accepted.

use crate::course::CONDITIONS;
use crate::place::{Fault, Faults, Text, nearest};
use crate::plan::{Accepted, Keep};
use crate::reading::{Content, Section};

/// The keys of the top level.
pub(super) const TOP: [&str; 13] = [
    "title", "question", "seeds", "data", "model", "predict", "estimand", "sampler", "ensemble",
    "goal", "grounds", "keep", "sweep",
];

pub(super) struct Frame {
    pub title: String,
    pub question: String,
    pub root: String,
    pub keep: Keep,
    pub accepted: Accepted,
}

impl Frame {
    pub fn read(root: &Section, faults: &mut Faults) -> Option<Frame> {
        for key in TOP {
            root.has(key);
        }
        root.finish(faults);
        let title = root
            .need("title", "a line that says what is studied", faults)
            .and_then(|value| value.text(faults));
        let empty = |title: &&Text| title.text.trim().is_empty() && !root.damaged();
        if let Some(title) = title.as_ref().filter(empty) {
            faults.push(Fault::at(title.place.clone(), "the title is empty"));
        }
        let question = root.text("question", faults);
        let seed = seed(root, faults);
        let keep = match root.word("keep", &["draws", "summary"], faults) {
            Some("summary") => Keep::Summary,
            _ => Keep::Draws,
        };
        let accepted = accepted(root, faults);
        Some(Frame {
            title: title?.text,
            question: question.map(|text| text.text).unwrap_or_default(),
            root: seed?,
            keep,
            accepted: accepted?,
        })
    }
}

/// `[seeds] root`: text or a whole number; 7 and "7" are the same.
fn seed(root: &Section, faults: &mut Faults) -> Option<String> {
    let seeds = root
        .need(
            "seeds",
            "a table with `root`, a text or a whole number from which all random numbers follow",
            faults,
        )?
        .section(faults)?;
    let value = seeds.need(
        "root",
        "a text or a whole number from which all random numbers follow",
        faults,
    );
    seeds.finish(faults);
    let value = value?;
    match &value.content {
        Content::Integer(number) => Some(number.to_string()),
        Content::Text(text) if !text.text.trim().is_empty() => Some(text.text.clone()),
        Content::Text(_) => {
            faults.push(
                Fault::at(value.place.clone(), "the root is empty").label("any text will do"),
            );
            None
        }
        Content::Number(number) => {
            let what = format!(
                "`{}` must be text or a whole number, not {number}",
                value.path
            );
            faults.push(
                Fault::at(value.place.clone(), what).label("put it in quotes to take it as text"),
            );
            None
        }
        _ => {
            value.refuse("text or a whole number", faults);
            None
        }
    }
}

fn accepted(root: &Section, faults: &mut Faults) -> Option<Accepted> {
    if !root.has("grounds") {
        return Some(Accepted::default());
    }
    let grounds = root.section("grounds", faults)?;
    let conditions = grounds.texts("accept", faults).unwrap_or_default();
    let because = if conditions.is_empty() {
        grounds.text("because", faults)
    } else {
        grounds
            .need(
                "because",
                "why the figures may be trusted nevertheless",
                faults,
            )
            .and_then(|value| value.text(faults))
    };
    grounds.finish(faults);
    for text in &conditions {
        let known = || CONDITIONS.iter().map(|(name, _)| *name);
        if known().any(|name| name == text.text) {
            continue;
        }
        let what = format!("`{}` is not a condition that figures rest on", text.text);
        let fault = Fault::at(text.place.clone(), what).label("not known here");
        faults.push(match nearest(&text.text, known()) {
            Some(near) => fault.help(format!("did you mean `{near}`?")),
            None => {
                let names: Vec<String> = known().map(|name| format!("`{name}`")).collect();
                fault.help(format!("the conditions are {}", names.join(", ")))
            }
        });
    }
    let mut conditions: Vec<String> = conditions.into_iter().map(|text| text.text).collect();
    conditions.sort();
    conditions.dedup();
    Some(Accepted {
        conditions,
        because: because.map(|text| text.text).unwrap_or_default(),
    })
}
