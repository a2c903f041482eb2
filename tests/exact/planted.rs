//! Faults planted on purpose, which the tests of the stationary law must catch.

use crate::chains::{LANES, Maker, exact_start, point, stationary, stream};
use crate::rank::rank_chance;
use crate::targets::{Counts, Law, Lockstep, LogGamma, Standard, TwoHumps, normal};
use odograph::course::{Phase, State, Target};
use odograph::maths;
use odograph::methods::{Adapt, IntegerWalk, Kernel, RandomWalk, Reader, Slice, Walkers};

/// A caught fault is far beyond any choice of seeds.
const CAUGHT: f64 = 1e-9;

/// Metropolis on one coordinate of a chain, with its acceptance rule and its step left open.
struct Open {
    step: fn(f64, f64) -> f64,
    /// Accepts a rise in log density from a place to another with a standard exponential.
    accepts: fn(rise: f64, from: f64, to: f64, exponential: f64) -> bool,
}

impl Kernel for Open {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, _: Phase) {
        let before = walkers.position.clone();
        let after: Vec<f64> = before
            .iter()
            .zip(&mut walkers.streams)
            .map(|(&x, stream)| (self.step)(x, normal(stream)))
            .collect();
        let mut density = vec![0.0; walkers.lanes];
        target.log_density(&after, &mut density);
        for lane in 0..walkers.lanes {
            let rise = density[lane] - walkers.log_density[lane];
            let exponential = -maths::ln(walkers.streams[lane].open());
            if (self.accepts)(rise, before[lane], after[lane], exponential) {
                walkers.position[lane] = after[lane];
                walkers.log_density[lane] = density[lane];
            }
        }
    }
    fn save(&self, _: usize, _: &mut State) {}
    fn load(&mut self, _: usize, _: &mut Reader) -> Result<(), String> {
        Ok(())
    }
    fn notes(&self, _: usize) -> Vec<(String, f64)> {
        Vec::new()
    }
}

fn both(law: &dyn Law, maker: &dyn Fn(usize) -> Box<dyn Kernel>) -> (f64, f64) {
    let law_chance = stationary(law, maker, 5, 16_000)[0];
    (law_chance, rank_chance(law, maker, 16_000, &|x| x[0]))
}

#[test]
fn a_wrong_acceptance_ratio() {
    // Steps of size 1 + |x| / 2 need the ratio of their densities in the acceptance.
    fn step(x: f64, z: f64) -> f64 {
        x + (1.0 + 0.5 * x.abs()) * z
    }
    fn log_step(from: f64, to: f64) -> f64 {
        let sd = 1.0 + 0.5 * from.abs();
        -0.5 * ((to - from) / sd) * ((to - from) / sd) - maths::ln(sd)
    }
    let right = |_| -> Box<dyn Kernel> {
        Box::new(Open {
            step,
            accepts: |rise, from, to, e| rise + log_step(to, from) - log_step(from, to) > -e,
        })
    };
    let wrong = |_| -> Box<dyn Kernel> {
        Box::new(Open {
            step,
            accepts: |rise, _, _, e| rise > -e,
        })
    };
    let (law, rank) = both(&TwoHumps, &right);
    assert!(law > 1e-3 && rank > 1e-3, "right: {law} {rank}");
    let (law, rank) = both(&TwoHumps, &wrong);
    assert!(law < CAUGHT && rank < CAUGHT, "wrong: {law} {rank}");
}

#[test]
fn a_missing_jacobian() {
    let makers: [&dyn Fn(usize) -> Box<dyn Kernel>; 2] = [
        &|lanes| Box::new(RandomWalk::new(vec![0], 1, 1.5, Adapt::None, lanes)),
        &|lanes| Box::new(Slice::new(vec![0], 1, 1.0, 1000, lanes)),
    ];
    for maker in makers {
        let (law, rank) = both(&LogGamma { jacobian: true }, maker);
        assert!(law > 1e-3 && rank > 1e-3, "right: {law} {rank}");
        let (law, rank) = both(&LogGamma { jacobian: false }, maker);
        assert!(law < CAUGHT && rank < CAUGHT, "wrong: {law} {rank}");
    }
}

/// A kernel that goes on adapting, whatever the phase.
struct Restless(Box<dyn Kernel>);

impl Kernel for Restless {
    fn step(&mut self, target: &mut dyn Target, walkers: &mut Walkers, _: Phase) {
        self.0.step(target, walkers, Phase::BurnIn);
    }
    fn save(&self, lane: usize, state: &mut State) {
        self.0.save(lane, state);
    }
    fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        self.0.load(lane, state)
    }
    fn notes(&self, lane: usize) -> Vec<(String, f64)> {
        self.0.notes(lane)
    }
}

#[test]
fn adaptation_after_burn_in() {
    let walk = |lanes| -> Box<dyn Kernel> {
        Box::new(RandomWalk::new(vec![0], 1, 1.0, Adapt::Scale, lanes))
    };
    let slice = |lanes| -> Box<dyn Kernel> { Box::new(Slice::new(vec![0], 1, 0.3, 4, lanes)) };
    let counts = |lanes| -> Box<dyn Kernel> {
        let bounds = vec![(Some(0), None)];
        Box::new(IntegerWalk::new(vec![0], bounds, 1, 1.0, true, lanes))
    };
    let cases: [(&str, &dyn Law, Maker); 3] = [
        ("walk", &TwoHumps, &walk),
        ("slice", &TwoHumps, &slice),
        ("counts", &Counts, &counts),
    ];
    for (name, law, maker) in cases {
        let restless = |lanes| -> Box<dyn Kernel> { Box::new(Restless(maker(lanes))) };
        let chances = |maker| {
            let law_chance = stationary(law, maker, 5, 64_000)[0];
            (law_chance, rank_chance(law, maker, 64_000, &|x| x[0]))
        };
        let (still, still_rank) = chances(maker);
        assert!(
            still > 1e-3 && still_rank > 1e-3,
            "{name}: {still} {still_rank}"
        );
        let (chance, rank) = chances(&restless);
        assert!(chance < CAUGHT || rank < CAUGHT, "{name}: {chance} {rank}");
        // What is frozen does not change, and in the restless kernel does.
        assert!(frozen_holds(law, maker), "{name}");
        assert!(!frozen_holds(law, &restless), "{name}");
    }
}

/// Whether the frozen bytes stay as they are through draws that follow a burn-in.
fn frozen_holds(law: &dyn Law, maker: &dyn Fn(usize) -> Box<dyn Kernel>) -> bool {
    let mut target = Lockstep::new(law, LANES);
    let mut walkers = exact_start(law, &mut target, LANES, 0);
    let mut kernel = maker(LANES);
    for _ in 0..100 {
        kernel.step(&mut target, &mut walkers, Phase::BurnIn);
    }
    let frozen = |kernel: &dyn Kernel| {
        let mut states = Vec::new();
        for lane in 0..LANES {
            let mut state = State {
                frozen: Vec::new(),
                moving: Vec::new(),
            };
            kernel.save(lane, &mut state);
            states.push(state.frozen);
        }
        states
    };
    let before = frozen(kernel.as_ref());
    for _ in 0..100 {
        kernel.step(&mut target, &mut walkers, Phase::Draws);
    }
    before == frozen(kernel.as_ref())
}

/// The standard normal deviate of the correlation between the two chains of each of many pairs, started at
/// independent exact draws.
fn correlation_deviate(one_stream: bool) -> f64 {
    let law = Standard(1);
    let pairs = 4000;
    let mut products = 0.0;
    for first in (0..2 * pairs).step_by(LANES) {
        let mut target = Lockstep::new(&law, LANES);
        let mut walkers = exact_start(&law, &mut target, LANES, first);
        if one_stream {
            for lane in (0..LANES).step_by(2) {
                walkers.streams[lane + 1] = walkers.streams[lane].clone();
            }
        }
        let mut kernel = RandomWalk::new(vec![0], 1, 2.4, Adapt::None, LANES);
        for _ in 0..5 {
            kernel.step(&mut target, &mut walkers, Phase::Draws);
        }
        for lane in (0..LANES).step_by(2) {
            products += point(&walkers, lane)[0] * point(&walkers, lane + 1)[0];
        }
    }
    products / (pairs as f64).sqrt()
}

#[test]
fn two_chains_on_one_stream() {
    let apart = correlation_deviate(false);
    assert!(apart.abs() < 4.0, "own streams: {apart}");
    let together = correlation_deviate(true);
    assert!(together > 8.0, "one stream: {together}");
    assert!(stream(1) != stream(2));
}
