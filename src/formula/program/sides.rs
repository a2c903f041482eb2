//! Inputs into the memory and outputs out of it, compiled with the interpreter: eight lanes are one register.

use super::memory::{Memory, Pack, WIDTH, spread_data};
use super::tape::{Output, StoreForm, Tape};

/// `live` lanes from `first` of `lanes`, at most as many as a pack holds.
#[derive(Debug, Clone, Copy)]
pub(super) struct Lanes {
    pub lanes: usize,
    pub first: usize,
    pub live: usize,
}

impl Lanes {
    /// Puts the inputs of some lanes in place; lanes not in use repeat the first.
    #[inline(always)]
    pub fn load(self, tape: &Tape, memory: &mut Memory, inputs: &[f64]) {
        let Lanes { lanes, first, live } = self;
        let slot = |slot: usize| &inputs[slot * lanes + first..slot * lanes + first + live];
        let fill = |pack: &mut [f64], numbers: &[f64]| {
            if let Ok(numbers) = <&[f64; WIDTH]>::try_from(numbers) {
                pack.copy_from_slice(numbers);
            } else {
                pack[..live].copy_from_slice(numbers);
                pack[live..].fill(numbers[0]);
            }
        };
        for &(at, register) in &tape.scalar_inputs {
            let Pack(pack) = &mut memory.scalars[register];
            fill(pack, slot(at));
        }
        for &(at, store) in &tape.vector_inputs {
            let StoreForm::Whole(rows) = tape.stores[store] else {
                continue;
            };
            let out = memory.stores[store].all_mut();
            if !memory.wide {
                spread_data(&inputs[at..at + rows], false, out);
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

    /// Takes the outputs of these lanes out.
    #[inline(always)]
    pub fn unload(self, tape: &Tape, memory: &Memory, outputs: &mut [f64]) {
        let Lanes { lanes, first, live } = self;
        let mut at = 0;
        for output in &tape.outputs {
            match *output {
                Output::Scalar(register) => {
                    let out = &mut outputs[at * lanes + first..at * lanes + first + live];
                    let Pack(pack) = &memory.scalars[register];
                    if let Ok(out) = <&mut [f64; WIDTH]>::try_from(&mut *out) {
                        *out = *pack;
                    } else {
                        out.copy_from_slice(&pack[..live]);
                    }
                    at += 1;
                }
                Output::Vector(store, rows) if memory.wide => {
                    let numbers = memory.stores[store].all();
                    for row in 0..rows {
                        let out = &mut outputs[at * lanes + first..at * lanes + first + live];
                        out.copy_from_slice(&numbers[row * WIDTH..row * WIDTH + live]);
                        at += 1;
                    }
                }
                Output::Vector(store, rows) => {
                    outputs[at..at + rows].copy_from_slice(&memory.stores[store].all()[..rows]);
                    at += rows;
                }
            }
        }
    }
}
