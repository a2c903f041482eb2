//! (f) Blocks drawn again: from the start, or from a stored state that has its hash, draws and state held against
//! the trail at every block's end.

use super::draws::{PointTrail, Trails, place};
use super::lot::{self, Audit, Chance, Piece};
use super::opened::Opened;
use crate::course::{Block, Phase};
use crate::engine::trail::{self, StateHash};
use crate::engine::{Task, WIDEST};
use crate::record::checkpoints::{self, Checkpoints};
use crate::record::trail_file::TrailRow;
use rayon::prelude::*;
use std::path::Path;
use std::sync::atomic::{AtomicBool, Ordering};

/// What is at hand of a point.
struct Ready<'a> {
    trail: &'a PointTrail,
    task: Task,
    states: Checkpoints,
    /// The blocks after which the states of all chains are kept, rising.
    kept: Vec<u64>,
}

/// Draws blocks again, all or a lot of them, and enters what differs. Gives the blocks drawn and of how many, and
/// the chance where it was a lot.
pub fn replay(
    folder: &Path,
    opened: &Opened,
    trails: &Trails,
    audit: Audit,
    stop: &AtomicBool,
) -> (Vec<String>, u64, u64, Option<Chance>) {
    let mut ready = Vec::new();
    let mut found = Vec::new();
    for (point, trail) in trails.iter().enumerate() {
        let Ok(trail) = trail else {
            ready.push(None);
            continue;
        };
        match get_ready(folder, opened, point, trail) {
            Ok(one) => ready.push(Some(one)),
            Err(words) => {
                found.push(format!("{}: {words}", checkpoints::name(point)));
                ready.push(None);
            }
        }
    }
    let all: Vec<Piece> = pieces(&ready);
    let blocks: u64 = all.iter().map(Piece::blocks).sum();
    let (chosen, chance) = match audit {
        Audit::All => (all, None),
        Audit::Part { part, seed } => {
            let chosen = lot::draw(&all, part, &seed);
            let chance = Chance::new(&chosen, &all);
            let firsts = firsts(&ready).into_iter();
            let further = firsts.filter(|first| !chosen.iter().any(|piece| holds(piece, first)));
            let further: Vec<Piece> = further.collect();
            ([chosen, further].concat(), Some(chance))
        }
    };
    let drawn = chosen.iter().map(Piece::blocks).sum();
    let one = |piece: &Piece| {
        if stop.load(Ordering::Relaxed) {
            return vec!["interrupted".to_owned()];
        }
        let ready = ready[piece.point]
            .as_ref()
            .expect("pieces are of points at hand");
        draw_again(opened, ready, piece)
    };
    let mut differing: Vec<Vec<String>> = chosen.par_iter().map(one).collect();
    found.extend(differing.drain(..).flatten());
    (found, drawn, blocks, chance)
}

fn holds(piece: &Piece, first: &Piece) -> bool {
    (piece.point, piece.chain) == (first.point, first.chain)
        && (piece.from..piece.to).contains(&first.from)
}

fn get_ready<'a>(
    folder: &Path,
    opened: &Opened,
    point: usize,
    trail: &'a PointTrail,
) -> Result<Ready<'a>, String> {
    let blocks = trail.chains[0].len() as u64 - 1;
    let path = folder.join(checkpoints::name(point));
    let size = opened.plan.points[point].model.state_size();
    let states = Checkpoints::open(&path, blocks * trail.chains.len() as u64, size)?;
    let kept: Vec<u64> = states.blocks(0).collect();
    for chain in 0..trail.chains.len() {
        if states.blocks(chain).ne(kept.iter().copied()) {
            return Err(format!(
                "chain {} has other states than the first",
                chain + 1
            ));
        }
    }
    let last_of_burn_in = trail.chains[0]
        .iter()
        .filter(|row| row.phase == Phase::BurnIn)
        .count() as u64
        - 1;
    for block in [last_of_burn_in, blocks] {
        if block > 0 && !kept.contains(&block) {
            return Err(format!("the states after block {block} are missing"));
        }
    }
    Ok(Ready {
        trail,
        task: Task::of(&opened.plan, point),
        states,
        kept,
    })
}

/// Everything, cut at the stored states, as many chains together as go in lockstep.
fn pieces(ready: &[Option<Ready<'_>>]) -> Vec<Piece> {
    let mut pieces = Vec::new();
    for (point, ready) in ready.iter().enumerate() {
        let Some(ready) = ready else { continue };
        let ends = ready.kept.iter().copied();
        let starts = std::iter::once(0).chain(ready.kept.iter().copied());
        for (from, to) in starts.zip(ends) {
            pieces.extend(groups(point, ready.trail.chains.len(), from, to));
        }
    }
    pieces
}

fn groups(point: usize, chains: usize, from: u64, to: u64) -> impl Iterator<Item = Piece> {
    (0..chains).step_by(WIDEST).map(move |chain| Piece {
        point,
        chain,
        chains: WIDEST.min(chains - chain),
        from,
        to,
    })
}

/// The first block of every chain, and its first after the burn-in.
fn firsts(ready: &[Option<Ready<'_>>]) -> Vec<Piece> {
    let mut firsts = Vec::new();
    for (point, ready) in ready.iter().enumerate() {
        let Some(ready) = ready else { continue };
        let rows = &ready.trail.chains[0];
        let draws = rows.iter().position(|row| row.phase == Phase::Draws);
        let mut befores = vec![0];
        befores.extend(
            draws
                .map(|first| first as u64 - 1)
                .filter(|before| *before > 0),
        );
        for from in befores {
            firsts.extend(groups(point, ready.trail.chains.len(), from, from + 1));
        }
    }
    firsts
}

/// Draws a piece again; of each chain the first thing that differs.
fn draw_again(opened: &Opened, ready: &Ready<'_>, piece: &Piece) -> Vec<String> {
    let mut found: Vec<Option<String>> = vec![None; piece.chains];
    match walk(opened, ready, piece, &mut found) {
        Ok(()) => found.into_iter().flatten().collect(),
        Err(words) => vec![words],
    }
}

fn walk(
    opened: &Opened,
    ready: &Ready<'_>,
    piece: &Piece,
    found: &mut [Option<String>],
) -> Result<(), String> {
    let chains = piece.chain..piece.chain + piece.chains;
    let seeds: Vec<_> = ready.task.chains[chains.clone()]
        .iter()
        .map(|chain| chain.seed.clone())
        .collect();
    let course = ready.task.model.clone().course(&seeds);
    let mut course = course.map_err(|fault| fault.0)?;
    for (lane, chain) in chains.clone().enumerate() {
        let row = &ready.trail.chains[chain][piece.from as usize];
        if piece.from > 0 {
            let state = ready.states.state(chain, piece.from)?;
            let state =
                state.ok_or_else(|| place(piece.point, chain, piece.from, "lacks its state"))?;
            let wrong = "does not have the stored state of the trail";
            if StateHash::of(&state) != row.state_hash {
                return Err(place(piece.point, chain, piece.from, wrong));
            }
            course.load(lane, &state).map_err(|words| {
                place(
                    piece.point,
                    chain,
                    piece.from,
                    &format!("has an impossible state: {words}"),
                )
            })?;
        }
    }
    for block in piece.from + 1..=piece.to {
        let row = &ready.trail.chains[piece.chain][block as usize];
        let draws = usize::try_from(row.draws).map_err(|_| "a block is too long".to_owned())?;
        let blocks = course.advance(row.phase, draws);
        for (lane, (chain, made)) in chains.clone().zip(&blocks).enumerate() {
            if found[lane].is_none() {
                let row = &ready.trail.chains[chain][block as usize];
                let hash = StateHash::of(&course.save(lane));
                found[lane] = compare(opened, ready, piece.point, row, made, &hash);
            }
        }
        if found.iter().all(Option::is_some) {
            break;
        }
    }
    Ok(())
}

/// The first difference of a block, named by its field.
fn compare(
    opened: &Opened,
    ready: &Ready<'_>,
    point: usize,
    row: &TrailRow,
    made: &Block,
    hash: &StateHash,
) -> Option<String> {
    let at = |words: &str| Some(place(point, row.chain, row.block, words));
    if trail::plain(&trail::payload(made)) != row.draws_digest {
        let stored = stored(ready.trail, row);
        let first = stored.and_then(|stored| first_difference(&stored, made));
        return at(&match first {
            Some((quantity, draw, stored, made)) => {
                let name = &opened.plan.points[point].model.quantities()[quantity].name;
                format!(
                    "draw {} of {name}: the record has {stored}, the plan gives {made}",
                    draw + 1
                )
            }
            None => "does not have the draws that the plan gives".into(),
        });
    }
    if hash.frozen != row.state_hash.frozen {
        return at("leaves another frozen state (what the kernels learnt) than the plan gives");
    }
    if hash.moving != row.state_hash.moving {
        return at("leaves another moving state (position, generator) than the plan gives");
    }
    None
}

/// The stored draws of a block, a column a quantity.
fn stored(trail: &PointTrail, row: &TrailRow) -> Option<Vec<Vec<f64>>> {
    let [burn_in, draws] = trail.kept.as_ref()?;
    let file = match row.phase {
        Phase::BurnIn => burn_in.as_ref()?,
        Phase::Draws => draws.as_ref()?,
    };
    let before = trail.chains[row.chain][1..row.block as usize].iter();
    let before = before.filter(|other| other.phase == row.phase);
    let from: u64 = before.map(|other| other.draws).sum();
    let mut found = None;
    let _ = file.chain(row.chain, |first, columns| {
        let rows = columns.first().map_or(0, Vec::len) as u64;
        if (first..first + rows).contains(&from) {
            let at = (from - first) as usize;
            let cut =
                |column: &Vec<f64>| column.get(at..at + row.draws as usize).map(<[f64]>::to_vec);
            found = columns.iter().map(cut).collect();
        }
        Ok(())
    });
    found
}

fn first_difference(stored: &[Vec<f64>], made: &Block) -> Option<(usize, usize, f64, f64)> {
    let same = |a: f64, b: f64| a.to_bits() == b.to_bits() || (a.is_nan() && b.is_nan());
    for draw in 0..made.draws {
        for (quantity, column) in stored.iter().enumerate() {
            let value = *made.values.get(quantity * made.draws + draw)?;
            let stored = *column.get(draw)?;
            if !same(stored, value) {
                return Some((quantity, draw, stored, value));
            }
        }
    }
    None
}

/// In words, what was drawn again.
pub fn looked_at(drawn: u64, all: u64) -> String {
    if drawn == all {
        format!("all {all} blocks drawn again, from the start and from stored states")
    } else {
        format!("{drawn} of {all} blocks drawn again")
    }
}
