//! Blocks taken over from the records beside a run, before its first draw.

use super::output::tell;
use super::registry::FAMILIES;
use super::signals;
use crate::canon::Json;
use crate::engine::Task;
use crate::estimates::count;
use crate::plan::Plan;
use crate::record::{Circumstances, Open, RecordFault};
use crate::replay::{Given, Search, gifts};
use std::fs;
use std::path::{Path, PathBuf};

/// Fills the journal of a run that has no draws yet with those that the records beside it have to give.
pub fn take_over(
    plan: &Plan,
    tasks: &[Task],
    open: &mut Open,
    circumstances: &mut Circumstances,
) -> Result<(), RecordFault> {
    let search = Search {
        plan,
        tasks,
        records: records(open.path()),
        registry: &FAMILIES,
        stop: &signals::STOP,
        tell: &tell,
    };
    let gifts = gifts(&search);
    let given = gifts.given();
    if given.is_empty() {
        return Ok(());
    }
    // Entered before the first block: whoever comes after a kill knows where the blocks are from.
    circumstances.enter("taken_over", Json::array(given.iter().map(json)));
    circumstances.save(open)?;
    match gifts.take(&mut open.journal, &signals::STOP) {
        Ok(()) => given.iter().for_each(|given| tell(&words(given))),
        Err(words) => {
            tell(&format!("nothing is taken over: {words}"));
            circumstances.enter("not_taken_over", Json::text(words));
        }
    }
    Ok(())
}

/// The sealed records of the study whose run is open here, in the order of their names.
fn records(open: &Path) -> Vec<PathBuf> {
    let beside = open.parent().and_then(|folder| fs::read_dir(folder).ok());
    let paths = beside.into_iter().flatten().flatten();
    let sealed = |path: &PathBuf| {
        let name = path.file_name().and_then(|name| name.to_str());
        let plain = |name: &str| name.len() == 12 && name.bytes().all(|b| b.is_ascii_hexdigit());
        name.is_some_and(plain) && path.is_dir()
    };
    let mut all: Vec<PathBuf> = paths.map(|entry| entry.path()).filter(sealed).collect();
    all.sort();
    all
}

fn words(given: &Given) -> String {
    let points = match given.points {
        1 => String::new(),
        points => format!(" at {} points", count(points)),
    };
    format!(
        "taken over from {}: {} draws of all chains{points}, in {} blocks, need not be drawn again",
        given.record.display(),
        count(given.draws),
        count(given.blocks)
    )
}

fn json(given: &Given) -> Json {
    Json::object([
        ("plan_digest", Json::text(given.plan_digest.clone())),
        ("result_digest", Json::text(given.result_digest.clone())),
        ("points", Json::Count(given.points)),
        ("blocks", Json::Count(given.blocks)),
        ("draws", Json::Count(given.draws)),
    ])
}
