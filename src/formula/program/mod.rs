//! Programs: what a graph says about some of its values, made ready to run on numbers.

mod cost;
mod memory;
mod run;
mod schedule;
mod tape;

#[cfg(test)]
mod tests;

use super::graph::Graph;
use crate::laws::Value;
use memory::{Memory, Pack, WIDTH};
use std::sync::Arc;
use tape::{Output, StoreForm, Tape};

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
        Program {
            tape: Arc::new(schedule::tape(graph, outputs)),
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
            self.load(inputs, first, live);
            run::run(&self.tape, &mut self.memory, live);
            self.unload(outputs, first, live);
            first += live;
        }
    }

    /// Puts the inputs of some lanes in place; lanes not in use repeat the first.
    fn load(&mut self, inputs: &[f64], first: usize, live: usize) {
        let lanes = self.lanes;
        let slot = |slot: usize| &inputs[slot * lanes + first..slot * lanes + first + live];
        let fill = |pack: &mut [f64], numbers: &[f64]| {
            if let Ok(numbers) = <&[f64; WIDTH]>::try_from(numbers) {
                pack.copy_from_slice(numbers);
            } else {
                pack[..live].copy_from_slice(numbers);
                pack[live..].fill(numbers[0]);
            }
        };
        for &(at, register) in &self.tape.scalar_inputs {
            let Pack(pack) = &mut self.memory.scalars[register];
            fill(pack, slot(at));
        }
        for &(at, store) in &self.tape.vector_inputs {
            let StoreForm::Whole(rows) = self.tape.stores[store] else {
                continue;
            };
            let out = self.memory.stores[store].all_mut();
            if !self.memory.wide {
                memory::spread_data(&inputs[at..at + rows], false, out);
                continue;
            }
            if lanes == WIDTH {
                out[..rows * WIDTH].copy_from_slice(&inputs[at * WIDTH..(at + rows) * WIDTH]);
                continue;
            }
            for (row, pack) in out.chunks_exact_mut(WIDTH).take(rows).enumerate() {
                fill(pack, slot(at + row));
            }
        }
    }

    fn unload(&self, outputs: &mut [f64], first: usize, live: usize) {
        let lanes = self.lanes;
        let mut at = 0;
        for output in &self.tape.outputs {
            match *output {
                Output::Scalar(register) => {
                    let out = &mut outputs[at * lanes + first..at * lanes + first + live];
                    out.copy_from_slice(&self.memory.scalars[register].0[..live]);
                    at += 1;
                }
                Output::Vector(store, rows) if self.memory.wide => {
                    let numbers = self.memory.stores[store].all();
                    for row in 0..rows {
                        let out = &mut outputs[at * lanes + first..at * lanes + first + live];
                        out.copy_from_slice(&numbers[row * WIDTH..row * WIDTH + live]);
                        at += 1;
                    }
                }
                Output::Vector(store, rows) => {
                    outputs[at..at + rows]
                        .copy_from_slice(&self.memory.stores[store].all()[..rows]);
                    at += rows;
                }
            }
        }
    }
}
