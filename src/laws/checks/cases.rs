//! Parameters to try each form of each law with.

use crate::laws::Law;

/// Sets of parameters for a law; empty only for the flat laws. A form that is not here fails the tests.
pub fn cases(law: &dyn Law) -> Vec<Vec<f64>> {
    let names: Vec<&str> = law.parameters().iter().map(|p| p.name).collect();
    let sets: &[&[f64]] = match (law.name(), names.as_slice()) {
        ("bernoulli", ["probability"]) => &[&[0.3], &[0.0], &[1.0]],
        ("bernoulli", ["log_odds"]) => &[&[-0.4], &[3.0]],
        ("beta", _) => &[
            &[2.0, 3.5],
            &[0.5, 0.5],
            &[200.0, 70.0],
            &[1.0, 1.0],
            &[0.3, 6.0],
        ],
        ("binomial", ["trials", "probability"]) => &[
            &[20.0, 0.3],
            &[7.0, 0.0],
            &[7.0, 1.0],
            &[0.0, 0.4],
            &[900.0, 0.97],
        ],
        ("binomial", ["trials", "log_odds"]) => &[&[20.0, -0.75], &[60.0, 4.0]],
        ("categorical", _) => &[&[0.25, 0.0, 0.5, 0.25], &[1.0], &[0.3, 0.3, 0.4]],
        ("cauchy", _) => &[&[0.0, 1.0], &[2.0, 0.25]],
        ("exponential", ["rate"]) => &[&[1.0], &[0.004]],
        ("exponential", ["mean"]) => &[&[250.0]],
        ("gamma", ["shape", "rate"]) => &[&[2.0, 1.0], &[0.3, 1.0], &[1.0, 5.0], &[350.0, 4.0]],
        ("gamma", ["shape", "scale"]) => &[&[2.5, 3.0]],
        ("gamma", ["mean", "sd"]) => &[&[3.0, 1.5], &[0.5, 0.6]],
        ("geometric", _) => &[&[0.2], &[1.0], &[0.01]],
        ("gumbel", _) => &[&[0.0, 1.0], &[5.0, 2.5]],
        ("half_cauchy", _) => &[&[1.0], &[25.0]],
        ("half_normal", _) => &[&[1.0], &[25.0]],
        ("inverse_gamma", _) => &[&[2.0, 1.0], &[0.5, 0.1], &[40.0, 90.0]],
        ("laplace", _) => &[&[0.0, 1.0], &[2.0, 0.25]],
        ("logistic", _) => &[&[0.0, 1.0], &[2.0, 0.25]],
        ("lognormal", _) => &[&[0.0, 1.0], &[1.5, 0.2]],
        ("negative_binomial", ["mean", "shape"]) => &[&[3.0, 0.5], &[30.0, 8.0], &[5.0, 1e7]],
        ("negative_binomial", ["successes", "probability"]) => &[&[4.0, 0.3], &[2.5, 1.0]],
        ("normal", ["mean", "sd"]) => &[&[0.0, 1.0], &[2.0, 0.25]],
        ("normal", ["mean", "precision"]) => &[&[2.0, 16.0]],
        ("poisson", _) => &[&[0.0], &[2.5], &[39.0], &[900.0]],
        ("student", _) => &[
            &[4.0, 0.0, 1.0],
            &[1.0, 0.5, 2.0],
            &[0.7, 0.0, 1.0],
            &[30.0, 1.0, 0.125],
        ],
        ("uniform", _) => &[&[-1.0, 3.0], &[0.0, 1e9]],
        ("weibull", _) => &[&[1.5, 2.0], &[0.5, 10.0], &[12.0, 30.0]],
        ("flat" | "flat_positive" | "log_flat", []) => &[],
        (name, form) => panic!("no parameters to try for {name}({form:?})"),
    };
    sets.iter().map(|set| set.to_vec()).collect()
}
