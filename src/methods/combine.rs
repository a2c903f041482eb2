//! Cycles and mixtures of kernels (Tierney 1994): each leaves the target's law as it is when its parts do.

use super::kernel::Kernel;
use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};

/// Kernels by name, one after the other.
pub struct Cycle {
    parts: Vec<(String, Box<dyn Kernel>)>,
}

impl Cycle {
    pub fn new(parts: Vec<(String, Box<dyn Kernel>)>) -> Cycle {
        Cycle { parts }
    }
}

impl Kernel for Cycle {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        for (_, kernel) in &mut self.parts {
            kernel.step(target, walkers, phase);
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        for (_, kernel) in &self.parts {
            kernel.save(lane, state);
        }
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.parts
            .iter_mut()
            .try_for_each(|(_, kernel)| kernel.load(lane, state))
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        named_notes(&self.parts, lane)
    }
}

/// A kernel several times in a row.
pub struct Repeat {
    kernel: Box<dyn Kernel>,
    times: u64,
}

impl Repeat {
    pub fn new(kernel: Box<dyn Kernel>, times: u64) -> Repeat {
        Repeat { kernel, times }
    }
}

impl Kernel for Repeat {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        for _ in 0..self.times {
            self.kernel.step(target, walkers, phase);
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        self.kernel.save(lane, state);
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.kernel.load(lane, state)
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        self.kernel.notes(lane)
    }
}

/// One kernel a step, drawn from each chain's own stream.
pub struct Mixture {
    parts: Vec<(String, Box<dyn Kernel>)>,
    /// Chance of the kernels up to and with each; the last is 1.
    cumulative: Vec<f64>,
    chosen: Vec<usize>,
    wanted: Vec<bool>,
}

impl Mixture {
    /// `weights` are positive; they need not sum to one.
    pub fn new(parts: Vec<(String, Box<dyn Kernel>)>, weights: Vec<f64>, lanes: usize) -> Mixture {
        let total: f64 = weights.iter().sum();
        let mut so_far = 0.0;
        let mut cumulative: Vec<f64> = weights
            .iter()
            .map(|weight| {
                so_far += weight;
                so_far / total
            })
            .collect();
        if let Some(last) = cumulative.last_mut() {
            *last = 1.0;
        }
        Mixture {
            parts,
            cumulative,
            chosen: vec![0; lanes],
            wanted: vec![true; lanes],
        }
    }
}

impl Kernel for Mixture {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        self.wanted.copy_from_slice(&walkers.active);
        for lane in 0..walkers.lanes {
            if self.wanted[lane] {
                let u = walkers.streams[lane].unit();
                self.chosen[lane] = self.cumulative.partition_point(|&c| c <= u);
            }
        }
        for (index, (_, kernel)) in self.parts.iter_mut().enumerate() {
            for lane in 0..walkers.lanes {
                walkers.active[lane] = self.wanted[lane] && self.chosen[lane] == index;
            }
            if walkers.active.contains(&true) {
                kernel.step(target, walkers, phase);
            }
        }
        walkers.active.copy_from_slice(&self.wanted);
    }

    fn save(&self, lane: usize, state: &mut State) {
        for (_, kernel) in &self.parts {
            kernel.save(lane, state);
        }
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.parts
            .iter_mut()
            .try_for_each(|(_, kernel)| kernel.load(lane, state))
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        named_notes(&self.parts, lane)
    }
}

fn named_notes(parts: &[(String, Box<dyn Kernel>)], lane: usize) -> Vec<(String, f64)> {
    let of = |(name, kernel): &(String, Box<dyn Kernel>)| {
        let name = name.clone();
        let notes = kernel.notes(lane).into_iter();
        notes.map(move |(what, value)| (format!("{name}: {what}"), value))
    };
    parts.iter().flat_map(of).collect()
}
