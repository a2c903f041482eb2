//! `seal`: closes an interrupted run as it stands, under a plan that says so. The run stays where it is.

use super::outcome::{self, Filed};
use super::output::tell;
use super::run::{
    all_threads, begin, cut_words, halted, keep_study, report, tell_not_filed, tell_record,
};
use super::signals;
use super::status::Status;
use super::study::{self, Read};
use crate::canon::{self, Json};
use crate::course::Phase;
use crate::engine::{
    Columns, Ended, Halt, Journal, Judge, Ledger, PlanJudge, PointEnd, Reviewed, Stood, common,
    paired,
};
use crate::estimates::count;
use crate::plan::{self, BurnIn, Plan, Point};
use crate::record::{Circumstances, Entry, Folder, JournalFile, Open, RecordFault, Seen};
use crate::report::CLOSED_BEFORE;
use std::path::Path;

/// Closes the run of a study and reports what it came to.
pub fn seal(file: &Path, into: &Path) -> Status {
    match close(file, into) {
        Ok(filed) => report(&filed, false),
        Err(status) => status,
    }
}

fn close(file: &Path, into: &Path) -> Result<Filed, Status> {
    let read = study::read(file)?;
    let sealed = |path: &Path| {
        let path = path.display();
        tell(&format!(
            "this run came to its end and is sealed: {path}; there is nothing to close"
        ));
        Status::Fault
    };
    let folder = Folder::of(into, file, &read.plan.digest());
    match folder.look() {
        Seen::Done(path) => return Err(sealed(&path)),
        Seen::Begun => {}
        Seen::Nothing => {
            tell(&format!(
                "no run of this study was begun under {}: there is nothing to close",
                into.display()
            ));
            return Err(Status::Fault);
        }
    }
    let mut run = match folder.enter().map_err(|fault| tell_record(&fault))? {
        Entry::Done(path) => return Err(sealed(&path)),
        Entry::Open(run) => run,
    };
    if let Some(cut) = &run.journal.cut {
        tell(&cut_words(cut));
    }
    let blocks = standing(&read.plan, &run.journal);
    let lengths: Vec<Option<(u64, u64)>> = (read.plan.points.iter().zip(&blocks))
        .map(|(point, chains)| length(point.ensemble.burn_in, chains.first()?))
        .collect();
    if lengths.iter().all(Option::is_none) {
        tell("no point of this run has draws after its burn-in yet: there is nothing to close");
        return Err(Status::Fault);
    }
    if (read.plan.points.iter().zip(&lengths)).all(|(point, length)| whole(point, *length)) {
        tell("every draw that the plan may ask for stands: `odograph run` ends and seals this run");
        return Err(Status::Fault);
    }
    let closed = Read {
        plan: Plan {
            closed: Some(lengths),
            ..read.plan.clone()
        },
        bytes: read.bytes,
    };
    let folder = Folder::of(into, file, &closed.plan.digest());
    let filed = match folder.enter().map_err(|fault| tell_record(&fault))? {
        Entry::Done(path) => {
            tell("this run was closed here before; the record is reported from its files");
            outcome::again(path, &closed.plan).map_err(|fault| tell_record(&fault))?
        }
        Entry::Open(open) => file_closed(&read.plan, &closed, &blocks, *open, &mut run)?,
    };
    tell(&format!(
        "closed as it stands: {}\nthe run itself stays in {}; `odograph run` goes on with it",
        filed.path.display(),
        run.path().display()
    ));
    Ok(filed)
}

/// Figures from the blocks that stand, sealed in a folder of their own.
fn file_closed(
    plan: &Plan,
    closed: &Read,
    blocks: &[Vec<Vec<Stood>>],
    open: Open,
    run: &mut Open,
) -> Result<Filed, Status> {
    signals::watch();
    let threads = all_threads();
    let begun = || -> Result<Circumstances, RecordFault> {
        keep_study(closed, &open)?;
        Circumstances::follow(&open, run)?;
        let mut circumstances = begin(&open, &closed.plan, threads)?;
        let of = [
            ("run", Json::text(canon::hex(&plan.digest()))),
            ("blocks", Json::Count(run.journal.stood)),
        ];
        circumstances.enter("closes", Json::object(of));
        Ok(circumstances)
    };
    let circumstances = begun().map_err(|fault| tell_record(&fault))?;
    let ends = ends(&closed.plan, blocks, &run.journal).and_then(|ends| {
        let paired = paired(&closed.plan, &ends, threads, &signals::STOP)?;
        Ok((ends, paired))
    });
    let (ends, paired) = ends.map_err(|halt| {
        let (status, words) = halted(&halt);
        tell(&words);
        let _ = circumstances.clone().end(&open, &words);
        status
    })?;
    let journal = Some(&mut run.journal);
    outcome::file(&closed.plan, &ends, paired, open, journal, circumstances).map_err(tell_not_filed)
}

/// Of each point, the blocks that stand for all of its chains.
fn standing(plan: &Plan, journal: &JournalFile) -> Vec<Vec<Vec<Stood>>> {
    let shelf = journal.standing_blocks();
    let point = |point: usize| {
        let chains = 0..plan.points[point].ensemble.chains as usize;
        let none = Vec::new();
        let stood: Vec<&[Stood]> = chains
            .map(|chain| shelf.get(&(point, chain)).unwrap_or(&none).as_slice())
            .collect();
        let all = common(&stood);
        stood.iter().map(|blocks| blocks[..all].to_vec()).collect()
    };
    (0..plan.points.len()).map(point).collect()
}

/// Draws in burn-in and after it, if the burn-in is whole and draws follow it.
fn length(burn_in: BurnIn, blocks: &[Stood]) -> Option<(u64, u64)> {
    let draws = |phase| -> u64 {
        let blocks = blocks.iter().filter(|block| block.phase == phase);
        blocks.map(|block| block.draws as u64).sum()
    };
    let (before, after) = (draws(Phase::BurnIn), draws(Phase::Draws));
    let whole = match burn_in {
        BurnIn::Fixed(draws) => before == draws,
        // Only a burn-in that has ended is followed by draws.
        BurnIn::Chosen { .. } => true,
    };
    (whole && after > 0).then_some((before, after))
}

/// Whether a point has all draws that its plan may come to.
fn whole(point: &Point, length: Option<(u64, u64)>) -> bool {
    let reviews = plan::reviews(&point.ensemble, point.goal.as_ref(), point.block);
    length.is_some_and(|(_, draws)| reviews.last() == Some(&draws))
}

/// The figures of every point where it was closed.
fn ends(
    closed: &Plan,
    blocks: &[Vec<Vec<Stood>>],
    journal: &JournalFile,
) -> Result<Vec<PointEnd<Reviewed>>, Halt> {
    let judge = PlanJudge::new(closed);
    let lengths = closed.closed.iter().flatten();
    let mut ends = Vec::new();
    for (point, (length, chains)) in lengths.zip(blocks).enumerate() {
        let Some((burn_in, draws)) = *length else {
            let ended = Err(CLOSED_BEFORE.into());
            ends.push(PointEnd { point, ended });
            continue;
        };
        let ledger = |blocks: &Vec<Stood>| {
            let mut ledger = Ledger::default();
            for block in blocks {
                ledger.push(block.phase, block.draws, block.mark);
            }
            ledger
        };
        let columns = Columns::new(
            chains.iter().map(ledger).collect(),
            journal.reader(),
            Phase::Draws,
            0..draws,
        );
        tell(&format!(
            "estimates after {} draws a chain{}",
            count(draws),
            match blocks.len() {
                1 => String::new(),
                points => format!(", point {} of {points}", point + 1),
            }
        ));
        let verdict = judge.review(point, &columns, &signals::STOP);
        let verdict = verdict.map_err(|words| match signals::stopped() {
            true => Halt::Interrupted,
            false => Halt::Journal(words),
        })?;
        let last = |blocks: &Vec<Stood>| blocks.last().map(|block| block.link);
        ends.push(PointEnd {
            point,
            ended: Ok(Ended {
                burn_in,
                settling: None,
                draws,
                met: verdict.met,
                figures: verdict.figures,
                links: chains.iter().filter_map(last).collect(),
                notes: Vec::new(),
            }),
        });
    }
    Ok(ends)
}
