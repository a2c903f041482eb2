//! A sampler, resolved: which method moves which coordinates, with every setting said.

use super::combine::{Cycle, Mixture, Repeat};
use super::conditional::Conditional;
use super::integer_walk::IntegerWalk;
use super::kernel::Kernel;
use super::random_walk::{Adapt, RandomWalk};
use super::slice::Slice;
use crate::canon::Json;
use crate::course::{Coordinate, CoordinateKind};
use std::sync::Arc;

/// A method with its settings, for coordinates of one kind.
#[derive(Debug, Clone, PartialEq)]
pub enum Settings {
    /// Random-walk Metropolis on real coordinates together.
    RandomWalk { scale: f64, adapt: Adapt },
    /// Slice sampling of real coordinates one by one.
    Slice { width: f64, limit: u64 },
    /// Integer coordinates one by one, from their full conditional.
    Conditional,
    /// Integer coordinates one by one, by Metropolis.
    IntegerWalk { scale: f64, adapt: bool },
}

/// One method on some coordinates.
#[derive(Debug, Clone, PartialEq)]
pub struct Move {
    pub settings: Settings,
    /// Indices into the target's coordinates, rising.
    pub coordinates: Vec<usize>,
}

/// One entry of the cycle or mixture: its moves are made one after the other.
#[derive(Debug, Clone, PartialEq)]
pub struct Step {
    pub name: String,
    /// The unknowns moved, in the target's order.
    pub on: Vec<String>,
    /// Relative chance in a mixture; `None` in a cycle.
    pub weight: Option<f64>,
    /// How often the moves are made for one draw.
    pub times: u64,
    pub moves: Vec<Move>,
}

/// The sampler of a study, resolved.
#[derive(Debug, Clone, PartialEq)]
pub struct Sampler {
    pub steps: Vec<Step>,
    /// Sentences about what was chosen for the reader.
    pub reasons: Vec<String>,
    pub coordinates: Arc<[Coordinate]>,
}

impl Sampler {
    /// The kernel that makes one draw's step, for so many lanes.
    pub fn kernel(&self, lanes: usize) -> Box<dyn Kernel> {
        let parts: Vec<(String, Box<dyn Kernel>)> = self
            .steps
            .iter()
            .map(|step| (step.name.clone(), self.step_kernel(step, lanes)))
            .collect();
        let weights: Option<Vec<f64>> = self.steps.iter().map(|step| step.weight).collect();
        match weights {
            Some(weights) => Box::new(Mixture::new(parts, weights, lanes)),
            None => one_or_cycle(parts),
        }
    }

    fn step_kernel(&self, step: &Step, lanes: usize) -> Box<dyn Kernel> {
        let build = |part: &Move| (part.settings.method().to_string(), self.build(part, lanes));
        let once = one_or_cycle(step.moves.iter().map(build).collect());
        if step.times == 1 {
            once
        } else {
            Box::new(Repeat::new(once, step.times))
        }
    }

    fn build(&self, part: &Move, lanes: usize) -> Box<dyn Kernel> {
        let dimension = self.coordinates.len();
        let on = part.coordinates.clone();
        match part.settings {
            Settings::RandomWalk { scale, adapt } => {
                Box::new(RandomWalk::new(on, dimension, scale, adapt, lanes))
            }
            Settings::Slice { width, limit } => {
                Box::new(Slice::new(on, dimension, width, limit, lanes))
            }
            Settings::Conditional => {
                let ranges = on.iter().map(|&c| self.finite(c)).collect();
                Box::new(Conditional::new(on, ranges, dimension, lanes))
            }
            Settings::IntegerWalk { scale, adapt } => {
                let bounds = on.iter().map(|&c| self.bounds(c)).collect();
                Box::new(IntegerWalk::new(on, bounds, dimension, scale, adapt, lanes))
            }
        }
    }

    fn bounds(&self, coordinate: usize) -> (Option<i64>, Option<i64>) {
        match self.coordinates[coordinate].kind {
            CoordinateKind::Integer { lower, upper } => (lower, upper),
            CoordinateKind::Real => (None, None),
        }
    }

    fn finite(&self, coordinate: usize) -> (i64, i64) {
        match self.bounds(coordinate) {
            (Some(lower), Some(upper)) => (lower, upper),
            _ => unreachable!("the reader gives finite ranges only to `conditional`"),
        }
    }

    /// About how many evaluations of the log density a draw takes; from the plan alone.
    pub fn evaluations(&self) -> f64 {
        let total: f64 = self.steps.iter().filter_map(|step| step.weight).sum();
        self.steps
            .iter()
            .map(|step| {
                let share = step.weight.map_or(1.0, |w| w / total) * step.times as f64;
                share
                    * step
                        .moves
                        .iter()
                        .map(|m| self.move_evaluations(m))
                        .sum::<f64>()
            })
            .sum()
    }

    fn move_evaluations(&self, part: &Move) -> f64 {
        let count = part.coordinates.len() as f64;
        match part.settings {
            Settings::RandomWalk { .. } => 1.0,
            // Stepping out with a well-chosen width: about two ends, a step more, and two shrinkages.
            Settings::Slice { .. } => 5.5 * count,
            Settings::IntegerWalk { .. } => count,
            Settings::Conditional => part
                .coordinates
                .iter()
                .map(|&c| {
                    let (lower, upper) = self.finite(c);
                    (upper - lower) as f64
                })
                .sum(),
        }
    }

    /// Bytes that the kernels add to a chain's saved state, about.
    pub fn state_size(&self) -> usize {
        let of = |part: &Move| {
            let n = part.coordinates.len();
            match part.settings {
                Settings::RandomWalk {
                    adapt: Adapt::Covariance,
                    ..
                } => 64 + 8 * n * (n + 3),
                Settings::RandomWalk { .. } | Settings::Conditional => 48,
                Settings::Slice { .. } | Settings::IntegerWalk { .. } => 16 + 24 * n,
            }
        };
        self.steps.iter().flat_map(|step| &step.moves).map(of).sum()
    }

    /// Every setting said, for the part of the plan under the stream key.
    pub fn canonical(&self) -> Json {
        let steps = self.steps.iter().map(|step| {
            let moves = step.moves.iter().map(|part| {
                let on = part.coordinates.iter();
                let mut members = vec![
                    ("method", Json::text(part.settings.method())),
                    (
                        "coordinates",
                        Json::array(on.map(|&c| Json::text(self.coordinates[c].name.clone()))),
                    ),
                ];
                members.extend(part.settings.canonical());
                Json::object(members)
            });
            let mut members = vec![
                ("name", Json::text(step.name.clone())),
                ("on", Json::array(step.on.iter().map(Json::text))),
                ("moves", Json::array(moves)),
                ("times", Json::Count(step.times)),
            ];
            if let Some(weight) = step.weight {
                members.push(("weight", Json::real(weight)));
            }
            Json::object(members)
        });
        let mixture = self.steps.iter().any(|step| step.weight.is_some());
        Json::object([
            (
                "combine",
                Json::text(if mixture { "mixture" } else { "cycle" }),
            ),
            ("steps", Json::array(steps)),
        ])
    }
}

fn one_or_cycle(mut parts: Vec<(String, Box<dyn Kernel>)>) -> Box<dyn Kernel> {
    if parts.len() == 1 {
        parts.remove(0).1
    } else {
        Box::new(Cycle::new(parts))
    }
}

impl Settings {
    /// The name in the study file.
    pub fn method(&self) -> &'static str {
        match self {
            Settings::RandomWalk { .. } | Settings::IntegerWalk { .. } => "metropolis",
            Settings::Slice { .. } => "slice",
            Settings::Conditional => "conditional",
        }
    }

    fn canonical(&self) -> Vec<(&'static str, Json)> {
        match *self {
            Settings::RandomWalk { scale, adapt } => vec![
                ("scale", Json::real(scale)),
                ("adapt", Json::text(adapt.name())),
            ],
            Settings::Slice { width, limit } => {
                vec![("width", Json::real(width)), ("limit", Json::Count(limit))]
            }
            Settings::Conditional => vec![],
            Settings::IntegerWalk { scale, adapt } => vec![
                ("scale", Json::real(scale)),
                ("adapt", Json::text(if adapt { "scale" } else { "none" })),
            ],
        }
    }
}
