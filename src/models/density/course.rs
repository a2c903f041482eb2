//! Chains under way on a density.

use super::Density;
use crate::course::{Block, ChainSeed, Coordinate, Course, Phase, StartFault, State, Target};
use crate::formula::Machine;
use crate::methods::{Kernel, Reader, Walkers};
use crate::random::{Purpose, Stream};
use std::sync::Arc;

/// The one NaN that is recorded: which bits arithmetic makes depends on the machine.
const CANONICAL_NAN: f64 = f64::from_bits(0x7ff8_0000_0000_0000);

fn canonical(x: f64) -> f64 {
    if x.is_nan() { CANONICAL_NAN } else { x }
}

/// The posterior as a target for kernels.
struct Posterior {
    lanes: usize,
    coordinates: Arc<[Coordinate]>,
    machine: Machine,
}

impl Target for Posterior {
    fn lanes(&self) -> usize {
        self.lanes
    }
    fn coordinates(&self) -> &[Coordinate] {
        &self.coordinates
    }
    fn log_density(&mut self, position: &[f64], out: &mut [f64]) {
        self.machine.run(position, out);
        // Neither an undefined nor an infinite density is a place to go to. Asked first: what is not written
        // anew is read again at once.
        if !out.iter().all(|value| value.is_finite()) {
            for value in out.iter_mut().filter(|value| !value.is_finite()) {
                *value = f64::NEG_INFINITY;
            }
        }
    }
}

/// A chain whose log density is above this has run away: the exponential of a slice's level, or of an acceptance,
/// is about to be lost in its rounding, and no density of real data is so high.
const RUN_AWAY: f64 = 1e15;

/// Chains in lockstep on a density.
pub struct Lanes {
    model: Arc<Density>,
    target: Posterior,
    kernel: Box<dyn Kernel>,
    walkers: Walkers,
    /// Draws made since the start of burn-in, a lane.
    drawn: Vec<u64>,
    recorder: Recorder,
}

/// Draws that are kept together before they go to the blocks, where each quantity of each lane has a place of
/// its own: some lines of the cache there, so that its prefetching helps.
const BATCH: usize = 32;

/// What turns positions into recorded quantities.
struct Recorder {
    keys: Vec<[u8; 32]>,
    /// The coordinate that each quantity repeats, where that is all.
    repeats: Option<Vec<usize>>,
    machine: Machine,
    parameters: Vec<Machine>,
    inputs: Vec<f64>,
    /// The quantities of a batch of draws: quantity `q` of lane `l` in draw `d` of the batch is at
    /// `(d * quantities + q) * lanes + l`.
    outputs: Vec<f64>,
}

impl Lanes {
    pub fn start(model: Arc<Density>, chains: &[ChainSeed]) -> Result<Lanes, StartFault> {
        let lanes = chains.len();
        let dimension = model.posterior.coordinates.len();
        let mut position = vec![0.0; dimension * lanes];
        for (lane, seed) in chains.iter().enumerate() {
            let start = model.start.of_chain(&model.posterior, seed)?;
            for (c, z) in start.into_iter().enumerate() {
                position[c * lanes + lane] = z;
            }
        }
        let mut target = Posterior {
            lanes,
            coordinates: model.posterior.coordinates.clone().into(),
            machine: model.posterior.target.machine(lanes),
        };
        let streams = chains
            .iter()
            .map(|seed| Stream::new(&seed.stream_key, Purpose::Walk))
            .collect();
        let walkers = Walkers::new(&mut target, position, streams);
        let machine = model.recorded.program.machine(lanes);
        let recorder = Recorder {
            keys: chains.iter().map(|seed| seed.stream_key).collect(),
            inputs: vec![0.0; model.recorded.program.inputs() * lanes],
            outputs: vec![0.0; BATCH * model.recorded.quantities.len() * lanes],
            repeats: model.recorded.program.repeats(),
            parameters: model
                .recorded
                .predictions
                .iter()
                .map(|p| p.parameters.machine(lanes))
                .collect(),
            machine,
        };
        let kernel = model.sampler.kernel(lanes);
        Ok(Lanes {
            model,
            target,
            kernel,
            walkers,
            drawn: vec![0; lanes],
            recorder,
        })
    }

    /// Such a chain stays where it is and records nothing but NaN, so that no figure can be made of it. Its log
    /// density is part of its state: an interrupted run goes on the same.
    fn ran_away(&self, lane: usize) -> bool {
        self.walkers.log_density[lane] > RUN_AWAY
    }

    /// Leaves nothing of the lanes that ran away in draw `of_batch` of the batch.
    fn blank(&mut self, of_batch: usize) {
        let lanes = self.walkers.lanes;
        let size = self.model.recorded.quantities.len() * lanes;
        for lane in 0..lanes {
            if !self.ran_away(lane) {
                continue;
            }
            let draw = &mut self.recorder.outputs[of_batch * size..][..size];
            draw.iter_mut()
                .skip(lane)
                .step_by(lanes)
                .for_each(|x| *x = CANONICAL_NAN);
        }
    }

    /// Computes the recorded quantities at the present position as draw `of_batch` of the batch.
    fn record(&mut self, of_batch: usize) {
        let lanes = self.walkers.lanes;
        let position = &self.walkers.position;
        let recorder = &mut self.recorder;
        let size = self.model.recorded.quantities.len() * lanes;
        let outputs = &mut recorder.outputs[of_batch * size..][..size];
        let mut at = position.len();
        if recorder.parameters.is_empty() {
            match &recorder.repeats {
                Some(coordinates) => copy_rows(coordinates, position, lanes, outputs),
                None => {
                    recorder.machine.run(position, outputs);
                    outputs.iter_mut().for_each(|x| *x = canonical(*x));
                }
            }
            return;
        }
        recorder.inputs[..at].copy_from_slice(position);
        let predictions = &self.model.recorded.predictions;
        for (prediction, machine) in predictions.iter().zip(&mut recorder.parameters) {
            let mut numbers = vec![0.0; prediction.parameters.outputs() * lanes];
            machine.run(position, &mut numbers);
            for lane in 0..lanes {
                let purpose = Purpose::Prediction {
                    quantity: prediction.key,
                    draw: self.drawn[lane],
                };
                let mut stream = Stream::new(&recorder.keys[lane], purpose);
                for element in 0..prediction.len {
                    let mut parameters = Vec::with_capacity(prediction.widths.len());
                    let mut slot = 0;
                    for &width in &prediction.widths {
                        let own = if width == 1 { 0 } else { element };
                        parameters.push(numbers[(slot + own) * lanes + lane]);
                        slot += width;
                    }
                    let value = prediction.law.draw(&mut stream, &parameters);
                    recorder.inputs[at + element * lanes + lane] =
                        value.expect("only laws with finite mass are predicted");
                }
            }
            at += prediction.len * lanes;
        }
        recorder.machine.run(&recorder.inputs, outputs);
        outputs.iter_mut().for_each(|x| *x = canonical(*x));
    }

    /// Moves the first `draws` draws of the batch to the blocks, where they begin at draw `first`.
    fn unload(&self, blocks: &mut [Block], first: usize, draws: usize) {
        let lanes = self.walkers.lanes;
        let size = self.model.recorded.quantities.len() * lanes;
        let outputs = &self.recorder.outputs;
        for (lane, block) in blocks.iter_mut().enumerate() {
            for (quantity, column) in block.values.chunks_exact_mut(block.draws).enumerate() {
                let column = &mut column[first..first + draws];
                let at = quantity * lanes + lane;
                for (to, draw) in column.iter_mut().zip(outputs.chunks_exact(size)) {
                    *to = draw[at];
                }
            }
        }
    }
}

/// Rows of a position one after another.
fn copy_rows(coordinates: &[usize], position: &[f64], lanes: usize, out: &mut [f64]) {
    for (&coordinate, out) in coordinates.iter().zip(out.chunks_exact_mut(lanes)) {
        let row = &position[coordinate * lanes..][..lanes];
        for (out, &x) in out.iter_mut().zip(row) {
            *out = canonical(x);
        }
    }
}

impl Course for Lanes {
    fn chains(&self) -> usize {
        self.walkers.lanes
    }

    fn advance(&mut self, phase: Phase, draws: usize) -> Vec<Block> {
        let lanes = self.walkers.lanes;
        let quantities = self.model.recorded.quantities.len();
        // Each by itself: copies of one would touch all their memory long before the draws do.
        let block = |_| Block {
            draws,
            values: vec![0.0; draws * quantities],
        };
        let mut blocks: Vec<Block> = (0..lanes).map(block).collect();
        for first in (0..draws).step_by(BATCH) {
            let batch = BATCH.min(draws - first);
            for of_batch in 0..batch {
                for _ in 0..self.model.every {
                    for lane in 0..lanes {
                        self.walkers.active[lane] = !self.ran_away(lane);
                    }
                    self.kernel.step(&mut self.target, &mut self.walkers, phase);
                }
                self.record(of_batch);
                self.blank(of_batch);
                for drawn in &mut self.drawn {
                    *drawn += 1;
                }
            }
            self.unload(&mut blocks, first, batch);
        }
        blocks
    }

    fn save(&self, chain: usize) -> State {
        let mut state = State {
            frozen: Vec::new(),
            moving: self.drawn[chain].to_le_bytes().to_vec(),
        };
        self.walkers.save(chain, &mut state);
        self.kernel.save(chain, &mut state);
        state
    }

    fn load(&mut self, chain: usize, state: &State) -> Result<(), String> {
        let mut reader = Reader::new(state);
        self.drawn[chain] = reader.moving.count()?;
        self.walkers.load(chain, &mut reader)?;
        self.kernel.load(chain, &mut reader)?;
        reader.finish()
    }

    fn notes(&self, chain: usize) -> Vec<(String, f64)> {
        self.kernel.notes(chain)
    }
}
