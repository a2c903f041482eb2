//! Slice sampling of real coordinates one after the other, with stepping out and shrinkage (Neal 2003,
//! figures 3 and 5). The number of widths stepped over is bounded, and the bound split at random between
//! the two sides, which keeps it exact. Widths adapt in burn-in only, by coordinate and chain, until as many
//! evaluations are spent on stepping out as on shrinking (Tibbits, Groendyke, Haran & Liechty 2014).
//!
//! Lanes go through the coordinates each at its own pace; all are evaluated together until the last is done.

use super::declaration::{Choice, Method, TIMES};
use super::gain::AdaptiveScale;
use super::kernel::Kernel;
use super::saved::Reader;
use super::walkers::Walkers;
use crate::course::{Phase, State, Target};
use crate::random;

pub const DECLARATION: Method = Method {
    name: "slice",
    about: "Draws continuous unknowns one after the other, uniformly from where the density exceeds a random level.",
    limits: "Slow where unknowns are strongly correlated; takes about six evaluations a coordinate.",
    reference: "Neal 2003.",
    real: true,
    integer: false,
    options: &[
        Choice {
            name: "width",
            meaning: "first width of the interval, on the unconstrained scale; burn-in adapts it",
            default: "1",
        },
        Choice {
            name: "limit",
            meaning: "most widths that an interval may grow to",
            default: "1000",
        },
        TIMES,
    ],
};

pub const DEFAULT_WIDTH: f64 = 1.0;
pub const DEFAULT_LIMIT: u64 = 1000;

/// See the head of this file.
pub struct Slice {
    on: Vec<usize>,
    limit: u64,
    /// Widths: coordinate `i` of `on`, lane `l` at `i * lanes + l`.
    widths: Vec<AdaptiveScale>,
    sweeps: Vec<u64>,
    evaluations: Vec<u64>,
    lanes: Vec<Lane>,
    /// Where each lane is evaluated next; elsewhere than at `lanes[l]`'s coordinate it is the position.
    trial: Vec<f64>,
    density: Vec<f64>,
}

/// Where one chain stands in its sweep.
#[derive(Debug, Clone, Copy)]
struct Lane {
    /// Index into `on`; its length when the lane is done.
    coordinate: usize,
    stage: Stage,
    /// Log density that the slice lies above.
    level: f64,
    here: f64,
    left: f64,
    right: f64,
    /// Steps still allowed on each side.
    left_steps: u64,
    right_steps: u64,
    /// Evaluations spent on growing and on shrinking the interval.
    grown: u64,
    shrunk: u64,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Stage {
    Left,
    Right,
    Shrink,
}

const DONE: Lane = Lane {
    coordinate: usize::MAX,
    stage: Stage::Shrink,
    level: 0.0,
    here: 0.0,
    left: 0.0,
    right: 0.0,
    left_steps: 0,
    right_steps: 0,
    grown: 0,
    shrunk: 0,
};

impl Slice {
    /// Moves the coordinates `on` of a target of so many dimensions. `width` is the first width of each
    /// interval, `limit` the most widths that stepping out may span.
    pub fn new(on: Vec<usize>, dimension: usize, width: f64, limit: u64, lanes: usize) -> Slice {
        Slice {
            limit,
            widths: vec![AdaptiveScale::new(width); on.len() * lanes],
            sweeps: vec![0; lanes],
            evaluations: vec![0; lanes],
            lanes: vec![DONE; lanes],
            trial: vec![0.0; dimension * lanes],
            density: vec![0.0; lanes],
            on,
        }
    }

    /// Begins a lane's next coordinate, if there is one: level, first interval, split of the limit.
    fn begin(&mut self, lane: usize, coordinate: usize, walkers: &mut Walkers) {
        self.lanes[lane] = Lane { coordinate, ..DONE };
        if coordinate == self.on.len() {
            return;
        }
        let width = self.widths[coordinate * walkers.lanes + lane].value();
        let here = walkers.position[self.on[coordinate] * walkers.lanes + lane];
        let stream = &mut walkers.streams[lane];
        let level = walkers.log_density[lane] - random::exponential(stream);
        let left = here - width * stream.unit();
        let left_steps = random::index(stream, self.limit);
        self.lanes[lane] = Lane {
            coordinate,
            stage: Stage::Left,
            level,
            here,
            left,
            right: left + width,
            left_steps,
            right_steps: self.limit - 1 - left_steps,
            grown: 0,
            shrunk: 0,
        };
        self.ask(lane, walkers);
    }

    /// Sets the point at which a lane must be evaluated next.
    fn ask(&mut self, lane: usize, walkers: &mut Walkers) {
        let at = &mut self.lanes[lane];
        if at.stage == Stage::Left && at.left_steps == 0 {
            at.stage = Stage::Right;
        }
        if at.stage == Stage::Right && at.right_steps == 0 {
            at.stage = Stage::Shrink;
        }
        self.trial[self.on[at.coordinate] * walkers.lanes + lane] = match at.stage {
            Stage::Left => at.left,
            Stage::Right => at.right,
            Stage::Shrink => at.left + walkers.streams[lane].unit() * (at.right - at.left),
        };
    }

    /// Takes the log density at a lane's trial.
    fn answer(&mut self, lane: usize, walkers: &mut Walkers, phase: Phase) {
        let density = self.density[lane];
        let at = &mut self.lanes[lane];
        let width = self.widths[at.coordinate * walkers.lanes + lane].value();
        let inside = density > at.level;
        match at.stage {
            Stage::Left if inside => {
                at.left -= width;
                at.left_steps -= 1;
                at.grown += 1;
            }
            Stage::Left => at.stage = Stage::Right,
            Stage::Right if inside => {
                at.right += width;
                at.right_steps -= 1;
                at.grown += 1;
            }
            Stage::Right => at.stage = Stage::Shrink,
            Stage::Shrink => {
                let row = self.on[at.coordinate] * walkers.lanes + lane;
                let trial = self.trial[row];
                // An interval shrunk onto the point itself ends there, however the level was rounded.
                if inside || trial == at.here {
                    walkers.position[row] = trial;
                    walkers.log_density[lane] = density;
                    return self.end(lane, walkers, phase);
                }
                at.shrunk += 1;
                if trial < at.here {
                    at.left = trial;
                } else {
                    at.right = trial;
                }
                // Far out a width can be lost beside the point itself, and rounding leave an interval without
                // it; one that overflowed never shrinks. The chain stays where it is.
                let span = at.right - at.left;
                if !(span > 0.0 && span.is_finite()) {
                    walkers.position[row] = at.here;
                    return self.end(lane, walkers, phase);
                }
            }
        }
        self.ask(lane, walkers);
    }

    /// Ends a lane's coordinate and begins its next.
    fn end(&mut self, lane: usize, walkers: &mut Walkers, phase: Phase) {
        let Lane {
            coordinate,
            grown,
            shrunk,
            ..
        } = self.lanes[lane];
        if phase == Phase::BurnIn && grown + shrunk > 0 {
            let share = grown as f64 / (grown + shrunk) as f64;
            self.widths[coordinate * walkers.lanes + lane].update(share, 0.5);
        }
        self.begin(lane, coordinate + 1, walkers);
    }
}

impl Kernel for Slice {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, phase: Phase) {
        self.trial.copy_from_slice(&walkers.position);
        let mut going = 0;
        for lane in 0..walkers.lanes {
            let first = if walkers.active[lane] {
                0
            } else {
                self.on.len()
            };
            self.begin(lane, first, walkers);
            going += usize::from(walkers.active[lane]);
            if phase == Phase::Draws {
                self.sweeps[lane] += u64::from(walkers.active[lane]);
            }
        }
        while going > 0 {
            target.log_density(&self.trial, &mut self.density);
            going = 0;
            for lane in 0..walkers.lanes {
                if self.lanes[lane].coordinate < self.on.len() {
                    if phase == Phase::Draws {
                        self.evaluations[lane] += 1;
                    }
                    self.answer(lane, walkers, phase);
                    going += usize::from(self.lanes[lane].coordinate < self.on.len());
                }
            }
        }
    }

    fn save(&self, lane: usize, state: &mut State) {
        let lanes = self.lanes.len();
        for width in self.widths.iter().skip(lane).step_by(lanes) {
            width.save(&mut state.frozen);
        }
        state.moving.extend(self.sweeps[lane].to_le_bytes());
        state.moving.extend(self.evaluations[lane].to_le_bytes());
    }

    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        let lanes = self.lanes.len();
        for width in self.widths.iter_mut().skip(lane).step_by(lanes) {
            width.load(&mut state.frozen)?;
        }
        self.sweeps[lane] = state.moving.count()?;
        self.evaluations[lane] = state.moving.count()?;
        Ok(())
    }

    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        if self.sweeps[lane] == 0 {
            return Vec::new();
        }
        let updates = self.sweeps[lane] as f64 * self.on.len() as f64;
        let rate = self.evaluations[lane] as f64 / updates;
        vec![("evaluations a coordinate".into(), rate)]
    }
}
