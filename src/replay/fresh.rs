//! A plan run again under roots drawn now: the guard against a root that was chosen among many.

use super::again;
use super::opened;
use super::verify::Request;
use crate::canon::{self, Json};
use crate::estimates::Summary;
use crate::maths::normal_cdf;
use crate::report::Outcome;
use std::path::Path;

/// The joint test finds a difference below this probability: so many honest records in a hundred are found to differ.
pub const LEVEL: f64 = 0.05;

/// One estimate of the record beside that of the fresh runs.
#[derive(Debug, Clone, PartialEq)]
pub struct Beside {
    /// Of the point (from 0), in the order of the plan.
    pub point: usize,
    /// `rate["Cawdle"]`, or `rate["Cawdle"], quantile 0.5`
    pub name: String,
    /// A quantile, not the mean.
    pub quantile: bool,
    /// Value and Monte Carlo error.
    pub recorded: (f64, f64),
    /// The mean of the fresh runs, and its error.
    pub fresh: (f64, f64),
}

impl Beside {
    /// The difference in units of its own error.
    pub fn z(&self) -> f64 {
        let difference = self.recorded.0 - self.fresh.0;
        let (a, b) = (self.recorded.1, self.fresh.1);
        let error = crate::maths::sqrt(a * a + b * b);
        match (difference == 0.0, error > 0.0) {
            (true, _) => 0.0,
            (false, true) => difference / error,
            (false, false) => f64::INFINITY,
        }
    }

    /// How often chance alone makes the difference this large, by the normal law.
    pub fn probability(&self) -> f64 {
        let size = self.z().abs();
        2.0 * normal_cdf(-size)
    }
}

/// What fresh runs came to.
#[derive(Debug, Clone, PartialEq)]
pub struct Fresh {
    pub roots: Vec<String>,
    pub estimates: Vec<Beside>,
    /// Estimates without an error on one side, which cannot be compared.
    pub without_error: usize,
}

impl Fresh {
    /// How often chance alone makes all differences together this large: Cauchy combination of the single
    /// probabilities, which holds in the tail whatever the dependence between estimates (Liu & Xie 2020). The
    /// means have half of the weight, since a figure that is chosen is mostly one of them.
    pub fn joint(&self) -> f64 {
        if self.estimates.is_empty() {
            return 1.0;
        }
        let tangent = |estimate: &Beside| {
            let p = estimate.probability();
            // The tangent near its pole, where (1/2 - p) pi has lost its digits.
            if p < 1e-8 {
                1.0 / ((if p > 1e-300 { p } else { 1e-300 }) * std::f64::consts::PI)
            } else {
                libm::tan((0.5 - p) * std::f64::consts::PI)
            }
        };
        let parts = [false, true].map(|quantile| {
            let part = self.estimates.iter().filter(|one| one.quantile == quantile);
            let tangents: Vec<f64> = part.map(tangent).collect();
            let mean = tangents.iter().sum::<f64>() / tangents.len() as f64;
            (!tangents.is_empty()).then_some(mean)
        });
        let present: Vec<f64> = parts.into_iter().flatten().collect();
        let mean = present.iter().sum::<f64>() / present.len() as f64;
        if mean > 1.0 {
            libm::atan(1.0 / mean) / std::f64::consts::PI
        } else {
            0.5 - libm::atan(mean) / std::f64::consts::PI
        }
    }

    /// Whether the record differs from the fresh runs by more than chance.
    pub fn differs(&self) -> bool {
        self.joint() < LEVEL
    }
}

/// The roots of so many fresh runs from a seed.
pub fn roots(seed: &[u8; 32], count: u32) -> Vec<String> {
    let root = |run: u32| {
        let covered = Json::array([Json::text(canon::hex(seed)), Json::Count(run.into())]);
        canon::hex(&canon::tagged("odograph fresh root", &covered))[..32].to_owned()
    };
    (0..count).map(root).collect()
}

/// Runs the plan of a record again under each of these roots and sets every estimate beside that of the record,
/// whose stored draws must have been verified. Fails in words.
pub fn fresh(folder: &Path, request: &Request<'_>, roots: Vec<String>) -> Result<Fresh, String> {
    let joined = |words: Vec<String>| words.join("\n");
    let stated = opened::stated(folder)?;
    let opened = opened::open(folder, &stated, request.registry).map_err(joined)?;
    let recorded = recorded(folder)?;
    let mut sums: Vec<(f64, f64, u32)> = vec![(0.0, 0.0, 0); recorded.len()];
    for root in &roots {
        (request.progress)(&format!("a fresh run under root {root}"));
        let mut plan = opened.plan.clone();
        plan.root.clone_from(root);
        plan.closed = None;
        let (outcome, _) = again::run(&plan, request)?;
        for (sum, key) in sums.iter_mut().zip(&recorded) {
            if let Some((value, error)) = find(&outcome, key.0, &key.1, key.2) {
                *sum = (sum.0 + value, sum.1 + error * error, sum.2 + 1);
            }
        }
    }
    let mut estimates = Vec::new();
    let runs = roots.len() as u32;
    for ((point, name, level, stored), (value, variance, found)) in recorded.iter().zip(sums) {
        if let (Some(stored), true) = (stored, found == runs) {
            let count = f64::from(runs);
            let name = match level {
                None => name.clone(),
                Some(level) => format!("{name}, quantile {level}"),
            };
            estimates.push(Beside {
                point: *point,
                name,
                quantile: level.is_some(),
                recorded: *stored,
                fresh: (value / count, crate::maths::sqrt(variance) / count),
            });
        }
    }
    Ok(Fresh {
        without_error: recorded.len() - estimates.len(),
        roots,
        estimates,
    })
}

/// Point, name, quantile level (none for the mean) and, where they exist, value and error.
type Recorded = (usize, String, Option<f64>, Option<(f64, f64)>);

/// Every estimate of `summary.json`.
fn recorded(folder: &Path) -> Result<Vec<Recorded>, String> {
    let summary = opened::json(folder, "data/summary.json")?;
    let points = summary.get("points").map_or(&[][..], Json::items);
    let mut all = Vec::new();
    for (point, json) in points.iter().enumerate() {
        for estimand in json.get("estimands").map_or(&[][..], Json::items) {
            let name = estimand
                .get("name")
                .and_then(Json::as_text)
                .unwrap_or_default();
            all.push((point, name.to_owned(), None, pair(estimand)));
            if let Some(Json::Object(quantiles)) = estimand.get("quantiles") {
                for (level, quantile) in quantiles {
                    let level = level
                        .parse()
                        .map_err(|_| "a quantile without a level".to_owned())?;
                    all.push((point, name.to_owned(), Some(level), pair(quantile)));
                }
            }
        }
    }
    Ok(all)
}

fn pair(json: &Json) -> Option<(f64, f64)> {
    let real = |key: &str| json.get(key)?.as_real();
    Some((real("value")?, real("mcse")?))
}

/// The same estimate of a fresh run.
fn find(outcome: &Outcome<'_>, point: usize, name: &str, level: Option<f64>) -> Option<(f64, f64)> {
    let (summary, _): &(Summary, _) = outcome.points.get(point)?;
    let figure = summary.figures.iter().find(|figure| figure.name == name)?;
    let estimate = &figure.estimate;
    match level {
        None => Some((estimate.value?, estimate.mcse?)),
        Some(level) => {
            let quantile = estimate.quantiles.iter().find(|q| q.level == level)?;
            Some((quantile.value?, quantile.mcse?))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::{Purpose, Stream, normal};

    fn besides(differences: &[f64]) -> Fresh {
        let beside = |difference: &f64| Beside {
            point: 0,
            name: "a".into(),
            quantile: false,
            recorded: (*difference, 0.6),
            fresh: (0.0, 0.8),
        };
        Fresh {
            roots: vec!["1".into()],
            estimates: differences.iter().map(beside).collect(),
            without_error: 0,
        }
    }

    #[test]
    fn one_estimate_alone_has_its_own_probability() {
        for z in [0.0, 0.5, 1.96, 4.0, 7.0] {
            let fresh = besides(&[z]);
            let p = fresh.estimates[0].probability();
            assert!(
                (fresh.joint() - p).abs() < 1e-12 + 1e-6 * p,
                "{z}: {} {p}",
                fresh.joint()
            );
        }
        // Two-sided 5 % of the normal law (from memory).
        assert!((besides(&[1.959964]).joint() - 0.05).abs() < 1e-6);
        assert!(besides(&[1.0, 60.0]).differs());
        assert!(!besides(&[]).differs());
    }

    /// Under dependence of any degree the joint test rejects about as often as its level says.
    #[test]
    fn the_joint_test_keeps_its_level() {
        let mut stream = Stream::new(&[5; 32], Purpose::Test);
        for shared in [0.0_f64, 0.9] {
            let own = (1.0 - shared * shared).sqrt();
            let turns = 4000;
            let mut rejected = 0;
            for _ in 0..turns {
                let common = normal(&mut stream);
                let all: Vec<f64> = (0..8)
                    .map(|_| shared * common + own * normal(&mut stream))
                    .collect();
                rejected += u32::from(besides(&all).joint() < 0.05);
            }
            // 200 expected, standard deviation 14; the combination is exact in the limit of small levels only.
            assert!((130..=250).contains(&rejected), "{shared}: {rejected}");
        }
    }

    #[test]
    fn roots_are_many_and_repeat() {
        let a = roots(&[1; 32], 3);
        assert_eq!(a, roots(&[1; 32], 3));
        assert_ne!(a[0], a[1]);
        assert_ne!(a, roots(&[2; 32], 3));
    }
}
