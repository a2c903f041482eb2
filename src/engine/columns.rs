//! The draws of one quantity of all chains of a point, read back from the journal.

use super::sink::{Mark, Reader};
use crate::course::Phase;
use std::ops::Range;
use std::sync::Arc;

/// Where the blocks of one chain are kept, in order, each with its draws.
#[derive(Debug, Clone, Default)]
pub struct Ledger {
    burn_in: Vec<(u64, Mark)>,
    draws: Vec<(u64, Mark)>,
}

impl Ledger {
    /// Enters the next block of a phase.
    pub fn push(&mut self, phase: Phase, draws: usize, mark: Mark) {
        let blocks = match phase {
            Phase::BurnIn => &mut self.burn_in,
            Phase::Draws => &mut self.draws,
        };
        blocks.push((draws as u64, mark));
    }

    /// The draws and the mark of every block of a phase.
    pub fn marks(&self, phase: Phase) -> impl Iterator<Item = (u64, Mark)> + '_ {
        self.blocks(phase).iter().copied()
    }

    fn blocks(&self, phase: Phase) -> &[(u64, Mark)] {
        match phase {
            Phase::BurnIn => &self.burn_in,
            Phase::Draws => &self.draws,
        }
    }
}

/// A span of draws of one phase, of every chain of a point.
#[derive(Clone)]
pub struct Columns {
    ledgers: Vec<Ledger>,
    reader: Arc<dyn Reader>,
    phase: Phase,
    span: Range<u64>,
}

impl Columns {
    /// The draws `span` of a phase, a ledger a chain.
    pub fn new(
        ledgers: Vec<Ledger>,
        reader: Arc<dyn Reader>,
        phase: Phase,
        span: Range<u64>,
    ) -> Columns {
        Columns {
            ledgers,
            reader,
            phase,
            span,
        }
    }

    /// Chains of the point.
    pub fn chains(&self) -> usize {
        self.ledgers.len()
    }

    /// Draws of each chain in the span.
    pub fn draws(&self) -> usize {
        (self.span.end - self.span.start) as usize
    }

    /// The draws of one quantity: one vector a chain, in order.
    pub fn quantity(&self, quantity: usize) -> Result<Vec<Vec<f64>>, String> {
        let ledgers = self.ledgers.iter();
        ledgers.map(|ledger| self.chain(ledger, quantity)).collect()
    }

    fn chain(&self, ledger: &Ledger, quantity: usize) -> Result<Vec<f64>, String> {
        let mut column = Vec::with_capacity(self.draws());
        let mut block = Vec::new();
        let mut from = 0;
        for &(draws, mark) in ledger.blocks(self.phase) {
            let to = from + draws;
            if to > self.span.start && from < self.span.end {
                block.clear();
                self.reader.column(mark, quantity, &mut block)?;
                let first = self.span.start.saturating_sub(from) as usize;
                let last = (self.span.end.min(to) - from) as usize;
                column.extend_from_slice(&block[first..last]);
            }
            from = to;
        }
        Ok(column)
    }
}
