//! Blocks that a sealed record has to give to a run that begins as it did: a shorter run of the same chains, or
//! another that shares points with it.
//!
//! Chains of one key have the same draws. So blocks are taken where the keys are equal and the same is recorded,
//! cut anew as the plan at hand cuts them, once the record is whole, is what its own study gives, and its draws
//! and states have the digests of its trail. That the draws follow from the study is not shown before they are
//! drawn again: `verify` on the longer record does that.

use super::draws::{self, PointTrail, Trails};
use super::opened::{self, Opened};
use crate::course::{Block, Family, Phase};
use crate::engine::trail::{self, Digest, StateHash};
use crate::engine::{Finished, Journal, Judge, PlanJudge, Task, blocks};
use crate::plan::{Plan, Point};
use crate::record::checkpoints::{self, Checkpoints, Cursor};
use crate::record::draws_file::DrawsFile;
use crate::record::{self, JournalFile};
use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// A sealed record, as what its study gives.
struct Source {
    path: PathBuf,
    opened: Opened,
    trails: Trails,
    result_digest: String,
}

/// A block as the plan at hand cuts it.
struct Piece {
    phase: Phase,
    draws: u64,
    /// The block of the record that ends with it.
    row: u64,
    /// Whether the record keeps the states after it.
    kept: bool,
}

/// What a record has to give to a point.
struct Gift {
    source: usize,
    /// The point of the plan, and that of the record.
    point: usize,
    theirs: usize,
    /// So many chains, from the first.
    chains: usize,
    /// Where the record has each quantity.
    quantities: Vec<usize>,
    states: Checkpoints,
    pieces: Vec<Piece>,
}

/// What the records in a folder have to give to a plan.
pub struct Gifts {
    sources: Vec<Source>,
    gifts: Vec<Gift>,
}

/// What one record gives, for the reader.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Given {
    pub record: PathBuf,
    /// In hexadecimal, as are the record's plan and result.
    pub plan_digest: String,
    pub result_digest: String,
    pub points: u64,
    /// Of all chains.
    pub blocks: u64,
    pub draws: u64,
}

/// How records are looked at.
pub struct Search<'a> {
    pub plan: &'a Plan,
    pub tasks: &'a [Task],
    /// The records to look at.
    pub records: Vec<PathBuf>,
    pub registry: &'a [&'a dyn Family],
    /// Set by a signal.
    pub stop: &'a AtomicBool,
    /// Told why a record gives nothing that might have.
    pub tell: &'a dyn Fn(&str),
}

/// Looks for the record that has most to give to each point, and holds what it gives against its trail.
pub fn gifts(search: &Search<'_>) -> Gifts {
    let mut sources = Vec::new();
    for path in &search.records {
        match source(path, search) {
            Ok(found) => sources.extend(found),
            Err(words) => refuse(search, path, &words),
        }
    }
    let mut whole: BTreeMap<usize, bool> = BTreeMap::new();
    let mut gifts = Vec::new();
    for (point, mut offers) in offers(&sources, search) {
        // The longest first; of equals the first record.
        offers.sort_by_key(|gift| std::cmp::Reverse(gift.draws()));
        for mut gift in offers {
            let source = &sources[gift.source];
            let whole = *whole
                .entry(gift.source)
                .or_insert_with(|| match is_whole(source) {
                    Ok(()) => true,
                    Err(words) => {
                        refuse(search, &source.path, &words);
                        false
                    }
                });
            if !whole || search.stop.load(Ordering::Relaxed) {
                continue;
            }
            match gift.judge(source, search) {
                Ok(()) if gift.pieces.is_empty() => {}
                Ok(()) => {
                    gifts.push(gift);
                    break;
                }
                Err(words) => refuse(
                    search,
                    &source.path,
                    &format!("point {}: {words}", point + 1),
                ),
            }
        }
    }
    Gifts { sources, gifts }
}

fn refuse(search: &Search<'_>, record: &Path, words: &str) {
    let first = words.lines().next().unwrap_or_default();
    (search.tell)(&format!(
        "nothing is taken over from {}: {first}",
        record.display()
    ));
}

/// A record that shares points with the plan, resolved anew; `None` where it shares none, or draws other numbers.
fn source(path: &Path, search: &Search<'_>) -> Result<Option<Source>, String> {
    let pitfalls = record::pitfalls(path).map_err(|fault| fault.to_string())?;
    if let Some(words) = pitfalls.into_iter().next() {
        return Err(words);
    }
    let stated = opened::stated(path)?;
    if !stated.draws_alike() {
        return Ok(None);
    }
    let points = 0..search.plan.points.len();
    let ours: BTreeSet<String> = points
        .map(|point| crate::canon::hex(&search.plan.point_key(point)))
        .collect();
    if !stated.point_keys().any(|key| ours.contains(key)) {
        return Ok(None);
    }
    let first = |words: Vec<String>| words.into_iter().next().unwrap_or_default();
    let opened = opened::open(path, &stated, search.registry).map_err(first)?;
    if let Some(words) = opened.differences.first() {
        return Err(words.clone());
    }
    let trails = draws::trails(path, &opened).map_err(first)?;
    let summary = opened::json(path, "data/summary.json")?;
    let result_digest = summary.get("result_digest").and_then(|json| json.as_text());
    Ok(Some(Source {
        path: path.to_owned(),
        result_digest: result_digest.unwrap_or_default().to_owned(),
        opened,
        trails,
    }))
}

/// Whether the files of a record are those it was sealed with, and its draws those of its trail.
fn is_whole(source: &Source) -> Result<(), String> {
    let differences = record::check_bag(&source.path).map_err(|fault| fault.to_string())?;
    let differences = differences.into_iter();
    match differences.chain(draws::hash_draws(&source.trails)).next() {
        Some(words) => Err(words),
        None => Ok(()),
    }
}

/// Everything that the sources have to give, by the point of the plan.
fn offers(sources: &[Source], search: &Search<'_>) -> BTreeMap<usize, Vec<Gift>> {
    let first_keys = search.tasks.iter().map(|task| task.chains[0].key);
    let ours: BTreeMap<Digest, usize> = first_keys.enumerate().map(|(i, key)| (key, i)).collect();
    let mut offers: BTreeMap<usize, Vec<Gift>> = BTreeMap::new();
    for (at, source) in sources.iter().enumerate() {
        for (theirs, trail) in source.trails.iter().enumerate() {
            let Ok(trail) = trail else { continue };
            let key = source.opened.plan.chain_key(theirs, 0);
            let Some(&point) = ours.get(&key) else {
                continue;
            };
            match offer(at, source, theirs, trail, point, search) {
                Ok(gift) => offers.entry(point).or_default().extend(gift),
                Err(words) => refuse(search, &source.path, &words),
            }
        }
    }
    offers
}

/// What a point of a record has to give to a point whose first chain has the same key.
fn offer(
    at: usize,
    source: &Source,
    theirs: usize,
    trail: &PointTrail,
    point: usize,
    search: &Search<'_>,
) -> Result<Option<Gift>, String> {
    let task = &search.tasks[point];
    let plan = &source.opened.plan;
    let chains = task.chains.len().min(trail.chains.len());
    let keys = plan.chain_keys(theirs, 0..chains as u64);
    let same = task
        .chains
        .iter()
        .zip(&keys)
        .all(|(chain, key)| chain.key == *key);
    let quantities = places(&search.plan.points[point], &plan.points[theirs]);
    let (true, Some(quantities), Some(_)) = (same, quantities, &trail.kept) else {
        return Ok(None);
    };
    let name = checkpoints::name(theirs);
    let rows = &trail.chains[0];
    let most = (rows.len() as u64 - 1) * trail.chains.len() as u64;
    let size = plan.points[theirs].model.state_size();
    let states = Checkpoints::open(&source.path.join(&name), most, size)
        .map_err(|words| format!("{name}: {words}"))?;
    let pieces = pieces(task, trail, &states, chains);
    let gift = Gift {
        source: at,
        point,
        theirs,
        chains,
        quantities,
        states,
        pieces,
    };
    Ok((!gift.pieces.is_empty()).then_some(gift))
}

/// Where another point records each quantity of ours; `None` where it lacks one, or means something else by it.
fn places(ours: &Point, theirs: &Point) -> Option<Vec<usize>> {
    let predicted = ours.predict.iter().all(|prediction| {
        let alike = |other: &crate::plan::Prediction| {
            (&other.name, &other.law, &other.per)
                == (&prediction.name, &prediction.law, &prediction.per)
        };
        theirs.predict.iter().any(alike)
    });
    if !predicted {
        return None;
    }
    let quantities = ours.model.quantities().iter();
    let place = |quantity: &crate::course::Quantity| {
        let of = &ours.estimands[quantity.estimand].of;
        theirs.model.quantities().iter().position(|other| {
            (&other.name, other.condition) == (&quantity.name, quantity.condition)
                && theirs.estimands[other.estimand].of == *of
        })
    };
    let places: Option<Vec<usize>> = quantities.map(place).collect();
    places.filter(|places| !places.is_empty())
}

/// The blocks of a task that end where blocks of a trail end, up to the last after which all states are kept.
fn pieces(task: &Task, trail: &PointTrail, states: &Checkpoints, chains: usize) -> Vec<Piece> {
    let mut ends: BTreeMap<(u8, u64), u64> = BTreeMap::new();
    let mut done = [0, 0];
    for row in &trail.chains[0][1..] {
        let phase = trail::phase_number(row.phase);
        done[phase as usize] += row.draws;
        ends.insert((phase, done[phase as usize]), row.block);
    }
    let mut kept: BTreeSet<u64> = states.blocks(0).collect();
    for chain in 1..chains {
        let own: BTreeSet<u64> = states.blocks(chain).collect();
        kept.retain(|block| own.contains(block));
    }
    let reviews = &task.reviews;
    let beyond = reviews.iter().find(|review| **review >= trail.draws);
    let length = beyond.unwrap_or(&reviews[reviews.len() - 1]);
    let cut = blocks(task, trail.burn_in, *length).unwrap_or_default();
    let mut pieces = Vec::new();
    let mut done = [0, 0];
    for (phase, draws) in cut {
        let number = trail::phase_number(phase);
        done[number as usize] += draws;
        let Some(&row) = ends.get(&(number, done[number as usize])) else {
            break;
        };
        let kept = kept.contains(&row);
        pieces.push(Piece {
            phase,
            draws,
            row,
            kept,
        });
    }
    whole_to(&mut pieces, u64::MAX);
    pieces
}

/// Cuts pieces to the last within so many draws after which the states are kept.
fn whole_to(pieces: &mut Vec<Piece>, most: u64) {
    let mut done = 0;
    let mut last = 0;
    for (at, piece) in pieces.iter().enumerate() {
        if piece.phase == Phase::Draws {
            done += piece.draws;
        }
        if done <= most && piece.kept {
            last = at + 1;
        }
    }
    pieces.truncate(last);
}

impl Gift {
    /// Draws a chain after the burn-in, and in it.
    fn draws(&self) -> (u64, u64) {
        let of = |phase| {
            let pieces = self.pieces.iter().filter(|piece| piece.phase == phase);
            pieces.map(|piece| piece.draws).sum()
        };
        (of(Phase::Draws), of(Phase::BurnIn))
    }

    /// Cuts it to the first review that meets the goal, past which a run does not go.
    fn judge(&mut self, source: &Source, search: &Search<'_>) -> Result<(), String> {
        let task = &search.tasks[self.point];
        let trail = source.trails[self.theirs].as_ref().map_err(Clone::clone)?;
        let Some([_, Some(kept)]) = &trail.kept else {
            return Ok(());
        };
        let judge = PlanJudge::new(search.plan);
        let (last, earlier) = task.reviews.split_last().expect("a review at least");
        let mut most = *last;
        for &review in earlier.iter().filter(|review| **review < self.draws().0) {
            // Chains that the record does not have are not drawn yet: the run itself judges.
            let met = self.chains < task.chains.len() || {
                let columns = kept.chosen(self.chains, self.quantities.clone(), 0..review);
                judge.review(self.point, &columns, search.stop)?.met == Some(true)
            };
            if met {
                most = review;
                break;
            }
        }
        whole_to(&mut self.pieces, most);
        Ok(())
    }

    /// Appends the blocks of one chain.
    fn give(
        &self,
        source: &Source,
        chain: usize,
        journal: &mut JournalFile,
        stop: &AtomicBool,
    ) -> Result<(), String> {
        let trail = source.trails[self.theirs].as_ref().map_err(Clone::clone)?;
        let mut giving = Giving {
            gift: self,
            trail,
            chain,
            next: 0,
            columns: vec![Vec::new(); self.quantities.len()],
            link: trail.chains[chain][0].link,
            cursor: Cursor::default(),
            journal,
            stop,
        };
        let kept = trail.kept.iter().flatten();
        for (phase, file) in [Phase::BurnIn, Phase::Draws].into_iter().zip(kept) {
            if let Some(file) = file {
                let file: &Arc<DrawsFile> = file;
                file.chain(chain, |_, columns| giving.add(phase, columns))?;
            }
        }
        if giving.next < self.pieces.len() {
            return Err("it lacks draws".into());
        }
        Ok(())
    }
}

/// One chain under way from a record to a journal, a block at a time.
struct Giving<'a> {
    gift: &'a Gift,
    trail: &'a PointTrail,
    chain: usize,
    /// The piece that is being filled.
    next: usize,
    columns: Vec<Vec<f64>>,
    link: Digest,
    cursor: Cursor,
    journal: &'a mut JournalFile,
    stop: &'a AtomicBool,
}

impl Giving<'_> {
    /// Adds draws of a phase, a column a quantity of the record, and appends the blocks that they fill.
    fn add(&mut self, phase: Phase, columns: &[Vec<f64>]) -> Result<(), String> {
        let rows = columns.first().map_or(0, Vec::len);
        let mut from = 0;
        while from < rows {
            let piece = self.gift.pieces.get(self.next);
            let Some(piece) = piece.filter(|piece| piece.phase == phase) else {
                return Ok(());
            };
            let lacking = piece.draws as usize - self.columns[0].len();
            let to = rows.min(from + lacking);
            for (own, &place) in self.columns.iter_mut().zip(&self.gift.quantities) {
                own.extend_from_slice(&columns[place][from..to]);
            }
            from = to;
            if self.columns[0].len() as u64 == piece.draws {
                self.append(piece)?;
                self.next += 1;
            }
        }
        Ok(())
    }

    fn append(&mut self, piece: &Piece) -> Result<(), String> {
        if self.stop.load(Ordering::Relaxed) {
            return Err("interrupted".into());
        }
        let block = Block {
            draws: piece.draws as usize,
            values: self.columns.concat(),
        };
        self.columns.iter_mut().for_each(Vec::clear);
        let payload = trail::payload(&block);
        let draws = block.draws;
        drop(block);
        let row = &self.trail.chains[self.chain][piece.row as usize];
        let state = match piece.kept {
            true => self
                .gift
                .states
                .next_state(self.chain, piece.row, &mut self.cursor)?,
            false => None,
        };
        if state
            .as_ref()
            .is_some_and(|state| StateHash::of(state) != row.state_hash)
        {
            let words = "does not have the stored state of the trail";
            return Err(draws::place(self.gift.theirs, self.chain, piece.row, words));
        }
        let number = self.next as u64 + 1;
        let draws_digest = trail::plain(&payload);
        self.link = trail::next_link(
            &self.link,
            number,
            piece.phase,
            piece.draws,
            &draws_digest,
            &row.state_hash,
        );
        self.journal.take(&Finished {
            point: self.gift.point,
            chain: self.chain,
            number,
            phase: piece.phase,
            draws,
            payload,
            draws_digest,
            state,
            state_hash: row.state_hash,
            link: self.link,
        })
    }
}

impl Gifts {
    /// What each record gives, in the order of the records.
    pub fn given(&self) -> Vec<Given> {
        let of = |(at, source): (usize, &Source)| {
            let gifts = self.gifts.iter().filter(|gift| gift.source == at);
            let gifts: Vec<&Gift> = gifts.collect();
            let sum = |of: fn(&Gift) -> u64| gifts.iter().map(|gift| of(gift)).sum::<u64>();
            (!gifts.is_empty()).then(|| Given {
                record: source.path.clone(),
                plan_digest: crate::canon::hex(&source.opened.plan.digest()),
                result_digest: source.result_digest.clone(),
                points: gifts.len() as u64,
                blocks: sum(|gift| gift.pieces.len() as u64 * gift.chains as u64),
                draws: sum(|gift| (gift.draws().0 + gift.draws().1) * gift.chains as u64),
            })
        };
        self.sources.iter().enumerate().filter_map(of).collect()
    }

    /// Appends all of it to a journal that has no blocks. Fails in words; then the journal has none again.
    pub fn take(&self, journal: &mut JournalFile, stop: &AtomicBool) -> Result<(), String> {
        let mut all = || -> Result<(), String> {
            for gift in &self.gifts {
                for chain in 0..gift.chains {
                    gift.give(&self.sources[gift.source], chain, journal, stop)?;
                }
            }
            journal.sync()
        };
        let taken = all();
        if taken.is_err() {
            journal.clear()?;
        }
        taken
    }
}

#[cfg(test)]
mod tests;
