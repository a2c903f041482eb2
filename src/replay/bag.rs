//! (a) The bag whole, and nothing in it that no record has.

use super::opened::{Opened, Stated};
use crate::course::Phase;
use crate::record::{self, checkpoints, draws_file, trail_file};
use std::collections::BTreeSet;
use std::path::Path;

/// Every difference of a bag from its lists.
pub fn check(folder: &Path) -> Vec<String> {
    record::check_bag(folder).unwrap_or_else(|fault| vec![fault.to_string()])
}

/// What is not to be read at all.
pub fn pitfalls(folder: &Path) -> Vec<String> {
    record::pitfalls(folder).unwrap_or_else(|fault| vec![fault.to_string()])
}

/// Files under `data/` that a record of this plan does not have.
pub fn strangers(folder: &Path, opened: &Opened, rendered: &[&str]) -> Vec<String> {
    let mut known: BTreeSet<String> = rendered.iter().map(|name| (*name).to_owned()).collect();
    known.extend(
        [
            "data/study.toml",
            "data/inputs.json",
            record::CRATE_METADATA,
        ]
        .map(String::from),
    );
    known.insert(trail_file::NAME.into());
    known.extend(opened.inputs.iter().cloned());
    for point in 0..opened.plan.points.len() {
        known.insert(checkpoints::name(point));
        known.extend([Phase::BurnIn, Phase::Draws].map(|phase| draws_file::name(point, phase)));
    }
    let files = match record::payload(folder) {
        Ok(files) => files.into_iter(),
        Err(fault) => return vec![fault.to_string()],
    };
    files
        .map(|(name, _)| format!("data/{name}"))
        .filter(|name| !known.contains(name))
        .map(|name| format!("{name} is no part of a record of this plan"))
        .collect()
}

/// The version of the program that sealed a record, as it says itself.
pub fn version(folder: &Path) -> Option<String> {
    let agent = record::label(folder, "Bag-Software-Agent")?;
    Some(agent.chars().filter(|c| !c.is_control()).take(40).collect())
}

/// What the record's numerics ask for, in words.
pub fn other_numerics(folder: &Path, stated: &Stated) -> String {
    let by = version(folder).unwrap_or("another version".into());
    format!(
        "it was made under numerics {}.{}, which this version does not have; {by} can check the rest",
        stated.numerics.draws, stated.numerics.estimates
    )
}
