//! Random-walk Metropolis on real coordinates (Metropolis et al. 1953): `x + s L z`, `z` standard normal.
//!
//! In burn-in the scale `s` goes by Robbins-Monro (Andrieu & Thoms 2008) to the acceptance rate that is
//! best for normal targets (Gelman, Roberts & Gilks 1996; Roberts, Gelman & Gilks 1997), and `L` is the
//! Cholesky factor of a running covariance (Haario, Saksman & Tamminen 2001); each chain by its own past.

use super::covariance::RunningCovariance;
use super::declaration::{Choice, Method, TIMES};
use super::gain::AdaptiveScale;
use super::kernel::Kernel;
use super::lockstep::{Trial, add_steps, decide};
use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};
use crate::{maths, random};

pub const DECLARATION: Method = Method {
    name: "metropolis",
    about: "A random walk: normal steps of all continuous unknowns together, whole steps of each integer unknown.",
    limits: "Slow in many dimensions (about three steps a dimension for an independent draw at best) and \
             where the scale of the target changes from place to place.",
    reference: "Metropolis et al. 1953; Haario, Saksman & Tamminen 2001; Andrieu & Thoms 2008.",
    real: true,
    integer: true,
    options: &[
        Choice {
            name: "scale",
            meaning: "first size of the steps, on the unconstrained scale",
            default: "2.38 over the root of the number of continuous coordinates; 1 for integers",
        },
        Choice {
            name: "adapt",
            meaning: "what burn-in adapts: \"covariance\" (scale and shape), \"scale\" or \"none\"",
            default: "\"covariance\"",
        },
        TIMES,
    ],
};

/// What burn-in may change.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Adapt {
    /// Scale and shape of the steps.
    Covariance,
    /// Their scale.
    Scale,
    None,
}

impl Adapt {
    pub const NAMES: [&str; 3] = ["covariance", "scale", "none"];

    pub fn name(self) -> &'static str {
        match self {
            Adapt::Covariance => "covariance",
            Adapt::Scale => "scale",
            Adapt::None => "none",
        }
    }

    pub fn named(name: &str) -> Option<Adapt> {
        [Adapt::Covariance, Adapt::Scale, Adapt::None]
            .into_iter()
            .find(|adapt| adapt.name() == name)
    }
}

/// See the head of this file.
pub struct RandomWalk {
    on: Vec<usize>,
    adapt: Adapt,
    wanted: f64,
    scales: Vec<AdaptiveScale>,
    shape: Option<RunningCovariance>,
    /// Steps and acceptances of each lane in the draws.
    steps: Vec<u64>,
    accepted: Vec<u64>,
    /// `z`, then `s z`, coordinate by coordinate, lanes fastest.
    normals: Vec<f64>,
    /// Minus the logarithm of the uniform number of the acceptance test.
    patience: Vec<f64>,
    proposal: Vec<f64>,
    density: Vec<f64>,
}

impl RandomWalk {
    /// Moves the coordinates `on` of a target of so many dimensions; `scale` is the first step size.
    pub fn new(on: Vec<usize>, dimension: usize, scale: f64, adapt: Adapt, lanes: usize) -> Self {
        RandomWalk {
            adapt,
            wanted: best_rate(on.len()),
            scales: vec![AdaptiveScale::new(scale); lanes],
            shape: (adapt == Adapt::Covariance && on.len() > 1)
                .then(|| RunningCovariance::new(on.len(), lanes)),
            steps: vec![0; lanes],
            accepted: vec![0; lanes],
            normals: vec![0.0; on.len() * lanes],
            patience: vec![0.0; lanes],
            proposal: vec![0.0; dimension * lanes],
            density: vec![0.0; lanes],
            on,
        }
    }

    /// Normal numbers for the active lanes, 0 for the others, and the patience of each acceptance test.
    fn draw(&mut self, walkers: &mut Walkers) {
        if !walkers.active.contains(&false) {
            random::normals(&mut walkers.streams, &mut self.normals);
            random::exponentials(&mut walkers.streams, &mut self.patience);
            return;
        }
        let lanes = walkers.lanes;
        for (lane, stream) in walkers.streams.iter_mut().enumerate() {
            let normals = self.normals.iter_mut().skip(lane).step_by(lanes);
            if walkers.active[lane] {
                normals.for_each(|z| *z = random::normal(stream));
                self.patience[lane] = random::exponential(stream);
            } else {
                normals.for_each(|z| *z = 0.0);
            }
        }
    }

    /// Adapts each active lane by its own step; `density` holds the rises.
    fn learn(&mut self, walkers: &Walkers) {
        let lanes = walkers.lanes;
        if let Some(shape) = &mut self.shape {
            shape.add(&self.on, &walkers.position, &walkers.active);
        }
        for lane in (0..lanes).filter(|&lane| walkers.active[lane]) {
            let rise = self.density[lane];
            // A NaN can only come of two infinite densities: such a step was refused.
            let rate = if rise >= 0.0 {
                1.0
            } else if rise < 0.0 {
                maths::exp(rise)
            } else {
                0.0
            };
            self.scales[lane].update(rate, self.wanted);
            if let Some(shape) = &mut self.shape {
                shape.refresh(lane, &mut self.scales[lane]);
            }
        }
    }
}

impl Kernel for RandomWalk {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        self.draw(walkers);
        if self.on.len() * walkers.lanes < self.proposal.len() {
            self.proposal.copy_from_slice(&walkers.position);
        }
        let factor = self.shape.as_ref().map(RunningCovariance::factor);
        add_steps(
            &self.on,
            factor,
            &self.scales,
            &mut self.normals,
            &walkers.position,
            &mut self.proposal,
        );
        target.log_density(&self.proposal, &mut self.density);
        decide(Trial {
            on: &self.on,
            active: &walkers.active,
            patience: &self.patience,
            proposal: &self.proposal,
            density: &mut self.density,
            position: &mut walkers.position,
            log_density: &mut walkers.log_density,
            counts: u64::from(phase == Phase::Draws),
            steps: &mut self.steps,
            accepted: &mut self.accepted,
        });
        if phase == Phase::BurnIn && self.adapt != Adapt::None {
            self.learn(walkers);
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        self.scales[lane].save(&mut state.frozen);
        if let Some(shape) = &self.shape {
            shape.save(lane, &mut state.frozen);
        }
        state.moving.extend(self.steps[lane].to_le_bytes());
        state.moving.extend(self.accepted[lane].to_le_bytes());
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.scales[lane].load(&mut state.frozen)?;
        if let Some(shape) = &mut self.shape {
            shape.load(lane, &mut state.frozen)?;
        }
        self.steps[lane] = state.moving.count()?;
        self.accepted[lane] = state.moving.count()?;
        Ok(())
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        let mut notes = Vec::new();
        if self.steps[lane] > 0 {
            let rate = self.accepted[lane] as f64 / self.steps[lane] as f64;
            notes.push(("acceptance rate".into(), rate));
        }
        notes.push(("scale".into(), self.scales[lane].value()));
        notes
    }
}

/// The acceptance rate at the best step `2.38 / sqrt(n)` on a normal target: 0.44 in one dimension, 0.234
/// in many (Gelman, Roberts & Gilks 1996). The formula follows the exact rates within 0.004.
fn best_rate(n: usize) -> f64 {
    0.234 + 0.28 / (n as f64 + 0.34)
}
