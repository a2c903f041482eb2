//! NIST StRD, Markov chain Monte Carlo sets: a grid of leads and sizes, and mcmc01 as printed.
//!
//! Each set is lead + 0.2, then lead + 0.1 and lead + 0.3 in turn. What a double holds of the data shrinks as
//! the lead grows: at 1e13 it steps by 2^-9, so 0.1 is read as 0.099609375. The posterior of the data *as
//! read* is exact all the same: with y the data less the lead (exact in doubles), n their number and s their
//! standard deviation, mu is mean(y) + s / sqrt(n) times a Student variate and sigma is proportional to s.
//! The values expected here are therefore the tabulated ones of lead 0, shifted to mean(y) and stretched by
//! s; for leads up to 1e10 the tabulated values themselves are checked as well. The mean of `mu` is itself a
//! double, so at 1e13 it is good to a few steps of 2^-9 at best; `offset` (mu less lead, exact) is not so bound.

use crate::common::{self, root};
use crate::compare::{Comparison, Expected, judge, number, write_table};
use std::fmt::Write as _;
use std::fs;
use toml::{Table, Value};

const LEADS: [u64; 6] = [
    0,
    1_000,
    1_000_000,
    100_000_000,
    10_000_000_000,
    10_000_000_000_000,
];
const LEVELS: [&str; 3] = ["0.025", "0.5", "0.975"];

/// The data as text, as NIST prints them.
fn data(lead: u64, n: usize) -> Vec<String> {
    (0..n)
        .map(|i| match i {
            0 => format!("{lead}.2"),
            i if i % 2 == 1 => format!("{lead}.1"),
            _ => format!("{lead}.3"),
        })
        .collect()
}

/// The tabulated posterior of a lead and a size.
struct Tabulated {
    mu: Expected,
    sigma: Expected,
}

fn tabulated(lead: u64, n: usize) -> Tabulated {
    let reference = crate::reference("01_nist_mcmc.toml");
    let entry = reference["computed"]
        .as_array()
        .expect("computed values")
        .iter()
        .filter_map(Value::as_table)
        .find(|e| number(&e["lead"]) == Some(lead as f64) && number(&e["n"]) == Some(n as f64))
        .unwrap_or_else(|| panic!("no values for lead {lead}, n {n}"));
    let source = format!("01_nist_mcmc.toml, lead {lead}, n {n}");
    let expected = |name: &str| Expected {
        mean: number(&entry[&format!("{name}_mean")]),
        sd: number(&entry[&format!("{name}_sd")]),
        quantiles: quantiles(entry, name),
        source: source.clone(),
    };
    Tabulated {
        mu: expected("mu"),
        sigma: expected("sigma"),
    }
}

fn quantiles(entry: &Table, name: &str) -> Vec<(String, f64)> {
    let all = |key: &str| -> Vec<f64> {
        let values = entry[key].as_array().expect("numbers");
        values.iter().filter_map(number).collect()
    };
    let levels = all("quantile_levels");
    let values = all(&format!("{name}_quantiles"));
    LEVELS
        .iter()
        .map(|level| {
            let wanted: f64 = level.parse().expect("a level");
            let at = levels.iter().position(|l| *l == wanted).expect("tabulated");
            ((*level).to_owned(), values[at])
        })
        .collect()
}

fn moved(e: &Expected, old_centre: f64, new_centre: f64, stretch: f64, source: &str) -> Expected {
    let at = |x: f64| new_centre + (x - old_centre) * stretch;
    Expected {
        mean: e.mean.map(at),
        sd: e.sd.map(|sd| sd * stretch),
        quantiles: e
            .quantiles
            .iter()
            .map(|(l, q)| (l.clone(), at(*q)))
            .collect(),
        source: source.to_owned(),
    }
}

/// Mean and sample standard deviation.
fn moments(y: &[f64]) -> (f64, f64) {
    let n = y.len() as f64;
    let mean = y.iter().sum::<f64>() / n;
    let squares: f64 = y.iter().map(|v| (v - mean) * (v - mean)).sum();
    (mean, (squares / (n - 1.0)).sqrt())
}

fn run_set(lead: u64, n: usize, method: &str) -> common::Run {
    let folder = tempfile::tempdir().expect("a folder");
    let here = folder.path();
    let rows = data(lead, n);
    fs::write(here.join("nist.csv"), format!("y\n{}\n", rows.join("\n"))).expect("written");
    // Eight starts, wider apart than the posterior.
    let spread = 0.3 / (n as f64).sqrt();
    let mut starts = "mu,sigma\n".to_owned();
    for chain in 0..8 {
        let step = f64::from(chain) - 3.5;
        let offset = 0.2 + 0.5 * step * spread;
        writeln!(starts, "{},{}", lead as f64 + offset, 0.12 + 0.01 * step).expect("written");
    }
    fs::write(here.join("nist-starts.csv"), starts).expect("written");
    let text = fs::read_to_string(root().join("tests/published/nist.toml")).expect("a study");
    let text = text
        .replace("lead = 100000000", &format!("lead = {lead}"))
        .replace("method = \"metropolis\"", &format!("method = \"{method}\""));
    let study = here.join("nist.toml");
    fs::write(&study, text).expect("written");
    let run = common::run(&study, &here.join("results"), &["--threads", "1"]);
    assert_eq!(
        run.status, 0,
        "lead {lead}, n {n}, {method}:\n{}",
        run.stderr
    );
    common::Run {
        stdout: run.file("summary.json"),
        record: None,
        ..run
    }
}

fn grid(n: usize, method: &str) {
    let mut rows = Vec::new();
    let (centre, spread) = moments(
        &data(0, n)
            .iter()
            .map(|t| t.parse().expect("a number"))
            .collect::<Vec<f64>>(),
    );
    let base = tabulated(0, n);
    for lead in LEADS {
        let run = run_set(lead, n, method);
        let summary: serde_json::Value = serde_json::from_str(&run.stdout).expect("a summary");
        let point = &summary["points"][0];
        let read: Vec<f64> = data(lead, n)
            .iter()
            .map(|t| t.parse::<f64>().expect("a number") - lead as f64)
            .collect();
        let (mean, s) = moments(&read);
        let source = format!("01_nist_mcmc.toml, lead 0, n {n}, moved to the data as read");
        let study = format!("lead {lead}, n {n}");
        let offset = moved(&base.mu, centre, mean, s / spread, &source);
        let sigma = moved(&base.sigma, 0.0, 0.0, s / spread, &source);
        // Draws of `mu` stand on the doubles around the lead, and so does a quantile of them.
        let step = (lead as f64).next_up() - lead as f64;
        let mut offsets = Comparison::all(&study, method, "offset", point, &offset);
        for row in offsets.iter_mut().filter(|row| row.figure.starts_with('0')) {
            row.rounding = step;
        }
        rows.extend(offsets);
        rows.extend(Comparison::all(&study, method, "sigma", point, &sigma));
        let exact = tabulated(lead, n);
        // `mu` itself, and a mean of many such, hold no more than the steps of doubles at the lead.
        if lead <= 10_000_000_000 {
            rows.extend(with_rounding(
                Comparison::all(&study, method, "mu", point, &exact.mu),
                2.0 * step,
            ));
            rows.extend(Comparison::all(
                &study,
                method,
                "sigma",
                point,
                &exact.sigma,
            ));
        } else {
            let mu = moved(&offset, 0.0, lead as f64, 1.0, &source);
            rows.extend(with_rounding(
                Comparison::all(&study, method, "mu", point, &mu),
                2.0 * step,
            ));
        }
        if (lead, n) == (100_000_000, 11) {
            rows.extend(as_printed(&study, method, point));
        }
    }
    write_table(&format!("nist-{n}-{method}"), &rows);
    judge(&rows);
}

fn with_rounding(mut rows: Vec<Comparison>, rounding: f64) -> Vec<Comparison> {
    for row in &mut rows {
        row.rounding = rounding;
    }
    rows
}

/// mcmc01 as NIST prints it.
fn as_printed(study: &str, method: &str, point: &serde_json::Value) -> Vec<Comparison> {
    let reference = crate::reference("01_nist_mcmc.toml");
    let printed = reference["published"].as_table().expect("printed values");
    let value = |key: &str| number(&printed[key]).expect("a number");
    let expected = |name: &str| Expected {
        mean: Some(value(&format!("{name}_mean"))),
        sd: Some(value(&format!("{name}_sd"))),
        quantiles: [("0.025", "q025"), ("0.5", "q500"), ("0.975", "q975")]
            .iter()
            .map(|(level, key)| ((*level).to_owned(), value(&format!("{name}_{key}"))))
            .collect(),
        source: "NIST StRD mcmc01, as printed (01_nist_mcmc.toml, [published])".into(),
    };
    let mut rows = Comparison::all(study, method, "mu", point, &expected("mu"));
    rows.extend(Comparison::all(
        study,
        method,
        "sigma",
        point,
        &expected("sigma"),
    ));
    with_rounding(rows, 1e-7)
}

#[test]
fn eleven_by_a_walk() {
    grid(11, "metropolis");
}

#[test]
fn eleven_by_slices() {
    grid(11, "slice");
}

#[test]
fn a_hundred_and_one_by_a_walk() {
    grid(101, "metropolis");
}

#[test]
fn a_hundred_and_one_by_slices() {
    grid(101, "slice");
}

#[test]
fn a_thousand_and_one_by_a_walk() {
    grid(1001, "metropolis");
}

#[test]
fn a_thousand_and_one_by_slices() {
    grid(1001, "slice");
}
