//! Acceptance rates and autocorrelation times against theory; the figures are in
//! `tests/reference/09_sampler_theory.toml` with their sources (Roberts, Gelman & Gilks 1997; Glauber 1963 …).

use crate::chains::{Of, exact_start, point};
use crate::targets::{Law, Lockstep, Standard};
use odograph::course::{CoordinateKind, Phase};
use odograph::maths;
use odograph::methods::{Adapt, Conditional, Cycle, Kernel, Mixture, RandomWalk};
use odograph::random::Stream;
use toml::{Table, Value};

fn reference() -> Table {
    let text = include_str!("../reference/09_sampler_theory.toml");
    text.parse().expect("the reference file is TOML")
}

fn entries<'a>(table: &'a Table, name: &str) -> &'a Vec<Value> {
    table[name].as_array().expect("an array of tables")
}

fn real(entry: &Value, name: &str) -> f64 {
    let value = &entry[name];
    value
        .as_float()
        .or(value.as_integer().map(|n| n as f64))
        .unwrap_or_else(|| panic!("{name} is a number"))
}

/// Runs many independent stationary chains and gives the mean of `of` over each.
fn chain_means(
    law: &dyn Law,
    kernel: &mut dyn Kernel,
    lanes: usize,
    steps: usize,
    of: &dyn Fn(&[f64]) -> f64,
) -> Vec<f64> {
    let mut target = Lockstep::new(law, lanes);
    let mut walkers = exact_start(law, &mut target, lanes, 0);
    let mut sums = vec![0.0; lanes];
    for _ in 0..steps {
        kernel.step(&mut target, &mut walkers, Phase::Draws);
        for (lane, sum) in sums.iter_mut().enumerate() {
            *sum += of(&point(&walkers, lane));
        }
    }
    sums.iter().map(|sum| sum / steps as f64).collect()
}

#[test]
fn acceptance_rates_of_the_random_walk_on_a_normal() {
    let reference = reference();
    for entry in entries(&reference, "random_walk_normal") {
        let dimension = real(entry, "dimension") as usize;
        let scale = real(entry, "proposal_sd");
        let wanted = real(entry, "acceptance_rate");
        let (lanes, steps) = (64, 2000);
        let law = Standard(dimension);
        let on = (0..dimension).collect();
        let mut kernel = RandomWalk::new(on, dimension, scale, Adapt::None, lanes);
        chain_means(&law, &mut kernel, lanes, steps, &|_| 0.0);
        let rate = |lane| kernel.notes(lane)[0].1;
        let rates: Vec<f64> = (0..lanes).map(rate).collect();
        let mean = maths::mean(&rates);
        let error = (maths::variance(&rates) / lanes as f64).sqrt();
        assert!(
            (mean - wanted).abs() < 4.0 * error,
            "{dimension} {scale}: {mean} +- {error}, {wanted} in theory"
        );
        assert!(error < 0.004, "{error}");
    }
}

/// The autocorrelation time that the means of independent chains show, with its standard error: their
/// variance times the length over the variance of a single draw.
fn time_shown(means: &[f64], steps: usize, expectation: f64, variance: f64) -> (f64, f64) {
    let squares: Vec<f64> = means
        .iter()
        .map(|m| (m - expectation) * (m - expectation) * steps as f64 / variance)
        .collect();
    let error = (maths::variance(&squares) / means.len() as f64).sqrt();
    (maths::mean(&squares), error)
}

#[test]
fn autocorrelation_times_of_the_random_walk_on_a_normal() {
    let reference = reference();
    for entry in entries(&reference, "random_walk_iact") {
        let scale = real(entry, "proposal_sd");
        let (lanes, steps) = (4096, 1000);
        let cases: [(&str, Of, f64, f64); 2] = [
            ("tau_x", &|x| x[0], 0.0, 1.0),
            ("tau_x_squared", &|x| x[0] * x[0], 1.0, 2.0),
        ];
        for (name, of, expectation, variance) in cases {
            let mut kernel = RandomWalk::new(vec![0], 1, scale, Adapt::None, lanes);
            let means = chain_means(&Standard(1), &mut kernel, lanes, steps, of);
            let (time, error) = time_shown(&means, steps, expectation, variance);
            let wanted = real(entry, name);
            // A chain of n steps shows tau (1 - tau / 2n) or so.
            let allowed = 4.0 * error + wanted * wanted / steps as f64;
            assert!(
                (time - wanted).abs() < allowed,
                "{name} at {scale}: {time} +- {error}, {wanted} in theory"
            );
            assert!(allowed < 0.15 * wanted, "{name}: the test sees little");
        }
    }
}

/// A ring of eight Ising spins, 0 for down and 1 for up.
struct Ring {
    coupling: f64,
}

const SPINS: usize = 8;

fn bonds(x: &[f64]) -> f64 {
    let spin = |i: usize| 2.0 * x[i % SPINS] - 1.0;
    let mut sum = 0.0;
    for i in 0..SPINS {
        sum += spin(i) * spin(i + 1);
    }
    sum
}

fn magnetisation(x: &[f64]) -> f64 {
    x.iter().map(|x| 2.0 * x - 1.0).sum()
}

impl Ring {
    fn states() -> impl Iterator<Item = Vec<f64>> {
        (0..1 << SPINS).map(|s: usize| (0..SPINS).map(|i| ((s >> i) & 1) as f64).collect())
    }

    /// Expectation and variance by going through all states.
    fn moments(&self, of: &dyn Fn(&[f64]) -> f64) -> (f64, f64) {
        let (mut total, mut first, mut second) = (0.0, 0.0, 0.0);
        for x in Ring::states() {
            let weight = maths::exp(self.log_density(&x));
            total += weight;
            first += weight * of(&x);
            second += weight * of(&x) * of(&x);
        }
        let mean = first / total;
        (mean, second / total - mean * mean)
    }
}

impl Law for Ring {
    fn kinds(&self) -> Vec<CoordinateKind> {
        let kind = CoordinateKind::Integer {
            lower: Some(0),
            upper: Some(1),
        };
        vec![kind; SPINS]
    }
    fn log_density(&self, x: &[f64]) -> f64 {
        self.coupling * bonds(x)
    }
    fn draw(&self, stream: &mut Stream) -> Vec<f64> {
        let total: f64 = Ring::states()
            .map(|x| maths::exp(self.log_density(&x)))
            .sum();
        let mut left = stream.unit() * total;
        for x in Ring::states() {
            left -= maths::exp(self.log_density(&x));
            if left < 0.0 {
                return x;
            }
        }
        vec![1.0; SPINS]
    }
    fn uniforms(&self, _: &[f64], _: &mut Stream) -> Vec<f64> {
        Vec::new()
    }
}

/// The full conditional of a spin is the heat bath: site by site in order, or at random sites.
#[test]
fn autocorrelation_times_of_the_heat_bath() {
    let reference = reference();
    let lanes = 2048;
    for entry in entries(&reference, "ising_dynamics") {
        let is = |name: &str, text: &str| entry[name].as_str() == Some(text);
        if !is("lattice", "ring of 8") || !is("rule", "heat_bath") {
            continue;
        }
        let law = Ring {
            coupling: real(entry, "K"),
        };
        let site = |s: usize| -> (String, Box<dyn Kernel>) {
            let kernel = Conditional::new(vec![s], vec![(0, 1)], SPINS, lanes);
            (format!("site {s}"), Box::new(kernel))
        };
        for (steps, way) in [(200, "systematic_sweep"), (1500, "random_site_update")] {
            let sites = (0..SPINS).map(site).collect();
            let mut kernel: Box<dyn Kernel> = if way == "systematic_sweep" {
                Box::new(Cycle::new(sites))
            } else {
                Box::new(Mixture::new(sites, vec![1.0; SPINS], lanes))
            };
            let cases: [(&str, Of); 2] = [("tau_E", &bonds), ("tau_M", &magnetisation)];
            for (name, of) in cases {
                let means = chain_means(&law, kernel.as_mut(), lanes, steps, of);
                let (expectation, variance) = law.moments(of);
                let (time, error) = time_shown(&means, steps, expectation, variance);
                let wanted = real(entry, &format!("{name}_per_{way}"));
                let allowed = 4.0 * error + wanted * wanted / steps as f64;
                assert!(
                    (time - wanted).abs() < allowed,
                    "{name} {way} at {}: {time} +- {error}, {wanted} in theory",
                    law.coupling
                );
            }
        }
    }
}
