//! What must hold between the functions of a law, truncated or not.

use super::cases::cases;
use super::integral::integral;
use crate::laws::{At, Law, table};
use crate::maths;
use crate::random::trial::{LIMIT, RARE, chi_square, distance, numbers};

/// Probabilities to invert at.
const LEVELS: [f64; 13] = [
    1e-10, 1e-5, 1e-3, 0.02, 0.1, 0.25, 0.499, 0.5, 0.501, 0.75, 0.9, 0.98, 0.999,
];

type Finding = Result<(), String>;

fn near(what: &str, at: f64, found: f64, expected: f64, relative: f64) -> Finding {
    // Below 1e-300 doubles lose their digits.
    let close = (found - expected).abs() <= relative * expected.abs() + 1e-300;
    if close || found == expected {
        return Ok(());
    }
    Err(format!("{what} at {at}: {found:e}, expected {expected:e}"))
}

/// How a law is to be put to the test.
#[derive(Clone, Copy)]
pub struct Trial {
    pub integer: bool,
    /// Cut to an interval: distribution and quantile come from logarithms by different ways, and agree to
    /// 1e-12 only.
    pub cut: bool,
    pub draws: usize,
}

/// All that a law at given parameters must satisfy.
pub fn whole(at: At, trial: Trial) -> Finding {
    if trial.integer {
        sums(at)?;
        integer_quantiles(at, trial)?;
    } else {
        integrates(at)?;
        quantiles(at, trial)?;
    }
    forms(at, trial)?;
    between(at)?;
    draws(at, trial)
}

fn some(value: Option<f64>) -> f64 {
    value.unwrap_or(f64::NAN)
}

/// The integral of the density between neighbouring quantiles is the difference of the distribution
/// function, and of the survival function. Pieces double from the ends on, since tails may be long.
fn integrates(at: At) -> Finding {
    let density = |x: f64| maths::exp(at.log_density(x));
    let doubling = std::iter::successors(Some(1e-6), |level| Some(2.0 * level));
    let tail: Vec<f64> = doubling.take_while(|&level| level < 0.02).collect();
    let lower = tail.iter().map(|&level| at.quantile(level));
    let middle = (1..50).map(|step| at.quantile(0.02 * f64::from(step)));
    let upper = tail.iter().rev().map(|&level| at.upper_quantile(level));
    let points: Vec<f64> = lower.chain(middle).chain(upper).map(some).collect();
    let mut total = 2e-6;
    for pair in points.windows(2) {
        let [start, end] = [pair[0], pair[1]];
        let mass = integral(&density, start, end, 0.01);
        let exact = some(at.distribution(end)) - some(at.distribution(start));
        if !((mass - exact).abs() <= 1e-10) {
            return Err(format!(
                "mass of [{start:e}, {end:e}]: {mass}, by distribution {exact}"
            ));
        }
        let exact = some(at.survival(start)) - some(at.survival(end));
        if !((mass - exact).abs() <= 1e-10) {
            return Err(format!(
                "mass of [{start:e}, {end:e}]: {mass}, by survival {exact}"
            ));
        }
        total += mass;
    }
    near("the whole mass", f64::NAN, total, 1.0, 1e-9)
}

/// The probabilities add up to the distribution function, and to 1.
fn sums(at: At) -> Finding {
    let lower = some(at.quantile(0.0));
    let last = some(at.upper_quantile(1e-12));
    let mut total = 0.0;
    let mut k = lower;
    while k <= last {
        total += maths::exp(at.log_density(k));
        near("distribution", k, some(at.distribution(k)), total, 1e-10)?;
        near(
            "between whole numbers",
            k,
            some(at.distribution(k + 0.5)),
            total,
            1e-10,
        )?;
        k += 1.0;
    }
    near("the whole mass", f64::NAN, total, 1.0, 1e-10)
}

fn quantiles(at: At, trial: Trial) -> Finding {
    for q in LEVELS {
        let level = |what: &str, x: f64, side: &dyn Fn(f64) -> Option<f64>| {
            // What the rounding of x itself moves.
            let step = 2.0 * f64::EPSILON * x.abs();
            let rounding = (some(side(x + step)) - some(side(x - step))).abs();
            let slack = rounding + if trial.cut { 1e-12 } else { 0.0 };
            near(what, q, some(side(x)), q, 1e-10 + slack / q)
        };
        let x = some(at.quantile(q));
        level("distribution of the quantile", x, &|x| at.distribution(x))?;
        let x = some(at.upper_quantile(q));
        level("survival of the upper quantile", x, &|x| at.survival(x))?;
    }
    Ok(())
}

fn integer_quantiles(at: At, trial: Trial) -> Finding {
    let first = some(at.quantile(0.0));
    for q in LEVELS {
        let k = some(at.quantile(q));
        if k != k.floor() {
            return Err(format!("quantile at {q}: {k} is not whole"));
        }
        if !(some(at.distribution(k)) >= q) || (k > first && some(at.distribution(k - 1.0)) >= q) {
            return Err(format!("quantile at {q}: {k} is not the smallest"));
        }
        let k = some(at.upper_quantile(q));
        if k != k.floor() {
            return Err(format!("upper quantile at {q}: {k} is not whole"));
        }
        if !(some(at.survival(k)) <= q) || (k > first && some(at.survival(k - 1.0)) <= q) {
            return Err(format!("upper quantile at {q}: {k} is not the smallest"));
        }
        let k = some(at.quantile(q));
        if !trial.cut && maths::exp(at.log_density(k)) > 1e-14 && some(at.distribution(k)) < 1.0 {
            let back = some(at.quantile(some(at.distribution(k))));
            near("quantile of the distribution", k, back, k, 0.0)?;
        }
    }
    Ok(())
}

/// Logarithms agree with plain forms, and the two sides make 1.
fn forms(at: At, trial: Trial) -> Finding {
    for q in LEVELS {
        for x in [some(at.quantile(q)), some(at.upper_quantile(q))] {
            let x = if trial.integer { x + 0.25 } else { x };
            let (below, above) = (some(at.distribution(x)), some(at.survival(x)));
            near("both sides", x, below + above, 1.0, 1e-13)?;
            near(
                "ln_distribution",
                x,
                maths::exp(some(at.ln_distribution(x))),
                below,
                1e-12,
            )?;
            near(
                "ln_survival",
                x,
                maths::exp(some(at.ln_survival(x))),
                above,
                1e-12,
            )?;
        }
    }
    Ok(())
}

/// The mass between two points is the difference of either side.
fn between(at: At) -> Finding {
    for pair in LEVELS.windows(2) {
        let (a, b) = (some(at.quantile(pair[0])), some(at.quantile(pair[1])));
        let mass = maths::exp(some(at.ln_between(a, b)));
        let exact = some(at.distribution(b)) - some(at.distribution(a));
        if (mass - exact).abs() > 1e-12 {
            return Err(format!(
                "mass between {a} and {b}: {mass}, expected {exact}"
            ));
        }
        near(
            "ln of nothing",
            b,
            some(at.ln_between(b, a - 1.0)),
            f64::NEG_INFINITY,
            0.0,
        )?;
    }
    Ok(())
}

/// False alarm: once in a million seeds or rarer.
fn draws(at: At, trial: Trial) -> Finding {
    let draws = numbers(trial.draws, 11, |stream| some(at.draw(stream)));
    if let Some(x) = draws
        .iter()
        .find(|&&x| at.log_density(x) == f64::NEG_INFINITY)
    {
        return Err(format!("a draw at {x}, outside the support"));
    }
    if trial.integer {
        let first = some(at.quantile(0.0));
        let shifted: Vec<f64> = draws.iter().map(|x| x - first).collect();
        let alarm = chi_square(&shifted, |k| maths::exp(at.log_density(k + first)));
        if !(alarm > RARE) {
            return Err(format!("draws: chi-square alarm {alarm:e}"));
        }
        return Ok(());
    }
    let far = distance(&draws, |x| some(at.distribution(x)));
    if !(far < LIMIT) {
        return Err(format!("draws: {far} from the distribution"));
    }
    Ok(())
}

#[test]
fn every_law_agrees_with_itself() {
    let mut faults = Vec::new();
    for law in table() {
        for p in cases(*law) {
            let trial = Trial {
                integer: law.support().integer,
                cut: false,
                draws: 100_000,
            };
            if let Err(fault) = whole(law.at(&p), trial) {
                faults.push(format!("{} {p:?}: {fault}", law.usage()));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn the_table_is_in_order_and_found_by_its_names() {
    let names: Vec<&str> = table().iter().map(|law| law.name()).collect();
    assert!(names.is_sorted());
    for law in table() {
        let mut arguments: Vec<&str> = law.parameters().iter().map(|p| p.name).collect();
        arguments.reverse();
        let found = crate::laws::find(law.name(), &arguments).expect("found by its own names");
        assert_eq!(found.usage(), law.usage());
        assert!(law.about().len() > 10 && !law.about().ends_with('.'));
        assert_eq!(law.proper(), !cases(*law).is_empty());
    }
    assert!(crate::laws::find("gamma", &["shape"]).is_none());
    assert_eq!(crate::laws::forms("gamma").count(), 3);
    let _: &dyn Law = table()[0];
}
