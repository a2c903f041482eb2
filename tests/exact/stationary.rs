//! Every kernel leaves its target's law as it is.

use crate::chains::{Maker, Of, stationary};
use crate::rank::rank_chance;
use crate::targets::{Classes, Correlated, Counts, Law, LogGamma, Standard, TwoHumps, coordinates};
use odograph::course::Phase;
use odograph::methods::{
    Adapt, Conditional, Cycle, IntegerWalk, Kernel, Mixture, RandomWalk, Slice,
};

/// Seeds are fixed, so that a right kernel passes for ever; among the hundred chances looked at here one
/// below this would come up once in a hundred choices of seeds.
const LEAST: f64 = 1e-4;

fn check(what: &str, law: &dyn Law, maker: Maker, steps: usize) {
    for chance in stationary(law, maker, steps, 16_000) {
        assert!(chance > LEAST, "{what}: chance {chance}");
    }
}

fn check_ranks(what: &str, law: &dyn Law, maker: Maker) {
    let functions: [Of; 3] = [&|x| x[0], &|x| law.log_density(x), &|x| {
        (x[0] - 1.0) * (x[0] - 1.0)
    }];
    for of in functions {
        let chance = rank_chance(law, maker, 16_000, of);
        assert!(chance > LEAST, "{what}: chance {chance}");
    }
}

fn walk(n: usize, scale: f64, lanes: usize) -> Box<dyn Kernel> {
    Box::new(RandomWalk::new(
        (0..n).collect(),
        n,
        scale,
        Adapt::None,
        lanes,
    ))
}

/// A kernel after burn-in on the law, from places that the law's draws have nothing to do with.
fn burnt(mut kernel: Box<dyn Kernel>, law: &dyn Law, lanes: usize) -> Box<dyn Kernel> {
    let mut target = crate::targets::Lockstep::new(law, lanes);
    let mut walkers = crate::chains::exact_start(law, &mut target, lanes, 2_000_000_000);
    for _ in 0..150 {
        kernel.step(&mut target, &mut walkers, Phase::BurnIn);
    }
    kernel
}

#[test]
fn random_walk() {
    check("normal", &Standard(2), &|l| walk(2, 1.5, l), 5);
    check("two humps", &TwoHumps, &|l| walk(1, 2.0, l), 5);
    check(
        "log gamma",
        &LogGamma { jacobian: true },
        &|l| walk(1, 1.5, l),
        5,
    );
    check_ranks("two humps", &TwoHumps, &|l| walk(1, 2.0, l));
    check_ranks("correlated", &Correlated, &|l| walk(2, 1.0, l));
}

#[test]
fn random_walk_after_burn_in() {
    let maker = |lanes| {
        let kernel = RandomWalk::new(vec![0, 1], 2, 1.0, Adapt::Covariance, lanes);
        burnt(Box::new(kernel), &Correlated, lanes)
    };
    check("correlated", &Correlated, &maker, 5);
    check_ranks("correlated", &Correlated, &maker);
}

#[test]
fn slice() {
    let of = |n: usize, width, limit, lanes| -> Box<dyn Kernel> {
        Box::new(Slice::new((0..n).collect(), n, width, limit, lanes))
    };
    check("correlated", &Correlated, &|l| of(2, 1.0, 1000, l), 3);
    check("narrow", &TwoHumps, &|l| of(1, 0.3, 1000, l), 3);
    check("wide", &TwoHumps, &|l| of(1, 20.0, 1000, l), 3);
    check("limit 3", &TwoHumps, &|l| of(1, 0.5, 3, l), 3);
    check("limit 1", &TwoHumps, &|l| of(1, 2.0, 1, l), 3);
    check(
        "log gamma",
        &LogGamma { jacobian: true },
        &|l| of(1, 1.0, 1000, l),
        3,
    );
    check_ranks("limit 3", &TwoHumps, &|l| of(1, 0.5, 3, l));
    check_ranks("log gamma", &LogGamma { jacobian: true }, &|l| {
        of(1, 1.0, 8, l)
    });
    let maker = |l| burnt(of(2, 1.0, 1000, l), &Correlated, l);
    check("correlated after burn-in", &Correlated, &maker, 3);
}

fn classes(law: &dyn Law) -> (Option<i64>, Option<i64>) {
    match coordinates(law)[0].kind {
        odograph::course::CoordinateKind::Integer { lower, upper } => (lower, upper),
        odograph::course::CoordinateKind::Real => unreachable!(),
    }
}

#[test]
fn integers() {
    let counts = |scale, lanes| -> Box<dyn Kernel> {
        let bounds = vec![classes(&Counts)];
        Box::new(IntegerWalk::new(vec![0], bounds, 1, scale, true, lanes))
    };
    check("counts", &Counts, &|l| counts(1.0, l), 5);
    check("counts, long steps", &Counts, &|l| counts(6.0, l), 5);
    check(
        "counts after burn-in",
        &Counts,
        &|l| burnt(counts(1.0, l), &Counts, l),
        5,
    );
    check_ranks("counts", &Counts, &|l| counts(2.0, l));
    for gap in [false, true] {
        let law = Classes { gap };
        let (lower, upper) = classes(&law);
        let walk = |lanes| -> Box<dyn Kernel> {
            let bounds = vec![(lower, upper)];
            Box::new(IntegerWalk::new(vec![0], bounds, 2, 2.0, true, lanes))
        };
        let range = (lower.unwrap_or(0), upper.unwrap_or(0));
        let conditional = |lanes| -> Box<dyn Kernel> {
            Box::new(Conditional::new(vec![0], vec![range], 2, lanes))
        };
        check("classes by metropolis", &law, &walk, 4);
        check("classes by conditional", &law, &conditional, 2);
        check_ranks("classes by metropolis", &law, &walk);
        check_ranks("classes by conditional", &law, &conditional);
    }
}

fn parts(lanes: usize) -> Vec<(String, Box<dyn Kernel>)> {
    vec![
        (
            "class".into(),
            Box::new(Conditional::new(vec![0], vec![(0, 3)], 2, lanes)),
        ),
        (
            "near".into(),
            Box::new(Slice::new(vec![1], 2, 1.0, 1000, lanes)),
        ),
        (
            "far".into(),
            Box::new(RandomWalk::new(vec![1], 2, 2.0, Adapt::Scale, lanes)),
        ),
    ]
}

#[test]
fn cycles_and_mixtures() {
    let law = Classes { gap: false };
    check("cycle", &law, &|l| Box::new(Cycle::new(parts(l))), 3);
    let mixture = |lanes| -> Box<dyn Kernel> {
        Box::new(Mixture::new(parts(lanes), vec![1.0, 2.0, 3.0], lanes))
    };
    check("mixture", &law, &mixture, 6);
    check_ranks("mixture", &law, &mixture);
}
