//! Sealed records in the hands of accidents, forgers and strangers: what an honest `verify` says of each.

#![expect(
    clippy::disallowed_methods,
    reason = "a verification that does not end is stopped"
)]

#[path = "../common/mod.rs"]
mod common;
mod decisions;
mod forged;
mod forger;
mod hostile;
mod lot;

use common::{odograph, text};
use forger::{Forger, copy};
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::OnceLock;

/// Small, with all that can be forged: an input, kernels that learn, a burn-in that chooses its length, and a goal
/// that is met at a later review.
pub const STUDY: &str = r#"
title = "Failures at two stations of the Ostrey Level (invented data)"
question = "What does a forged record look like?"

[seeds]
root = "a quiet root"

[data.stations]
file = "stations.csv"
names = "station"

[model]
family = "density"
[model.observed]
failures = { of = "stations.failures", law = "poisson(mean = rate * stations.hours / 1000)" }
[model.unknown]
level = { law = "gamma(shape = 2, rate = 1)" }
rate = { law = "gamma(shape = 2, rate = level)", per = "stations" }

[[estimand]]
name = "rate"
[[estimand]]
name = "level"

[sampler]
method = "metropolis"

[ensemble]
chains = 3
burn_in = { from = 200, at_most = 3200 }
draws = 800

[goal]
error = 0.05
effective = 100
r_hat = 1.1
at_most = 8000
"#;

const STATIONS: &str = "station,failures,hours\nCawdle,5,9430\nSedge Fold,1,15720\n";

struct Honest {
    _folder: tempfile::TempDir,
    record: PathBuf,
    forger: Forger,
}

/// The honest record, made once by the real binary.
fn honest() -> &'static Honest {
    static HONEST: OnceLock<Honest> = OnceLock::new();
    HONEST.get_or_init(|| {
        let folder = tempfile::tempdir().expect("a folder");
        let record = made(folder.path(), STUDY, 0);
        Honest {
            forger: Forger::of(&record),
            record,
            _folder: folder,
        }
    })
}

/// Runs a study of this text to an exit status and gives its record.
fn made(folder: &Path, study: &str, status: i32) -> PathBuf {
    fs::write(folder.join("stations.csv"), STATIONS).expect("written");
    fs::write(folder.join("honest.toml"), study).expect("written");
    let ran = odograph(folder, &["run", "honest.toml"]);
    assert_eq!(ran.status.code(), Some(status), "{}", text(&ran.stderr));
    let records = fs::read_dir(folder.join("results/honest")).expect("results");
    let mut records = records.map(|entry| entry.expect("an entry").path());
    records.find(|path| path.is_dir()).expect("a record")
}

/// A copy of the honest record in the hands of a forger.
fn taken() -> (tempfile::TempDir, Forger) {
    let folder = tempfile::tempdir().expect("a folder");
    let record = folder.path().join("record");
    copy(&honest().record, &record);
    let mut forger = honest().forger.clone();
    forger.folder = record;
    (folder, forger)
}
