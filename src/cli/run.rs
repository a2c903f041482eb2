//! `run`: from a study to its folder of results, and what is said about it.

use super::outcome::{self, Filed, NotFiled};
use super::output::{say, tell};
use super::progress::Progress;
use super::signals;
use super::status::Status;
use super::study::{self, Read};
use super::taken;
use crate::engine::{
    Event, Finished, Halt, Journal, Mark, Orders, PlanJudge, Reader, Sink, Stood, Task, conduct,
    paired,
};
use crate::estimates::count;
use crate::plan::Plan;
use crate::record::{self, Circumstances, Cut, Entry, Folder, JournalFile, Open, RecordFault};
use std::num::NonZeroUsize;
use std::path::Path;
use std::sync::Arc;

/// Runs a study, goes on with it, or reports it again.
pub fn run(file: &Path, into: &Path, threads: Option<u16>, json: bool) -> Status {
    let done = carry_out(file, into, threads);
    match done {
        Ok(filed) => report(&filed, json),
        Err(status) => status,
    }
}

/// Prints the results that stand in a folder.
pub fn report(filed: &Filed, json: bool) -> Status {
    let name = if json {
        "data/summary.json"
    } else {
        "data/summary.txt"
    };
    let printed = record::read(&filed.path, name).and_then(|text| {
        let text = if json {
            text
        } else {
            format!("{text}\nFiles: {}\n", filed.path.display())
        };
        say(&text).map_err(|fault| RecordFault::disk("write", "stdout".as_ref(), &fault))
    });
    match printed {
        Ok(()) => filed.status,
        Err(fault) => tell_record(&fault).max(filed.status),
    }
}

fn carry_out(file: &Path, into: &Path, threads: Option<u16>) -> Result<Filed, Status> {
    let read = study::read(file)?;
    let stops = study::stops(&read.plan);
    if !stops.is_empty() {
        return Err(study::tell_stops(&stops));
    }
    let folder = Folder::of(into, file, &read.plan.digest());
    match folder.enter().map_err(|fault| tell_record(&fault))? {
        Entry::Done(path) => {
            let filed = outcome::again(path, &read.plan).map_err(|fault| tell_record(&fault))?;
            tell("this study was run before; its results are reported from its files");
            Ok(filed)
        }
        Entry::Open(open) => {
            let threads = threads.map_or_else(all_threads, usize::from);
            work(&read, *open, threads)
        }
    }
}

#[expect(
    clippy::disallowed_methods,
    reason = "the number of threads, where none is given"
)]
pub fn all_threads() -> usize {
    std::thread::available_parallelism().map_or(1, NonZeroUsize::get)
}

/// Draws until every point has ended, and files what came out.
fn work(read: &Read, mut open: Open, threads: usize) -> Result<Filed, Status> {
    let plan = &read.plan;
    let tasks = Task::all(plan);
    let ready = prepare(read, &tasks, &open, threads);
    let mut circumstances = ready.map_err(|fault| tell_record(&fault))?;
    signals::watch();
    if open.journal.stood == 0 {
        taken::take_over(plan, &tasks, &mut open, &mut circumstances)
            .map_err(|fault| tell_record(&fault))?;
    }
    let mut desk = Desk {
        journal: &mut open.journal,
        progress: Progress::new(),
    };
    let orders = Orders {
        threads,
        lanes: None,
        stop: &signals::STOP,
    };
    let ends = conduct(&tasks, &PlanJudge::new(plan), &orders, &mut desk);
    desk.progress.end();
    let ends = ends.and_then(|ends| {
        let paired = paired(plan, &ends, threads, &signals::STOP)?;
        Ok((ends, paired))
    });
    let (ends, paired) = match ends {
        Ok(ends) => ends,
        Err(halt) => {
            let (status, words) = halted(&halt);
            tell(&words);
            let _ = circumstances.end(&open, &words);
            return Err(status);
        }
    };
    outcome::file(plan, &ends, paired, open, None, circumstances).map_err(tell_not_filed)
}

/// Tells why nothing was filed.
pub fn tell_not_filed(fault: NotFiled) -> Status {
    match fault {
        NotFiled::NoStart(words) => {
            tell(&words);
            Status::Fault
        }
        NotFiled::Record(fault) => tell_record(&fault),
    }
}

/// What must stand before the first draw: room, study, inputs, plan, circumstances.
fn prepare(
    read: &Read,
    tasks: &[Task],
    open: &Open,
    threads: usize,
) -> Result<Circumstances, RecordFault> {
    let needs = record::needs(tasks);
    if let Some(warning) = record::check_room(open.path(), needs, open.journal.length())? {
        tell(&warning);
    }
    if let Some(cut) = &open.journal.cut {
        tell(&cut_words(cut));
    }
    if open.journal.stood > 0 {
        tell(&format!(
            "going on with a run that was interrupted: {} blocks stand",
            open.journal.stood
        ));
    }
    keep_study(read, open)?;
    begin(open, &read.plan, threads)
}

/// Enters a start in the circumstances, and tells what is wrong with the list of runs begun.
pub fn begin(open: &Open, plan: &Plan, threads: usize) -> Result<Circumstances, RecordFault> {
    let circumstances = Circumstances::begin(open, plan, threads)?;
    if let Some(warning) = &circumstances.warning {
        tell(&format!("warning: {warning}"));
    }
    Ok(circumstances)
}

/// Study, inputs and plan into the folder.
pub fn keep_study(read: &Read, open: &Open) -> Result<(), RecordFault> {
    open.write("data/study.toml", &read.bytes)?;
    record::keep_inputs(open, &read.plan.inputs)?;
    open.write("data/plan.json", read.plan.json().pretty().as_bytes())
}

/// What was cut off the journal: after a kill the rest of its last block, which is as it should be; otherwise the
/// file was damaged.
pub fn cut_words(cut: &Cut) -> String {
    let bytes = count(cut.bytes);
    if cut.behind == 0 {
        return format!(
            "the last block of the journal is not whole, as after a kill: {bytes} bytes are dropped and drawn again"
        );
    }
    format!(
        "warning: the journal was damaged: the block at byte {} is not as it was written. It is dropped with the {} \
         blocks behind it ({bytes} bytes in all), and all of them are drawn again, to the same digits. A failing disk, a \
         power cut or another program may have done it",
        count(cut.at),
        count(cut.behind),
    )
}

pub fn halted(halt: &Halt) -> (Status, String) {
    match halt {
        Halt::Interrupted => (
            Status::Interrupted,
            "interrupted; what was drawn stands, and the same command goes on from there".into(),
        ),
        Halt::Start { words, .. } => (Status::Fault, words.clone()),
        Halt::Journal(words) => (
            Status::Interrupted,
            format!(
                "{words}\nwhat was drawn before stands, and the same command goes on from there"
            ),
        ),
        Halt::Own(words) => (
            Status::Own,
            format!(
                "this is the program's own fault, not that of your study: {words}\nPlease report it with \
                 the study that led to it."
            ),
        ),
    }
}

pub fn tell_record(fault: &RecordFault) -> Status {
    tell(&fault.to_string());
    match fault {
        RecordFault::Held { .. } => {
            tell("wait for it to end, or give another folder with --into");
            Status::Interrupted
        }
        RecordFault::Disk(_) => {
            tell("nothing drawn before is lost; the same command goes on from there");
            Status::Interrupted
        }
        RecordFault::Input(_) | RecordFault::Place { .. } | RecordFault::Foreign { .. } => {
            Status::Fault
        }
        RecordFault::Changed { .. } => Status::Broken,
    }
}

/// Blocks go to the journal, events to the screen.
struct Desk<'a> {
    journal: &'a mut JournalFile,
    progress: Progress,
}

impl Journal for Desk<'_> {
    fn standing(&mut self, point: usize, chain: usize) -> Vec<Stood> {
        self.journal.standing(point, chain)
    }
    fn append(&mut self, block: &Finished) -> Result<Mark, String> {
        self.journal.append(block)
    }
    fn sync(&mut self) -> Result<(), String> {
        self.journal.sync()
    }
    fn reader(&self) -> Arc<dyn Reader> {
        self.journal.reader()
    }
}

impl Sink for Desk<'_> {
    fn event(&mut self, event: &Event) {
        if let Event::Reviewing { .. } = event {
            self.journal.sync_soon();
        }
        self.progress.event(event);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_halt_has_its_status_and_words() {
        let words = || "x".to_owned();
        let halts = [
            (Halt::Interrupted, Status::Interrupted, "goes on"),
            (Halt::Journal(words()), Status::Interrupted, "goes on"),
            (Halt::Own(words()), Status::Own, "own fault"),
            (
                Halt::Start {
                    point: 0,
                    words: words(),
                },
                Status::Fault,
                "x",
            ),
        ];
        for (halt, status, part) in halts {
            let (found, said) = halted(&halt);
            assert_eq!(found, status);
            assert!(said.contains(part), "{said}");
        }
    }

    #[test]
    fn every_fault_of_a_folder_has_its_status() {
        let path = || "results/x".into();
        let by = "process 7".to_owned();
        let words = "x".to_owned();
        let faults = [
            (RecordFault::Held { path: path(), by }, Status::Interrupted),
            (RecordFault::Disk("x".into()), Status::Interrupted),
            (RecordFault::Input("x".into()), Status::Fault),
            (
                RecordFault::Place {
                    words: words.clone(),
                },
                Status::Fault,
            ),
            (
                RecordFault::Changed {
                    path: path(),
                    differences: words.clone(),
                },
                Status::Broken,
            ),
            (
                RecordFault::Foreign {
                    path: path(),
                    words,
                },
                Status::Fault,
            ),
        ];
        for (fault, status) in faults {
            assert_eq!(tell_record(&fault), status);
        }
    }
}
