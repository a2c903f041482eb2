//! Metropolis on integer coordinates, one after the other: a step up or down of 1 + floor(s E) with E
//! standard exponential, a geometric law, so that every distance is possible. In burn-in the scale s goes by
//! Robbins-Monro to an acceptance rate of 0.44, by coordinate and chain.

use super::gain::AdaptiveScale;
use super::kernel::Kernel;
use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};
use crate::{maths, random};

/// Beyond this not every whole number is a double.
const LARGEST: f64 = 9007199254740992.0;

/// A step longer than 1 keeps a chance of e^-2, so that a gap in the support can be crossed.
const LEAST_SCALE: f64 = 0.5;

/// See the head of this file.
pub struct IntegerWalk {
    on: Vec<usize>,
    /// Least and greatest value of each.
    bounds: Vec<(f64, f64)>,
    adapt: bool,
    /// Coordinate `i` of `on`, lane `l` at `i * lanes + l`.
    scales: Vec<AdaptiveScale>,
    steps: Vec<u64>,
    accepted: Vec<u64>,
    patience: Vec<f64>,
    trial: Vec<f64>,
    density: Vec<f64>,
}

impl IntegerWalk {
    /// Moves the coordinates `on` of a target of so many dimensions; `scale` is the first s.
    pub fn new(
        on: Vec<usize>,
        bounds: Vec<(Option<i64>, Option<i64>)>,
        dimension: usize,
        scale: f64,
        adapt: bool,
        lanes: usize,
    ) -> IntegerWalk {
        let bounds = bounds
            .into_iter()
            .map(|(lower, upper)| {
                (
                    lower.map_or(-LARGEST, |x| x as f64),
                    upper.map_or(LARGEST, |x| x as f64),
                )
            })
            .collect();
        IntegerWalk {
            bounds,
            adapt,
            scales: vec![AdaptiveScale::new(scale).at_least(LEAST_SCALE); on.len() * lanes],
            steps: vec![0; lanes],
            accepted: vec![0; lanes],
            patience: vec![0.0; lanes],
            trial: vec![0.0; dimension * lanes],
            density: vec![0.0; lanes],
            on,
        }
    }

    /// Sets each lane's trial. A step out of the bounds has no patience: it is refused where it began.
    fn propose(&mut self, index: usize, walkers: &mut Walkers) {
        let lanes = walkers.lanes;
        let (lower, upper) = self.bounds[index];
        for lane in 0..lanes {
            let at = self.on[index] * lanes + lane;
            self.patience[lane] = REFUSED;
            if !walkers.active[lane] {
                continue;
            }
            let stream = &mut walkers.streams[lane];
            let scale = self.scales[index * lanes + lane].value();
            let distance = 1.0 + (scale * random::exponential(stream)).floor();
            let down = stream.word() >> 63 == 1;
            let patience = random::exponential(stream);
            let trial = walkers.position[at] + if down { -distance } else { distance };
            if trial >= lower && trial <= upper {
                self.trial[at] = trial;
                self.patience[lane] = patience;
            }
        }
    }

    fn decide(&mut self, index: usize, walkers: &mut Walkers, phase: Phase) {
        let lanes = walkers.lanes;
        for lane in (0..lanes).filter(|&lane| walkers.active[lane]) {
            let at = self.on[index] * lanes + lane;
            let patience = self.patience[lane];
            let rise = self.density[lane] - walkers.log_density[lane];
            let accept = patience != REFUSED && rise > -patience;
            if accept {
                walkers.position[at] = self.trial[at];
                walkers.log_density[lane] = self.density[lane];
            } else {
                self.trial[at] = walkers.position[at];
            }
            if phase == Phase::Draws {
                self.steps[lane] += 1;
                self.accepted[lane] += u64::from(accept);
            } else if self.adapt {
                let rate = if patience == REFUSED {
                    0.0
                } else if rise >= 0.0 {
                    1.0
                } else if rise < 0.0 {
                    maths::exp(rise)
                } else {
                    0.0
                };
                self.scales[index * lanes + lane].update(rate, 0.44);
            }
        }
    }
}

const REFUSED: f64 = f64::NEG_INFINITY;

impl Kernel for IntegerWalk {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        self.trial.copy_from_slice(&walkers.position);
        for index in 0..self.on.len() {
            self.propose(index, walkers);
            target.log_density(&self.trial, &mut self.density);
            self.decide(index, walkers, phase);
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        for scale in self.scales.iter().skip(lane).step_by(self.patience.len()) {
            scale.save(&mut state.frozen);
        }
        state.moving.extend(self.steps[lane].to_le_bytes());
        state.moving.extend(self.accepted[lane].to_le_bytes());
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        let lanes = self.patience.len();
        for scale in self.scales.iter_mut().skip(lane).step_by(lanes) {
            scale.load(&mut state.frozen)?;
        }
        self.steps[lane] = state.moving.count()?;
        self.accepted[lane] = state.moving.count()?;
        Ok(())
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        if self.steps[lane] == 0 {
            return Vec::new();
        }
        let rate = self.accepted[lane] as f64 / self.steps[lane] as f64;
        vec![("acceptance rate".into(), rate)]
    }
}
