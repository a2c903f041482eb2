//! (c) Every stored draw held against the trail, and the trail against the plan.

use super::opened::Opened;
use crate::course::Phase;
use crate::engine::trail::{self, Digest};
use crate::engine::{Task, blocks};
use crate::plan::Keep;
use crate::record::draws_file::{self, DrawsFile};
use crate::record::trail_file::{self, TrailRow};
use crate::record::{self};
use rayon::prelude::*;
use sha2::{Digest as _, Sha256};
use std::path::Path;
use std::sync::Arc;

/// Blocks of a trail at most: a sanity bound on what a stranger's record may ask us to hold.
const MOST_BLOCKS: u64 = 1 << 23;

/// What a record has of a point.
pub struct PointTrail {
    /// Of each chain, the start and then every block.
    pub chains: Vec<Vec<TrailRow>>,
    pub burn_in: u64,
    pub draws: u64,
    /// Draws of both phases, where the record keeps them.
    pub kept: Option<[Option<Arc<DrawsFile>>; 2]>,
}

impl PointTrail {
    /// The last link of each chain.
    pub fn links(&self) -> Vec<Digest> {
        self.chains
            .iter()
            .map(|rows| rows[rows.len() - 1].link)
            .collect()
    }
}

/// What a record has of its points; of one that found no start, why.
pub type Trails = Vec<Result<PointTrail, String>>;

/// Reads the trail and holds it against the plan: starts, links, lengths of blocks, and that nothing adapted
/// after the burn-in. In words what is wrong.
pub fn trails(folder: &Path, opened: &Opened) -> Result<Trails, Vec<String>> {
    let wrong = |words: &str| format!("{}: {words}", trail_file::NAME);
    let rows = trail_file::read(&folder.join(trail_file::NAME), MOST_BLOCKS);
    let rows = rows.map_err(|words| vec![wrong(&words)])?;
    let points = opened.plan.points.len();
    let mut shelf: Vec<Vec<Vec<TrailRow>>> = opened
        .plan
        .points
        .iter()
        .map(|point| vec![Vec::new(); point.ensemble.chains as usize])
        .collect();
    let mut before = None;
    for row in rows {
        let key = (row.point, row.chain, row.block);
        let chain = shelf
            .get_mut(row.point)
            .and_then(|chains| chains.get_mut(row.chain));
        match chain {
            Some(chain) if before < Some(key) && chain.len() as u64 == row.block => chain.push(row),
            _ => {
                return Err(vec![wrong(&place(
                    row.point,
                    row.chain,
                    row.block,
                    "has no place in it",
                ))]);
            }
        }
        before = Some(key);
    }
    let mut found = Vec::new();
    let mut trails = Vec::with_capacity(points);
    for (index, chains) in shelf.into_iter().enumerate() {
        match point(folder, opened, index, chains) {
            Ok(trail) => trails.push(trail),
            Err(words) => found.extend(words.iter().map(|words| wrong(words))),
        }
    }
    if found.is_empty() {
        Ok(trails)
    } else {
        Err(found)
    }
}

/// `point 1, chain 2, block 3 …`
pub fn place(point: usize, chain: usize, block: u64, words: &str) -> String {
    format!(
        "point {}, chain {}, block {block} {words}",
        point + 1,
        chain + 1
    )
}

fn point(
    folder: &Path,
    opened: &Opened,
    index: usize,
    chains: Vec<Vec<TrailRow>>,
) -> Result<Result<PointTrail, String>, Vec<String>> {
    let plan = &opened.plan;
    let of = |words: String| vec![format!("point {} {words}", index + 1)];
    let closed = plan.closed.as_ref().map(|points| points[index]);
    if closed == Some(None) {
        return match chains.iter().all(Vec::is_empty) {
            true => Ok(Err(crate::report::CLOSED_BEFORE.into())),
            false => Err(of("was closed before its draws, and has a trail".into())),
        };
    }
    let rows = chains.iter().filter(|rows| !rows.is_empty()).count();
    if rows > 0 && rows < chains.len() {
        return Err(of(format!(
            "has {rows} chains in it, and the plan has {}",
            chains.len()
        )));
    }
    let starts = match (
        record::starts(plan, index),
        chains.iter().all(Vec::is_empty),
    ) {
        (Ok(starts), false) => starts,
        (Err(words), true) => return Ok(Err(words)),
        (Ok(_), true) => return Err(of("has no trail".into())),
        (Err(words), false) => return Err(of(format!("has a trail, but finds no start: {words}"))),
    };
    let length = |phase| {
        let rows = chains[0].iter().filter(|row| row.phase == phase);
        rows.fold(0, |sum: u64, row| sum.saturating_add(row.draws))
    };
    let (burn_in, draws) = (length(Phase::BurnIn), length(Phase::Draws));
    if closed
        .flatten()
        .is_some_and(|closed| closed != (burn_in, draws))
    {
        return Err(of("was not closed where the plan says".into()));
    }
    let task = Task::of(plan, index);
    let longest = (chains[0].len() as u64).saturating_mul(task.block);
    if burn_in.saturating_add(draws) > longest {
        return Err(of(format!(
            "has {} blocks for {burn_in} draws of burn-in and {draws} draws, and a block of this plan has at most {}",
            chains[0].len() - 1,
            task.block
        )));
    }
    let Some(cut) = blocks(&task, burn_in, draws) else {
        return Err(of(format!(
            "ends after {burn_in} draws of burn-in and {draws} draws, where no block of this plan ends"
        )));
    };
    let mut found = Vec::new();
    for (chain, (rows, (hash, link))) in chains.iter().zip(starts).enumerate() {
        found.extend(check_chain(index, chain, rows, &cut, &hash, &link));
    }
    if !found.is_empty() {
        return Err(found);
    }
    let kept = match plan.keep {
        Keep::Summary => None,
        Keep::Draws => {
            let open = |phase, length| {
                if length == 0 {
                    return Ok(None);
                }
                let name = draws_file::name(index, phase);
                let quantities = plan.points[index].model.quantities();
                DrawsFile::open(&folder.join(&name), quantities, chains.len(), length)
                    .map(|file| Some(Arc::new(file)))
                    .map_err(|words| vec![format!("{name}: {words}")])
            };
            Some([open(Phase::BurnIn, burn_in)?, open(Phase::Draws, draws)?])
        }
    };
    Ok(Ok(PointTrail {
        chains,
        burn_in,
        draws,
        kept,
    }))
}

/// What can be held of a trail without its plan: that the links of every chain follow from its first.
pub fn own_links(folder: &Path) -> Vec<String> {
    let wrong = |words: &str| format!("{}: {words}", trail_file::NAME);
    let rows = match trail_file::read(&folder.join(trail_file::NAME), MOST_BLOCKS) {
        Ok(rows) => rows,
        Err(words) => return vec![wrong(&words)],
    };
    let mut found = Vec::new();
    for pair in rows.windows(2) {
        let [before, row] = pair else { continue };
        let follows = (before.point, before.chain) == (row.point, row.chain);
        if follows && (row.block != before.block + 1 || row.link != link_after(before, row)) {
            let words = "does not follow from the one before it";
            found.push(wrong(&place(row.point, row.chain, row.block, words)));
        }
    }
    found
}

/// The link that a block must have after the one before it.
fn link_after(before: &TrailRow, row: &TrailRow) -> Digest {
    trail::next_link(
        &before.link,
        row.block,
        row.phase,
        row.draws,
        &row.draws_digest,
        &row.state_hash,
    )
}

/// The first thing wrong with the trail of a chain.
fn check_chain(
    point: usize,
    chain: usize,
    rows: &[TrailRow],
    cut: &[(Phase, u64)],
    hash: &trail::StateHash,
    link: &Digest,
) -> Option<String> {
    let at = |block: u64, words: &str| Some(place(point, chain, block, words));
    let Some((start, rows)) = rows.split_first() else {
        return at(0, "is missing");
    };
    if (start.state_hash, start.draws, start.phase) != (*hash, 0, Phase::BurnIn) {
        return at(0, "is not the start that plan and root give");
    }
    if start.link != *link || start.draws_digest != trail::plain(&[]) {
        return at(0, "does not begin with the key of its chain");
    }
    let mut before = start;
    for (row, (phase, draws)) in rows.iter().zip(cut) {
        if (row.phase, row.draws) != (*phase, *draws) {
            return at(row.block, "does not have the length that the plan gives it");
        }
        if row.phase == Phase::Draws && row.state_hash.frozen != before.state_hash.frozen {
            return at(row.block, "adapted after the burn-in");
        }
        if row.link != link_after(before, row) {
            return at(
                row.block,
                "does not follow from the one before it: its link is another",
            );
        }
        before = row;
    }
    match rows.len().cmp(&cut.len()) {
        std::cmp::Ordering::Equal => None,
        _ => at(rows.len() as u64 + 1, "is missing, or one too many"),
    }
}

/// Hashes every stored draw, and tells of each chain the first block whose draws are not those of the trail.
pub fn hash_draws(trails: &Trails) -> Vec<String> {
    let mut work = Vec::new();
    for (index, trail) in trails.iter().enumerate() {
        let Ok(trail) = trail else { continue };
        let Some(kept) = &trail.kept else { continue };
        for (phase, file) in [Phase::BurnIn, Phase::Draws].into_iter().zip(kept) {
            if let Some(file) = file {
                for chain in 0..trail.chains.len() {
                    work.push((index, chain, phase, file, &trail.chains[chain]));
                }
            }
        }
    }
    let one = |(point, chain, phase, file, rows): &(
        usize,
        usize,
        Phase,
        &Arc<DrawsFile>,
        &Vec<TrailRow>,
    )| {
        let blocks: Vec<&TrailRow> = rows[1..].iter().filter(|row| row.phase == *phase).collect();
        let name = draws_file::name(*point, *phase);
        let words = hash_chain(file, *chain, &blocks).err()?;
        Some(format!("{name}: {words}"))
    };
    let found: Vec<Option<String>> = work.par_iter().map(one).collect();
    found.into_iter().flatten().collect()
}

fn hash_chain(file: &DrawsFile, chain: usize, blocks: &[&TrailRow]) -> Result<(), String> {
    let mut blocks = blocks.iter();
    file.chain(chain, |_, columns| {
        let rows = columns.first().map_or(0, Vec::len);
        let mut from = 0;
        while from < rows {
            let block = blocks
                .next()
                .ok_or("it has draws that the trail does not have")?;
            let to = from + block.draws as usize;
            if to > rows {
                return Err(format!("chain {} is not stored in whole blocks", chain + 1));
            }
            let mut hash = Sha256::new();
            for column in columns {
                trail::hash_values(&mut hash, &column[from..to]);
            }
            let digest: Digest = hash.finalize().into();
            if digest != block.draws_digest {
                return Err(place(
                    block.point,
                    chain,
                    block.block,
                    "does not have the draws of the trail",
                ));
            }
            from = to;
        }
        Ok(())
    })
}
