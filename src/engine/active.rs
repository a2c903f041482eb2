//! A point under way: where its courses stand, what comes next, and how it ended.

use super::columns::{Columns, Ledger};
use super::judge::{Settling, Verdict};
use super::sink::{Mark, Reader, Stood};
use super::standing::common;
use super::task::Task;
use super::trail::Digest;
use super::walk::Walk;
use crate::course::Phase;
use crate::plan::BurnIn;
use std::ops::Range;
use std::sync::Arc;

/// How a point ended.
#[derive(Debug, Clone, PartialEq)]
pub struct PointEnd<F> {
    pub point: usize,
    /// `Err` when a chain found no start, in words.
    pub ended: Result<Ended<F>, String>,
}

/// A point that has its figures.
#[derive(Debug, Clone, PartialEq)]
pub struct Ended<F> {
    /// Draws a chain in the burn-in.
    pub burn_in: u64,
    /// What the last review of a self-chosen burn-in found.
    pub settling: Option<Settling>,
    /// Draws a chain after it.
    pub draws: u64,
    /// Whether the goal was met; `None` without a goal.
    pub met: Option<bool>,
    pub figures: F,
    /// The last link of each chain's trail.
    pub links: Vec<Digest>,
    /// Counts and rates of each chain, for the reader; outside every digest.
    pub notes: Vec<Vec<(String, f64)>>,
}

/// What a point that stands still does next.
pub(super) enum Next {
    Walk {
        phase: Phase,
        target: u64,
        walks: Vec<Walk>,
    },
    Review(Phase),
}

/// A point under way.
pub(super) struct Active<'s> {
    point: usize,
    pub(super) task: &'s Task,
    courses: usize,
    /// Courses that stand still, by their first chain when all are here.
    parked: Vec<Walk>,
    failed: usize,
    failure: Option<String>,
    ledgers: Vec<Ledger>,
    phase: Phase,
    target: u64,
    /// Index of the next review of the draws.
    review: usize,
    burn_in: u64,
    settling: Option<Settling>,
}

impl<'s> Active<'s> {
    pub(super) fn new(point: usize, task: &'s Task, courses: usize) -> Active<'s> {
        let first = match task.burn_in {
            BurnIn::Fixed(draws) => draws,
            BurnIn::Chosen { from, at_most } => {
                if from < at_most {
                    from
                } else {
                    at_most
                }
            }
        };
        let mut active = Active {
            point,
            task,
            courses,
            parked: Vec::new(),
            failed: 0,
            failure: None,
            ledgers: vec![Ledger::default(); task.chains.len()],
            phase: Phase::BurnIn,
            target: first,
            review: 0,
            burn_in: first,
            settling: None,
        };
        if first == 0 {
            active.begin_draws();
        }
        active
    }

    pub(super) fn courses(&self) -> usize {
        self.courses
    }

    pub(super) fn target(&self) -> u64 {
        self.target
    }

    /// Enters the blocks that all chains of a course go on from.
    pub(super) fn stands(&mut self, range: Range<usize>, stood: &[Vec<Stood>]) {
        let common = common(stood);
        for (chain, blocks) in range.zip(stood) {
            for block in &blocks[..common] {
                self.enter(chain, block.phase, block.draws, block.mark);
            }
        }
    }

    pub(super) fn enter(&mut self, chain: usize, phase: Phase, draws: usize, mark: Mark) {
        self.ledgers[chain].push(phase, draws, mark);
    }

    pub(super) fn park(&mut self, walk: Walk) {
        self.parked.push(walk);
    }

    /// A course could not begin.
    pub(super) fn fail(&mut self, words: String) {
        self.failed += 1;
        self.failure.get_or_insert(words);
    }

    pub(super) fn failure(&self) -> Option<String> {
        self.failure.clone()
    }

    /// All courses stand still.
    pub(super) fn still(&self) -> bool {
        self.parked.len() + self.failed == self.courses
    }

    pub(super) fn next(&mut self) -> Next {
        loop {
            let (phase, target) = (self.phase, self.target);
            let short = |walk: &Walk| walk.done(phase) < target;
            if self.parked.iter().any(short) {
                let walks = self.parked.extract_if(.., |walk| short(walk)).collect();
                return Next::Walk {
                    phase,
                    target,
                    walks,
                };
            }
            if phase == Phase::BurnIn && matches!(self.task.burn_in, BurnIn::Fixed(_)) {
                self.begin_draws();
            } else {
                return Next::Review(phase);
            }
        }
    }

    fn begin_draws(&mut self) {
        self.phase = Phase::Draws;
        self.review = 0;
        self.target = self.task.reviews[0];
    }

    /// The draws that the review at hand looks at: the last half of the burn-in, or all draws.
    pub(super) fn columns(&self, reader: &Arc<dyn Reader>) -> Columns {
        let from = match self.phase {
            Phase::BurnIn => self.target / 2,
            Phase::Draws => 0,
        };
        Columns::new(
            self.ledgers.clone(),
            reader.clone(),
            self.phase,
            from..self.target,
        )
    }

    /// Doubles the burn-in, or ends it.
    pub(super) fn settle(&mut self, settling: Settling) {
        let bound = match self.task.burn_in {
            BurnIn::Fixed(draws) => draws,
            BurnIn::Chosen { at_most, .. } => at_most,
        };
        let settled = settling.settled;
        self.settling = Some(settling);
        if settled || self.target >= bound {
            self.begin_draws();
        } else {
            let doubled = self.target * 2;
            self.target = if doubled < bound { doubled } else { bound };
            self.burn_in = self.target;
        }
    }

    /// Goes on to the next review, or ends the point.
    pub(super) fn judge<F>(&mut self, verdict: Verdict<F>) -> Option<PointEnd<F>> {
        self.review += 1;
        if verdict.met == Some(false)
            && let Some(&target) = self.task.reviews.get(self.review)
        {
            self.target = target;
            return None;
        }
        let mut links = vec![[0; 32]; self.task.chains.len()];
        let mut notes = vec![Vec::new(); self.task.chains.len()];
        for walk in &self.parked {
            for (chain, link) in walk.links() {
                links[chain] = link;
            }
            for (chain, note) in walk.notes() {
                notes[chain] = note;
            }
        }
        Some(PointEnd {
            point: self.point,
            ended: Ok(Ended {
                burn_in: self.burn_in,
                settling: self.settling.clone(),
                draws: self.target,
                met: verdict.met,
                figures: verdict.figures,
                links,
                notes,
            }),
        })
    }
}
