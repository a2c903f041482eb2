//! Chains under way on a density.

use super::Density;
use crate::course::{Block, ChainSeed, Coordinate, Course, Phase, StartFault, State, Target};
use crate::formula::Machine;
use crate::methods::{Kernel, Reader, Walkers};
use crate::random::{Purpose, Stream};
use multiversion::multiversion;
use std::sync::Arc;

/// The one NaN that is recorded: which bits arithmetic makes depends on the machine.
const CANONICAL_NAN: f64 = f64::from_bits(0x7ff8_0000_0000_0000);

#[inline(always)]
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
    /// Whether any lane has run away.
    away: bool,
    recorder: Recorder,
}

/// Draws that are kept together before they go to the blocks, where each quantity of each lane has a place of
/// its own: enough lines of the cache in a row there for its prefetching to help, while the batch stays in the
/// second cache.
fn batch_draws(numbers_a_draw: usize) -> usize {
    (16_384 / numbers_a_draw.max(1)).clamp(8, 128)
}

/// What turns positions into recorded quantities.
struct Recorder {
    keys: Vec<[u8; 32]>,
    /// Whether quantities are computed of the inputs, or just are some of them.
    computed: bool,
    /// Where each quantity stands among what is computed, or among the inputs.
    rows: Vec<usize>,
    machine: Machine,
    parameters: Vec<Machine>,
    inputs: Vec<f64>,
    /// The quantities of one draw, lanes fastest, where they must be computed.
    outputs: Vec<f64>,
    /// The most draws of a batch.
    draws: usize,
    /// The quantities of a batch of draws: quantity `q` of lane `l` in draw `d` of the batch is at
    /// `(q * (draws + 1) + d) * lanes + l`. One row more than draws, lest the rows of one draw compete for the
    /// same lines of the cache.
    batch: Vec<f64>,
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
        let repeats = model.recorded.program.repeats();
        let quantities = model.recorded.quantities.len();
        let draws = batch_draws(quantities * lanes);
        let recorder = Recorder {
            keys: chains.iter().map(|seed| seed.stream_key).collect(),
            inputs: vec![0.0; model.recorded.program.inputs() * lanes],
            outputs: vec![0.0; quantities * lanes],
            draws,
            batch: vec![0.0; quantities * (draws + 1) * lanes],
            computed: repeats.is_none(),
            rows: repeats.unwrap_or_else(|| (0..quantities).collect()),
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
            away: false,
            recorder,
        })
    }

    /// Such a chain stays where it is and records nothing but NaN, so that no figure can be made of it. Its log
    /// density is part of its state: an interrupted run goes on the same.
    fn ran_away(&self, lane: usize) -> bool {
        self.walkers.log_density[lane] > RUN_AWAY
    }

    /// Lets those lanes stand still that have run away.
    fn hold(&mut self) {
        // All asked together, and nothing written while none has: this is done at every step.
        let densities = self.walkers.log_density.iter();
        let away = densities.fold(false, |any, density| any | (*density > RUN_AWAY));
        if away || self.away {
            for lane in 0..self.walkers.lanes {
                self.walkers.active[lane] = !self.ran_away(lane);
            }
        }
        self.away = away;
    }

    /// Leaves nothing of the lanes that ran away in draw `of_batch` of the batch.
    fn blank(&mut self, of_batch: usize) {
        let lanes = self.walkers.lanes;
        for lane in 0..lanes {
            if !self.ran_away(lane) {
                continue;
            }
            let room = self.recorder.draws + 1;
            let rows = self.recorder.batch.chunks_exact_mut(lanes);
            rows.skip(of_batch)
                .step_by(room)
                .for_each(|row| row[lane] = CANONICAL_NAN);
        }
    }

    /// Computes the recorded quantities at the present position as draw `of_batch` of the batch.
    fn record(&mut self, of_batch: usize) {
        let lanes = self.walkers.lanes;
        let position = &self.walkers.position;
        let recorder = &mut self.recorder;
        if recorder.parameters.is_empty() {
            return recorder.keep(Some(position), lanes, of_batch);
        }
        let mut at = position.len();
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
        recorder.keep(None, lanes, of_batch);
    }

    /// Moves the first `draws` draws of the batch to the blocks, where they begin at draw `first`.
    fn unload(&self, blocks: &mut [Block], first: usize, draws: usize) {
        let lanes = self.walkers.lanes;
        let room = self.recorder.draws + 1;
        let rows = self.recorder.batch.chunks_exact(room * lanes);
        for (quantity, rows) in rows.enumerate() {
            for (lane, block) in blocks.iter_mut().enumerate() {
                let column = &mut block.values[quantity * block.draws + first..][..draws];
                for (to, row) in column.iter_mut().zip(rows.chunks_exact(lanes)) {
                    *to = row[lane];
                }
            }
        }
    }
}

impl Recorder {
    /// Puts the quantities of a draw in the batch: of a position, or of the inputs at hand.
    fn keep(&mut self, position: Option<&[f64]>, lanes: usize, of_batch: usize) {
        let mut from = position.unwrap_or(&self.inputs);
        if self.computed {
            self.machine.run(from, &mut self.outputs);
            from = &self.outputs;
        }
        let room = self.draws + 1;
        copy_rows(&self.rows, from, lanes, &mut self.batch, room, of_batch);
    }
}

/// Copies rows to every `room`-th row of `out`, from row `first` on.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2")))]
fn copy_rows(
    rows: &[usize],
    from: &[f64],
    lanes: usize,
    out: &mut [f64],
    room: usize,
    first: usize,
) {
    if lanes == 8 {
        let (from, _) = from.as_chunks::<8>();
        let (out, _) = out.as_chunks_mut::<8>();
        for (&row, out) in rows.iter().zip(out.iter_mut().skip(first).step_by(room)) {
            *out = from[row].map(canonical);
        }
        return;
    }
    let out = out.chunks_exact_mut(lanes).skip(first).step_by(room);
    for (&row, out) in rows.iter().zip(out) {
        out.copy_from_slice(&from[row * lanes..][..lanes]);
        out.iter_mut().for_each(|x| *x = canonical(*x));
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
        self.hold();
        let most = self.recorder.draws;
        for first in (0..draws).step_by(most) {
            let batch = most.min(draws - first);
            for of_batch in 0..batch {
                for _ in 0..self.model.every {
                    self.kernel.step(&mut self.target, &mut self.walkers, phase);
                    self.hold();
                }
                self.record(of_batch);
                if self.away {
                    self.blank(of_batch);
                }
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
