//! A plan run again from its beginning, in a journal of its own that is thrown away.

use super::draws::Trails;
use super::opened::Opened;
use super::verify::Request;
use crate::engine::{
    Event, Finished, Halt, Journal, Mark, Orders, PlanJudge, PointEnd, Reader, Reviewed, Sink,
    Stood, Task, conduct, paired,
};
use crate::plan::Plan;
use crate::record::JournalFile;
use crate::report::Outcome;
use std::sync::Arc;
use std::time::Instant;

/// Times a part of the work, for the account alone.
pub struct Watch(Instant);

impl Watch {
    #[expect(
        clippy::disallowed_methods,
        reason = "told to the reader; no digit sees it"
    )]
    pub fn start() -> Watch {
        Watch(Instant::now())
    }

    pub fn seconds(&self) -> f64 {
        self.0.elapsed().as_secs_f64()
    }
}

/// Blocks go to the journal; events nowhere.
struct Quiet(JournalFile);

impl Journal for Quiet {
    fn standing(&mut self, point: usize, chain: usize) -> Vec<Stood> {
        self.0.standing(point, chain)
    }
    fn append(&mut self, block: &Finished) -> Result<Mark, String> {
        self.0.append(block)
    }
    fn sync(&mut self) -> Result<(), String> {
        Ok(())
    }
    fn reader(&self) -> Arc<dyn Reader> {
        self.0.reader()
    }
}

impl Sink for Quiet {
    fn event(&mut self, _: &Event) {}
}

/// Runs a plan from its beginning. Fails in words.
pub fn run<'a>(
    plan: &'a Plan,
    request: &Request<'_>,
) -> Result<(Outcome<'a>, Vec<PointEnd<Reviewed>>), String> {
    let folder =
        tempfile::tempdir().map_err(|fault| format!("no folder for the draws: {fault}"))?;
    let journal = JournalFile::open(&folder.path().join("journal"), &plan.digest());
    let journal = journal.map_err(|fault| fault.to_string())?;
    let orders = Orders {
        threads: request.threads,
        lanes: None,
        stop: request.stop,
    };
    let tasks = Task::all(plan);
    let ends = conduct(&tasks, &PlanJudge::new(plan), &orders, &mut Quiet(journal))
        .map_err(Halt::words)?;
    let paired = paired(plan, &ends, request.threads, request.stop).map_err(Halt::words)?;
    Ok((Outcome::of(plan, &ends, paired), ends))
}

/// What the plan of a record that keeps no draws comes to; its trail must come out the same.
pub fn outcome<'a>(
    opened: &'a Opened,
    trails: &Trails,
    request: &Request<'_>,
) -> Result<Outcome<'a>, String> {
    if opened.plan.closed.is_some() {
        return Err("a closed run that keeps no draws cannot be checked".into());
    }
    let (outcome, ends) = run(&opened.plan, request)?;
    for (end, trail) in ends.iter().zip(trails) {
        let same = match (&end.ended, trail) {
            (Ok(ended), Ok(trail)) => ended.links == trail.links(),
            (Err(_), Err(_)) => true,
            _ => false,
        };
        if !same {
            return Err(format!(
                "point {}: the plan gives other draws",
                end.point + 1
            ));
        }
    }
    Ok(outcome)
}
