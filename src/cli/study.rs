//! What every command that takes a study begins with.

use super::output::tell;
use super::registry::FAMILIES;
use super::status::Status;
use crate::course::Condition;
use crate::place::{Fault, Look, show};
use crate::plan::Plan;
use crate::reading::{self, Files, LARGEST_STUDY};
use crate::report::grounds_of;
use std::io::IsTerminal;
use std::path::Path;

/// A study as read: its plan, and its bytes.
pub struct Read {
    pub plan: Plan,
    pub bytes: Vec<u8>,
}

/// Reads and resolves a study; its faults are told.
pub fn read(file: &Path) -> Result<Read, Status> {
    let whole = |what| vec![Fault::whole(what)];
    let resolved = || -> Result<Read, Vec<Fault>> {
        let bytes = reading::read(file, LARGEST_STUDY).map_err(whole)?.bytes;
        let source = reading::text(bytes.clone(), &file.display().to_string());
        let source = source.map_err(|fault| vec![fault])?;
        let plan = crate::study::resolve_text(source, &Files::beside(file), &FAMILIES)?;
        Ok(Read { plan, bytes })
    };
    resolved().map_err(|faults| tell_faults(&faults))
}

fn tell_faults(faults: &[Fault]) -> Status {
    let terminal = std::io::stderr().is_terminal();
    let look = Look {
        colour: terminal && !no_colour(),
        width: None,
    };
    let count = match faults.len() {
        1 => "one fault".to_owned(),
        count => format!("{count} faults"),
    };
    tell(&format!("{}{count}; nothing was run", show(faults, look)));
    Status::Fault
}

#[expect(
    clippy::disallowed_methods,
    reason = "NO_COLOR is the reader's wish for the screen; no digit sees it"
)]
fn no_colour() -> bool {
    std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty())
}

/// The failed conditions that stop a plan before its first draw, in words.
pub fn stops(plan: &Plan) -> Vec<String> {
    let mut words = Vec::new();
    for point in 0..plan.points.len() {
        let grounds = grounds_of(plan, point, None);
        for Condition { name, evidence, .. } in grounds.stops() {
            let sentence = format!("the condition `{name}` has failed: {evidence}");
            if !words.contains(&sentence) {
                words.push(sentence);
            }
        }
    }
    words
}

/// Tells why a plan is not run.
pub fn tell_stops(stops: &[String]) -> Status {
    for words in stops {
        tell(words);
    }
    tell(
        "nothing was run; to go on nevertheless, name it in [grounds] accept and say why in `because`",
    );
    Status::Missed
}
