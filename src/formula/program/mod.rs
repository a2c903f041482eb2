//! Programs: what a graph says about some of its values, made ready to run on numbers.

mod cost;
mod memory;
mod pairs;
mod run;
mod schedule;
mod sides;
mod tape;

#[cfg(test)]
mod tests;

use super::graph::Graph;
use crate::laws::Value;
use memory::{Memory, WIDTH};
use sides::Lanes;
use std::sync::Arc;
use tape::{Output, Tape};

/// Packs of a block: 32 rows of eight lanes, or 256 rows of one. About ten blocks stay in the first cache.
const BLOCK: usize = 32;

/// Outputs as functions of the inputs.
#[derive(Debug, Clone)]
pub struct Program {
    tape: Arc<Tape>,
}

impl Program {
    /// Makes a program that computes these values.
    pub fn compile(graph: &Graph, outputs: &[Value]) -> Program {
        let mut tape = schedule::tape(graph, outputs);
        pairs::join(&mut tape);
        Program {
            tape: Arc::new(tape),
        }
    }

    /// Length of the input vector.
    pub fn inputs(&self) -> usize {
        self.tape.inputs
    }

    /// Length of the output vector: the outputs one after the other, vectors element by element.
    pub fn outputs(&self) -> usize {
        let length = |output: &Output| match output {
            Output::Scalar(_) => 1,
            Output::Vector(_, rows) => *rows,
        };
        self.tape.outputs.iter().map(length).sum()
    }

    /// Arithmetic operations an evaluation of one lane, about; from the program alone.
    pub fn cost(&self) -> f64 {
        self.tape.cost
    }

    /// The input that each output repeats, if there is nothing to compute.
    pub fn repeats(&self) -> Option<Vec<usize>> {
        let mut slots = Vec::new();
        for output in &self.tape.outputs {
            match *output {
                Output::Scalar(register) => {
                    let mut inputs = self.tape.scalar_inputs.iter();
                    slots.push(inputs.find(|input| input.1 == register)?.0);
                }
                Output::Vector(store, rows) => {
                    let mut inputs = self.tape.vector_inputs.iter();
                    let first = inputs.find(|input| input.1 == store)?.0;
                    slots.extend(first..first + rows);
                }
            }
        }
        self.tape.steps.is_empty().then_some(slots)
    }

    /// A machine for so many lanes, each of which has its own inputs and outputs.
    ///
    /// # Panics
    /// When asked for no lane.
    pub fn machine(&self, lanes: usize) -> Machine {
        self.machine_with(lanes, BLOCK)
    }

    fn machine_with(&self, lanes: usize, block: usize) -> Machine {
        assert!(lanes > 0, "at least one lane");
        Machine {
            memory: Memory::new(&self.tape, lanes > 1, block),
            inputs: self.inputs(),
            outputs: self.outputs(),
            tape: self.tape.clone(),
            lanes,
        }
    }
}

/// A program with the memory it works in.
#[derive(Debug)]
pub struct Machine {
    tape: Arc<Tape>,
    memory: Memory,
    lanes: usize,
    inputs: usize,
    outputs: usize,
}

impl Machine {
    pub fn lanes(&self) -> usize {
        self.lanes
    }

    /// Computes the outputs: slot s of lane l is at `s * lanes + l` on both sides. The bits of a lane depend
    /// on its inputs alone.
    ///
    /// # Panics
    /// When a side has not the program's length times the lanes.
    pub fn run(&mut self, inputs: &[f64], outputs: &mut [f64]) {
        assert_eq!(
            inputs.len(),
            self.inputs * self.lanes,
            "an input for each slot and lane"
        );
        assert_eq!(
            outputs.len(),
            self.outputs * self.lanes,
            "an output for each slot and lane"
        );
        let mut first = 0;
        while first < self.lanes {
            let live = WIDTH.min(self.lanes - first);
            let lanes = Lanes {
                lanes: self.lanes,
                first,
                live,
            };
            run::run(&self.tape, &mut self.memory, inputs, outputs, lanes);
            first += live;
        }
    }
}
