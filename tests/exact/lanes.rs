//! How many chains go in lockstep can't be seen in any digit, nor can a stop and a start in between.

use crate::chains::stream;
use crate::targets::{Classes, Correlated, Law, Lockstep, coordinates};
use odograph::course::{CoordinateKind, Phase, State};
use odograph::methods::{Adapt, Kernel, Move, Reader, Sampler, Settings, Step, Walkers};

/// All moves on a law with one integer coordinate and two real ones.
fn sampler(mixture: bool) -> Sampler {
    let settings = [
        (Settings::Conditional, vec![0]),
        (
            Settings::RandomWalk {
                scale: 1.0,
                adapt: Adapt::Covariance,
            },
            vec![1, 2],
        ),
        (
            Settings::Slice {
                width: 1.0,
                limit: 10,
            },
            vec![1, 2],
        ),
        (
            Settings::IntegerWalk {
                scale: 1.0,
                adapt: true,
            },
            vec![0],
        ),
    ];
    let step = |(number, (settings, coordinates)): (usize, (Settings, Vec<usize>))| Step {
        name: format!("step {number}"),
        on: coordinates.iter().map(|c| format!("x{c}")).collect(),
        weight: mixture.then_some(1.0 + number as f64),
        times: 1 + number as u64 % 2,
        moves: vec![Move {
            settings,
            coordinates,
        }],
    };
    Sampler {
        steps: settings.into_iter().enumerate().map(step).collect(),
        reasons: Vec::new(),
        coordinates: coordinates(&Mixed).into(),
    }
}

/// [`Classes`] with a coordinate more, correlated with its real one.
struct Mixed;

impl Law for Mixed {
    fn kinds(&self) -> Vec<CoordinateKind> {
        let mut kinds = Classes { gap: false }.kinds();
        kinds.push(CoordinateKind::Real);
        kinds
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        let y = [x[1] - x[0], x[2]];
        Classes { gap: false }.log_density(&x[..2]) + Correlated.log_density(&y) + 0.5 * y[0] * y[0]
    }
    fn draw(&self, _: &mut odograph::random::Stream) -> Vec<f64> {
        unreachable!("no exact draws of this law are needed")
    }
    fn uniforms(&self, _: &[f64], _: &mut odograph::random::Stream) -> Vec<f64> {
        unreachable!("no exact draws of this law are needed")
    }
}

const BURN_IN: usize = 700;
const DRAWS: usize = 300;

/// Some chains of the numbered eight, in lockstep.
struct Run {
    target: Lockstep<'static>,
    walkers: Walkers,
    kernel: Box<dyn Kernel>,
}

impl Run {
    fn new(chains: &[usize], mixture: bool) -> Run {
        let lanes = chains.len();
        let mut target = Lockstep::new(&Mixed, lanes);
        let start = |c: usize, chain: usize| [(chain % 4) as f64, chain as f64, -0.5][c];
        let position = (0..3 * lanes).map(|at| start(at / lanes, chains[at % lanes]));
        let streams = chains.iter().map(|&chain| stream(chain)).collect();
        let walkers = Walkers::new(&mut target, position.collect(), streams);
        let kernel = sampler(mixture).kernel(lanes);
        Run {
            target,
            walkers,
            kernel,
        }
    }

    fn go(&mut self, phase: Phase, steps: usize) {
        for _ in 0..steps {
            self.kernel.step(&mut self.target, &mut self.walkers, phase);
        }
    }

    fn save(&self, lane: usize) -> State {
        let mut state = State {
            frozen: Vec::new(),
            moving: Vec::new(),
        };
        self.walkers.save(lane, &mut state);
        self.kernel.save(lane, &mut state);
        state
    }

    fn load(&mut self, lane: usize, state: &State) -> Result<(), String> {
        let mut reader = Reader::new(state);
        self.walkers.load(lane, &mut reader)?;
        self.kernel.load(lane, &mut reader)?;
        reader.finish()
    }
}

/// The states of all eight chains at the end, run in groups.
fn end(groups: &[&[usize]], mixture: bool) -> Vec<State> {
    let mut states = Vec::new();
    for group in groups {
        let mut run = Run::new(group, mixture);
        run.go(Phase::BurnIn, BURN_IN);
        run.go(Phase::Draws, DRAWS);
        states.extend((0..group.len()).map(|lane| run.save(lane)));
    }
    states
}

#[test]
fn one_three_or_eight_lanes() {
    for mixture in [false, true] {
        let alone: Vec<[usize; 1]> = (0..8).map(|chain| [chain]).collect();
        let alone: Vec<&[usize]> = alone.iter().map(|group| group.as_slice()).collect();
        let together = end(&[&[0, 1, 2, 3, 4, 5, 6, 7]], mixture);
        assert_eq!(together, end(&alone, mixture));
        assert_eq!(together, end(&[&[0, 1, 2], &[3, 4, 5], &[6, 7]], mixture));
        assert_ne!(together[0], together[1]);
    }
}

#[test]
fn stopped_and_started() {
    for mixture in [false, true] {
        let straight = end(&[&[0, 1, 2]], mixture);
        for stop in [1, 333, BURN_IN, BURN_IN + 100] {
            let burnt = if stop < BURN_IN { stop } else { BURN_IN };
            let mut first = Run::new(&[0, 1, 2], mixture);
            first.go(Phase::BurnIn, burnt);
            first.go(Phase::Draws, stop - burnt);
            // The chains go on in another order, each from its own state.
            let mut second = Run::new(&[7, 7, 7], mixture);
            for lane in 0..3 {
                second
                    .load(2 - lane, &first.save(lane))
                    .expect("the state fits");
            }
            second.go(Phase::BurnIn, BURN_IN - burnt);
            second.go(Phase::Draws, BURN_IN + DRAWS - stop.max(BURN_IN));
            for (lane, state) in straight.iter().enumerate() {
                assert_eq!(&second.save(2 - lane), state, "stopped at {stop}");
            }
        }
    }
}

#[test]
fn nothing_frozen_changes_in_the_draws() {
    let mut run = Run::new(&[0, 1], false);
    run.go(Phase::BurnIn, BURN_IN);
    let before = run.save(0);
    run.go(Phase::Draws, DRAWS);
    let after = run.save(0);
    assert_eq!(before.frozen, after.frozen);
    assert_ne!(before.moving, after.moving);
}

#[test]
fn a_state_that_does_not_fit() {
    let mut run = Run::new(&[0, 1], false);
    let state = run.save(0);
    for part in 0..2 {
        let mut short = state.clone();
        let bytes = if part == 0 {
            &mut short.frozen
        } else {
            &mut short.moving
        };
        bytes.pop();
        assert!(run.load(1, &short).is_err());
        let mut long = state.clone();
        let bytes = if part == 0 {
            &mut long.frozen
        } else {
            &mut long.moving
        };
        bytes.push(0);
        assert!(run.load(1, &long).is_err());
    }
}
