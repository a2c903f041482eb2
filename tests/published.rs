//! Studies run through the real binary and compared with published or independently computed values.
//!
//! The studies stand in `tests/published`, what each figure is compared with in its `checks.toml`, and the
//! values, with their sources, in `tests/reference`. A figure passes within four of its own Monte Carlo
//! errors, and only if that error is small enough to see a fault: under 1/25 of the quantity's spread for
//! a mean, 1/8 for a quantile. `ODOGRAPH_WRITE_TABLES=1 cargo test --test published` writes every
//! comparison into `tests/published/tables`.

mod common;
#[path = "published/compare.rs"]
mod compare;
#[path = "published/nist.rs"]
mod nist;

use common::{copy_files, root, run};
use compare::{Comparison, Expected, write_table};
use std::fs;
use std::path::Path;
use toml::{Table, Value};

fn checks() -> Vec<Table> {
    let text = fs::read_to_string(root().join("tests/published/checks.toml")).expect("checks.toml");
    let table: Table = text.parse().expect("checks.toml is TOML");
    let studies = table["study"].as_array().expect("studies");
    studies
        .iter()
        .map(|s| s.as_table().expect("a table").clone())
        .collect()
}

fn word<'a>(table: &'a Table, key: &str) -> Option<&'a str> {
    table.get(key).and_then(Value::as_str)
}

/// Lays the data files beside a copy of the study under the method, and runs it.
fn run_under(study: &str, method: &str) -> common::Run {
    let folder = tempfile::tempdir().expect("a folder");
    let here = folder.path().join("published");
    copy_files(&root().join("tests/published"), &here, ".csv");
    copy_files(
        &root().join("tests/reference"),
        &folder.path().join("reference"),
        ".csv",
    );
    let text = fs::read_to_string(root().join("tests/published").join(study)).expect("a study");
    let from = "method = \"metropolis\"";
    assert!(text.contains(from), "{study} names no method to exchange");
    let path = here.join(study);
    fs::write(&path, text.replace(from, &format!("method = \"{method}\""))).expect("written");
    let run = run(&path, &folder.path().join("results"), &["--threads", "1"]);
    // The folder goes when this returns: everything needed is read here.
    common::Run {
        record: None,
        stdout: if run.record.is_some() {
            run.file("summary.json")
        } else {
            String::new()
        },
        stderr: format!("{}{}", run.stderr, run.stdout),
        ..run
    }
}

/// Runs one study of `checks.toml` under each of its methods.
fn hold(file: &str) {
    let all = checks();
    let study = all
        .iter()
        .find(|s| word(s, "file") == Some(file))
        .unwrap_or_else(|| panic!("{file} is not in checks.toml"));
    let mut rows = Vec::new();
    for method in study["methods"].as_array().expect("methods") {
        let method = method.as_str().expect("a word");
        let run = run_under(file, method);
        assert_eq!(run.status, 0, "{file} under {method}:\n{}", run.stderr);
        let summary: serde_json::Value = serde_json::from_str(&run.stdout).expect("a summary");
        let point = &summary["points"][0];
        for check in study["check"].as_array().expect("checks") {
            let check = check.as_table().expect("a table");
            let name = word(check, "estimand").expect("an estimand");
            let expected = Expected::read(check);
            rows.extend(Comparison::all(file, method, name, point, &expected));
        }
    }
    write_table(file.trim_end_matches(".toml"), &rows);
    compare::judge(&rows);
}

macro_rules! published {
    ($($name:ident: $file:literal,)*) => {
        $(#[test]
        fn $name() {
            hold($file);
        })*

        /// No study of `checks.toml` is left out of this file.
        #[test]
        fn every_study_is_held() {
            let held = [$($file),*];
            for study in checks() {
                let file = word(&study, "file").expect("a file").to_owned();
                assert!(held.contains(&file.as_str()), "{file} has no test");
            }
        }
    };
}

published! {
    pump_failures: "pumps.toml",
    pump_failures_with_a_known_shape: "pumps-fixed.toml",
    o_rings_per_flight: "orings-flight.toml",
    o_rings_per_ring: "orings-ring.toml",
    coal_mining: "coal.toml",
    coal_mining_by_a_walk: "coal-walk.toml",
    coal_mining_under_a_vague_prior: "coal-vague.toml",
    coal_mining_under_an_improper_prior: "coal-third-stage.toml",
    bioassay_under_a_flat_prior: "bioassay-flat.toml",
    bioassay_under_a_normal_prior: "bioassay-normal.toml",
    eight_schools: "schools.toml",
    conjugate_cases: "conjugate.toml",
    banana: "banana.toml",
    banana_strongly_bent: "banana-bent.toml",
    rosenbrock: "rosenbrock.toml",
    funnel_not_centred: "funnel.toml",
}

/// A random walk can't go down the neck of the centred funnel. The run must say so: goal missed, status 3,
/// and the estimate of the neck's coordinate must not stand there with an error that excludes the truth
/// while R-hat and the effective sizes look well.
#[test]
fn funnel_centred_misses_its_goal() {
    let run = run_under("funnel-centred.toml", "metropolis");
    assert_eq!(run.status, 3, "{}", run.stderr);
    let summary: serde_json::Value = serde_json::from_str(&run.stdout).expect("a summary");
    let point = &summary["points"][0];
    assert_eq!(point["goal"], "missed");
    assert!(
        run.stderr.contains("the goal is MISSED"),
        "the goal was missed without a word:\n{}",
        run.stderr
    );
}

/// The comparison itself must see a figure that is off.
#[test]
fn a_planted_bias_is_seen() {
    let point = serde_json::json!({"estimands": [{
        "name": "x", "value": 1.0, "mcse": 0.02, "sd": 1.0,
        "quantiles": {"0.5": {"value": 1.0, "mcse": 0.03}}
    }]});
    let off = |mean: f64, median: f64| {
        let expected = Expected {
            mean: Some(mean),
            sd: Some(1.0),
            quantiles: vec![("0.5".into(), median)],
            source: "planted".into(),
        };
        let rows = Comparison::all("planted", "none", "x", &point, &expected);
        rows.iter().filter(|row| !row.holds()).count()
    };
    assert_eq!(off(1.0, 1.0), 0);
    assert_eq!(off(1.1, 1.0), 1);
    assert_eq!(off(1.0, 1.2), 1);
}

/// The folder of a study that the tests read.
#[allow(dead_code, reason = "used by the part on NIST")]
fn reference(name: &str) -> Table {
    let path = root().join("tests/reference").join(name);
    read_toml(&path)
}

fn read_toml(path: &Path) -> Table {
    fs::read_to_string(path)
        .unwrap_or_else(|e| panic!("{}: {e}", path.display()))
        .parse()
        .unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}
