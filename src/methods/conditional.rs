//! Integer coordinates of finite range, one after the other, each drawn from its full conditional (Geman &
//! Geman 1984): every value is evaluated, and one is drawn by inversion.

use super::declaration::{Method, TIMES};
use super::kernel::Kernel;
use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};
use crate::maths;

pub const DECLARATION: Method = Method {
    name: "conditional",
    about: "Draws integer unknowns one after the other from their law given everything else.",
    limits: "Needs a finite range of at most 10,000 values; evaluates the density at every one of them.",
    reference: "Geman & Geman 1984.",
    real: false,
    integer: true,
    options: &[TIMES],
};

/// The longest range that is gone through for one draw.
pub const LONGEST_RANGE: u64 = 10_000;

/// See the head of this file.
pub struct Conditional {
    on: Vec<usize>,
    /// Least and greatest value of each.
    ranges: Vec<(i64, i64)>,
    /// Log density at value `k` of the range for lane `l` at `k * lanes + l`; then the weights.
    table: Vec<f64>,
    trial: Vec<f64>,
    density: Vec<f64>,
    current: Vec<usize>,
    updates: Vec<u64>,
    changes: Vec<u64>,
}

impl Conditional {
    /// Moves the coordinates `on` of a target of so many dimensions.
    pub fn new(on: Vec<usize>, ranges: Vec<(i64, i64)>, dimension: usize, lanes: usize) -> Self {
        let longest = ranges.iter().map(|&range| values(range)).max().unwrap_or(0);
        Conditional {
            on,
            ranges,
            table: vec![0.0; longest * lanes],
            trial: vec![0.0; dimension * lanes],
            density: vec![0.0; lanes],
            current: vec![0; lanes],
            updates: vec![0; lanes],
            changes: vec![0; lanes],
        }
    }

    /// Fills the table: each lane goes through the values other than its own, whose density is known.
    fn evaluate(&mut self, index: usize, target: &mut dyn Target, walkers: &Walkers) {
        let lanes = walkers.lanes;
        let count = values(self.ranges[index]);
        let lower = self.ranges[index].0 as f64;
        let row = self.on[index] * lanes;
        for lane in 0..lanes {
            let current = (walkers.position[row + lane] - lower) as usize;
            self.current[lane] = if current < count { current } else { count - 1 };
            self.table[self.current[lane] * lanes + lane] = walkers.log_density[lane];
        }
        for step in 0..count - 1 {
            for lane in 0..lanes {
                let value = step + usize::from(step >= self.current[lane]);
                self.trial[row + lane] = lower + value as f64;
            }
            target.log_density(&self.trial, &mut self.density);
            for lane in 0..lanes {
                let value = step + usize::from(step >= self.current[lane]);
                self.table[value * lanes + lane] = self.density[lane];
            }
        }
    }

    /// Draws a lane's value: weights relative to the greatest, summed in rising order.
    fn choose(&mut self, index: usize, lane: usize, walkers: &mut Walkers) -> usize {
        let lanes = walkers.lanes;
        let count = values(self.ranges[index]);
        let column = || (0..count).map(|k| k * lanes + lane);
        let mut greatest = f64::NEG_INFINITY;
        for at in column() {
            if self.table[at] > greatest {
                greatest = self.table[at];
            }
        }
        let weight = |density: f64| maths::exp(density - greatest);
        let mut total = 0.0;
        for at in column() {
            total += weight(self.table[at]);
        }
        let wanted = walkers.streams[lane].unit() * total;
        let mut so_far = 0.0;
        for (k, at) in column().enumerate() {
            so_far += weight(self.table[at]);
            if so_far > wanted {
                return k;
            }
        }
        self.current[lane]
    }
}

/// Number of values of a range.
fn values((lower, upper): (i64, i64)) -> usize {
    (upper - lower) as usize + 1
}

impl Kernel for Conditional {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        let lanes = walkers.lanes;
        self.trial.copy_from_slice(&walkers.position);
        for index in 0..self.on.len() {
            self.evaluate(index, target, walkers);
            let row = self.on[index] * lanes;
            for lane in 0..lanes {
                if walkers.active[lane] {
                    let value = self.choose(index, lane, walkers);
                    walkers.position[row + lane] = (self.ranges[index].0 + value as i64) as f64;
                    walkers.log_density[lane] = self.table[value * lanes + lane];
                    if phase == Phase::Draws {
                        self.updates[lane] += 1;
                        self.changes[lane] += u64::from(value != self.current[lane]);
                    }
                }
                self.trial[row + lane] = walkers.position[row + lane];
            }
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        state.moving.extend(self.updates[lane].to_le_bytes());
        state.moving.extend(self.changes[lane].to_le_bytes());
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.updates[lane] = state.moving.count()?;
        self.changes[lane] = state.moving.count()?;
        Ok(())
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        if self.updates[lane] == 0 {
            return Vec::new();
        }
        let rate = self.changes[lane] as f64 / self.updates[lane] as f64;
        vec![("share of draws that change the value".into(), rate)]
    }
}
