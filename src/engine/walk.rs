//! One course under way: advances its chains block by block, hashes and links what they did, and holds
//! recomputed blocks against those that stand.

use super::blocks::block_end;
use super::halt::Halt;
use super::sink::{Finished, Mark, Reader, Stood};
use super::standing::common;
use super::task::Task;
use super::trail::{self, Digest, StateHash};
use crate::course::{Course, Phase, State};
use std::ops::Range;
use std::sync::Arc;

/// A block as it comes off a walk.
#[derive(Debug)]
pub struct Step {
    pub chain: usize,
    pub phase: Phase,
    pub draws: usize,
    pub kept: Kept,
}

/// What is to become of a block.
#[derive(Debug)]
pub enum Kept {
    /// To be appended to the journal.
    Fresh(Box<Finished>),
    /// It stood already and came out the same.
    Standing(Mark),
}

/// One chain of a walk.
struct Lane {
    chain: usize,
    link: Digest,
    frozen: Vec<u8>,
    hash: StateHash,
    /// Every block of the chain that stood when the run began.
    stood: Vec<Stood>,
}

/// A course with what its chains have behind them.
pub struct Walk {
    point: usize,
    course: Box<dyn Course>,
    lanes: Vec<Lane>,
    quantities: usize,
    /// Blocks done.
    number: u64,
    /// Draws done in each phase.
    burn_in: u64,
    draws: u64,
}

impl Walk {
    /// The chains of `range` at their starts, or after the last block that stands for all of them with its state.
    /// `stood` has a list for each chain of the range.
    pub fn begin(
        task: &Task,
        point: usize,
        range: Range<usize>,
        stood: Vec<Vec<Stood>>,
        reader: &Arc<dyn Reader>,
    ) -> Result<Walk, Halt> {
        let chains = &task.chains[range.clone()];
        let seeds: Vec<_> = chains.iter().map(|chain| chain.seed.clone()).collect();
        let course = task
            .model
            .clone()
            .course(&seeds)
            .map_err(|fault| Halt::Start {
                point,
                words: fault.0,
            })?;
        let mut lanes = Vec::with_capacity(range.len());
        for (lane, (chain, stood)) in range.zip(stood).enumerate() {
            let state = course.save(lane);
            let hash = StateHash::of(&state);
            let first = trail::first_link(&chains[lane].key, &hash);
            check_links(point, chain, &first, &stood)?;
            lanes.push(Lane {
                chain,
                link: first,
                frozen: state.frozen,
                hash,
                stood,
            });
        }
        let mut walk = Walk {
            point,
            course,
            lanes,
            quantities: task.model.quantities().len(),
            number: 0,
            burn_in: 0,
            draws: 0,
        };
        walk.catch_up(reader)?;
        Ok(walk)
    }

    /// Loads the states after the last block that stands for every chain and has them kept.
    fn catch_up(&mut self, reader: &Arc<dyn Reader>) -> Result<(), Halt> {
        let stood: Vec<&[Stood]> = self.lanes.iter().map(|lane| &*lane.stood).collect();
        let common = common(&stood);
        if common == 0 {
            return Ok(());
        }
        for index in 0..common {
            let block = self.lanes[0].stood[index];
            let same = |lane: &Lane| {
                let other = &lane.stood[index];
                (other.phase, other.draws) == (block.phase, block.draws)
            };
            if !self.lanes.iter().all(same) {
                let words = "the chains of the journal were cut into unlike blocks";
                return Err(Halt::own(self.point, words));
            }
            *self.done_mut(block.phase) += block.draws as u64;
        }
        for (index, lane) in self.lanes.iter_mut().enumerate() {
            let block = lane.stood[common - 1];
            let state = reader.state(&block).map_err(Halt::Journal)?;
            if StateHash::of(&state) != block.state_hash {
                return Err(Halt::Journal(format!(
                    "the state of chain {} after block {common} does not have its hash",
                    lane.chain + 1
                )));
            }
            self.course.load(index, &state).map_err(|words| {
                let words = format!("a journalled state could not be loaded: {words}");
                Halt::own(self.point, words)
            })?;
            lane.link = block.link;
            lane.hash = block.state_hash;
            lane.frozen = state.frozen;
        }
        self.number = common as u64;
        Ok(())
    }

    /// Draws done in a phase.
    pub fn done(&self, phase: Phase) -> u64 {
        match phase {
            Phase::BurnIn => self.burn_in,
            Phase::Draws => self.draws,
        }
    }

    fn done_mut(&mut self, phase: Phase) -> &mut u64 {
        match phase {
            Phase::BurnIn => &mut self.burn_in,
            Phase::Draws => &mut self.draws,
        }
    }

    /// The last link of each chain's trail.
    pub fn links(&self) -> impl Iterator<Item = (usize, Digest)> + '_ {
        self.lanes.iter().map(|lane| (lane.chain, lane.link))
    }

    /// Counts and rates of each chain, for the reader.
    pub fn notes(&self) -> impl Iterator<Item = (usize, Vec<(String, f64)>)> + '_ {
        let lanes = self.lanes.iter().enumerate();
        lanes.map(|(index, lane)| (lane.chain, self.course.notes(index)))
    }

    /// Goes on to the next block end, at most to `target` draws of the phase.
    pub fn advance(&mut self, phase: Phase, target: u64, block: u64) -> Result<Vec<Step>, Halt> {
        let done = self.done(phase);
        let draws = block_end(done, target, block) - done;
        let draws = usize::try_from(draws).expect("a block fits in memory");
        let blocks = self.course.advance(phase, draws);
        if blocks.len() != self.lanes.len() {
            return Err(Halt::own(self.point, "a course gave too few blocks"));
        }
        self.number += 1;
        *self.done_mut(phase) += draws as u64;
        let mut steps = Vec::with_capacity(blocks.len());
        for (index, block) in blocks.into_iter().enumerate() {
            if (block.draws, block.values.len()) != (draws, draws * self.quantities) {
                return Err(Halt::own(self.point, "a course gave a block of wrong size"));
            }
            let state = self.course.save(index);
            let payload = trail::payload(&block);
            drop(block);
            let lane = &mut self.lanes[index];
            let frozen_changed = state.frozen != lane.frozen;
            if frozen_changed && phase == Phase::Draws {
                let words = format!("chain {} adapted after its burn-in", lane.chain + 1);
                return Err(Halt::own(self.point, words));
            }
            steps.push(lane.link_block(
                self.point,
                self.number,
                phase,
                draws,
                payload,
                state,
                frozen_changed,
            )?);
        }
        Ok(steps)
    }
}

impl Lane {
    #[expect(clippy::too_many_arguments, reason = "the fields of a block")]
    fn link_block(
        &mut self,
        point: usize,
        number: u64,
        phase: Phase,
        draws: usize,
        payload: Vec<u8>,
        state: State,
        frozen_changed: bool,
    ) -> Result<Step, Halt> {
        if frozen_changed {
            self.frozen.clone_from(&state.frozen);
            self.hash.frozen = trail::plain(&state.frozen);
        }
        self.hash.moving = trail::plain(&state.moving);
        let draws_digest = trail::plain(&payload);
        self.link = trail::next_link(
            &self.link,
            number,
            phase,
            draws as u64,
            &draws_digest,
            &self.hash,
        );
        let stood = self.stood.get(number as usize - 1);
        let kept = match stood {
            Some(stood) if stood.link == self.link => Kept::Standing(stood.mark),
            Some(stood) => {
                let what = if (stood.phase, stood.draws) != (phase, draws) {
                    "its length"
                } else if stood.draws_digest != draws_digest {
                    "its draws"
                } else {
                    "the state after it"
                };
                return Err(Halt::differs(point, self.chain, number, what));
            }
            None => Kept::Fresh(Box::new(Finished {
                point,
                chain: self.chain,
                number,
                phase,
                draws,
                payload,
                draws_digest,
                state: Some(state),
                state_hash: self.hash,
                link: self.link,
            })),
        };
        Ok(Step {
            chain: self.chain,
            phase,
            draws,
            kept,
        })
    }
}

/// The links of standing blocks must follow from the chain's own start.
fn check_links(point: usize, chain: usize, first: &Digest, stood: &[Stood]) -> Result<(), Halt> {
    let mut link = *first;
    for (number, block) in (1..).zip(stood) {
        link = trail::next_link(
            &link,
            number,
            block.phase,
            block.draws as u64,
            &block.draws_digest,
            &block.state_hash,
        );
        if link != block.link {
            return Err(Halt::differs(point, chain, number, "its link"));
        }
    }
    Ok(())
}
