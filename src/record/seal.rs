//! Sealing: from the journal of a run that has ended to a record under its name, in bounded memory.

use super::bag;
use super::checkpoints;
use super::circumstances::Circumstances;
use super::draws_file;
use super::fault::RecordFault;
use super::folder::Open;
use super::journal::JournalFile;
use super::trail_file::{self, TrailRow};
use crate::course::{Phase, Quantity};
use crate::engine::trail::{self, Digest, StateHash};
use crate::engine::{Journal, Reader, Stood, Task};
use crate::plan::{CHECKPOINT_BYTES, Keep, Plan};
use crate::report;
use std::collections::BTreeMap;
use std::fs;
use std::io;
use std::path::{Path, PathBuf};

/// The record's files and its run, for archives.
pub const CRATE_METADATA: &str = "data/ro-crate-metadata.json";

/// What is sealed beside the draws.
pub struct Sealing<'a> {
    pub plan: &'a Plan,
    /// Draws a chain in burn-in and after it, of each point; `None` for a point without figures.
    pub lengths: Vec<Option<(u64, u64)>>,
    /// Files rendered from plan and outcome.
    pub files: Vec<(&'static str, Vec<u8>)>,
    /// In hexadecimal.
    pub result_digest: String,
}

/// Writes the record of a run from its journal and gives the folder its name; nothing in it changes any more.
/// The journal is that of the folder, or another's, which stays as it is.
pub fn seal(
    mut open: Open,
    journal: Option<&mut JournalFile>,
    sealing: &Sealing<'_>,
    circumstances: Circumstances,
) -> Result<PathBuf, RecordFault> {
    for inner in ["data/draws", "data/checkpoints"] {
        let path = open.path().join(inner);
        match fs::remove_dir_all(&path) {
            Err(fault) if fault.kind() != io::ErrorKind::NotFound => {
                return Err(RecordFault::disk("clear", &path, &fault));
            }
            _ => {}
        }
        fs::create_dir_all(&path).map_err(|fault| RecordFault::disk("make", &path, &fault))?;
    }
    let journal = journal.unwrap_or(&mut open.journal);
    let shelf = journal.rescan()?;
    let (reader, lacking) = (journal.reader(), journal.lacking());
    let mut rows = Vec::new();
    for (point, lengths) in sealing.lengths.iter().enumerate() {
        if let Some(lengths) = lengths {
            let chains = cut(
                &shelf,
                point,
                sealing.plan.points[point].ensemble.chains,
                *lengths,
            )
            .ok_or_else(|| lacking.clone())?;
            rows.extend(trail_of(sealing.plan, point, &chains)?);
            write_point(open.path(), sealing.plan, point, &chains, &*reader)?;
        }
    }
    let path = open.path().join(trail_file::NAME);
    trail_file::write(&path, &rows).map_err(|fault| RecordFault::disk("write", &path, &fault))?;
    for (name, bytes) in &sealing.files {
        open.write(name, bytes)?;
    }
    let circumstances = circumstances.end(&open, "sealed")?;
    let files = bag::payload(open.path())?;
    let crate_metadata =
        report::crate_metadata(sealing.plan, &sealing.result_digest, &circumstances, &files);
    open.write(CRATE_METADATA, crate_metadata.pretty().as_bytes())?;
    bag::write(open.path(), &sealing.plan.title, &sealing.result_digest)?;
    open.finish()
}

/// The blocks of every chain of a point up to these lengths.
fn cut(
    shelf: &BTreeMap<(usize, usize), Vec<Stood>>,
    point: usize,
    chains: u64,
    (burn_in, draws): (u64, u64),
) -> Option<Vec<Vec<Stood>>> {
    let one = |chain: u64| {
        let stood = shelf.get(&(point, chain as usize))?;
        let (mut phases, mut blocks) = ([0, 0], Vec::new());
        for block in stood {
            let (done, most) = match block.phase {
                Phase::BurnIn => (&mut phases[0], burn_in),
                Phase::Draws => (&mut phases[1], draws),
            };
            if *done + block.draws as u64 > most {
                break;
            }
            *done += block.draws as u64;
            blocks.push(*block);
        }
        (phases == [burn_in, draws]).then_some(blocks)
    };
    (0..chains).map(one).collect()
}

/// The rows of a point's trail. The starts are made again from plan and root.
fn trail_of(
    plan: &Plan,
    point: usize,
    chains: &[Vec<Stood>],
) -> Result<Vec<TrailRow>, RecordFault> {
    let starts = starts(plan, point).map_err(RecordFault::Input)?;
    let mut rows = Vec::new();
    for (chain, (blocks, (state_hash, link))) in chains.iter().zip(starts).enumerate() {
        rows.push(TrailRow {
            point,
            chain,
            block: 0,
            phase: Phase::BurnIn,
            draws: 0,
            draws_digest: trail::plain(&[]),
            state_hash,
            link,
        });
        rows.extend((1..).zip(blocks).map(|(block, stood)| TrailRow {
            point,
            chain,
            block,
            phase: stood.phase,
            draws: stood.draws as u64,
            draws_digest: stood.draws_digest,
            state_hash: stood.state_hash,
            link: stood.link,
        }));
    }
    Ok(rows)
}

/// State hash and link of the start of every chain of a point, from plan and root alone. Fails in words where
/// a chain finds no start.
pub fn starts(plan: &Plan, point: usize) -> Result<Vec<(StateHash, Digest)>, String> {
    let task = Task::of(plan, point);
    let mut starts = Vec::new();
    for chains in task.chains.chunks(crate::engine::WIDEST) {
        let seeds: Vec<_> = chains.iter().map(|chain| chain.seed.clone()).collect();
        let course = task.model.clone().course(&seeds).map_err(|fault| fault.0)?;
        for (lane, chain) in chains.iter().enumerate() {
            let hash = StateHash::of(&course.save(lane));
            starts.push((hash, trail::first_link(&chain.key, &hash)));
        }
    }
    Ok(starts)
}

fn write_point(
    folder: &Path,
    plan: &Plan,
    point: usize,
    chains: &[Vec<Stood>],
    reader: &dyn Reader,
) -> Result<(), RecordFault> {
    let quantities: &[Quantity] = plan.points[point].model.quantities();
    if plan.keep == Keep::Draws {
        for phase in [Phase::BurnIn, Phase::Draws] {
            let of_phase = |blocks: &Vec<Stood>| -> Vec<Stood> {
                blocks
                    .iter()
                    .filter(|block| block.phase == phase)
                    .copied()
                    .collect()
            };
            let blocks: Vec<Vec<Stood>> = chains.iter().map(of_phase).collect();
            if blocks.iter().all(Vec::is_empty) {
                continue;
            }
            let path = folder.join(draws_file::name(point, phase));
            draws_file::write(&path, quantities, &blocks, reader)
                .map_err(|fault| RecordFault::disk("write", &path, &fault))?;
        }
    }
    let count = chains.first().map_or(0, Vec::len);
    let at_hand = |at: usize| chains.iter().all(|blocks| blocks[at].kept);
    let phases: Vec<(Phase, bool)> = (0..count)
        .map(|at| (chains[0][at].phase, at_hand(at)))
        .collect();
    let path = folder.join(checkpoints::name(point));
    let disk = |fault| RecordFault::disk("write", &path, &fault);
    let size = match chains.first().and_then(|blocks| blocks.last()) {
        Some(last) => {
            let state = reader
                .state(last)
                .map_err(|words| disk(io::Error::other(words)))?;
            state.frozen.len() + state.moving.len()
        }
        None => 0,
    };
    let bound = CHECKPOINT_BYTES / plan.points.len() as u64;
    let kept = checkpoints::kept(&phases, size, chains.len(), bound);
    checkpoints::write(&path, chains, &kept, reader).map_err(disk)
}
