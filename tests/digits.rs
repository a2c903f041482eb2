//! The same digits everywhere: small studies, one or more a method, whose draws, saved states and estimates must
//! hash to the digests kept in `tests/digits/kept.txt`, on any machine, build and number of lanes.
//!
//! Everything here runs inside the test itself, so that an emulator that runs the test runs all of it; only
//! `threads_…` starts the binary. `ODOGRAPH_WRITE_DIGITS=1 cargo test --test digits` keeps the digests anew: to be
//! done only together with raising `NUMERICS`.

mod common;

use common::{root, run};
use odograph::canon::hex;
use odograph::course::{Block, ChainSeed, Phase};
use odograph::estimates::{Estimate, estimate};
use odograph::plan::{BurnIn, Plan};
use sha2::{Digest, Sha256};
use std::fs;
use std::sync::Arc;

const STUDIES: [&str; 6] = ["walk", "slice", "cycle", "mixture", "draws", "functions"];

fn plan(name: &str) -> Plan {
    let file = root().join("tests/digits").join(format!("{name}.toml"));
    odograph::study::resolve(&file, &odograph::cli::FAMILIES)
        .unwrap_or_else(|faults| panic!("{name}: {faults:#?}"))
}

/// What is kept of one study.
#[derive(Debug, PartialEq, Eq, Clone)]
struct Digests {
    draws: String,
    states: String,
    estimates: String,
}

/// Runs the chains of the only point in lockstep groups of this many, and hashes all that comes out.
fn digests(plan: &Plan, lanes: usize) -> Digests {
    let point = &plan.points[0];
    let BurnIn::Fixed(burn_in) = point.ensemble.burn_in else {
        panic!("these studies say how long burn-in is");
    };
    let seeds: Vec<ChainSeed> = (0..point.ensemble.chains)
        .map(|chain| ChainSeed {
            chain: chain as usize,
            stream_key: plan.stream_key(0, chain),
        })
        .collect();
    let (mut draws, mut states) = (Sha256::new(), Sha256::new());
    let quantities = point.model.quantities().len();
    let mut kept: Vec<Vec<Vec<f64>>> = vec![Vec::new(); quantities];
    for group in seeds.chunks(lanes) {
        let mut course = Arc::clone(&point.model)
            .course(group)
            .unwrap_or_else(|fault| panic!("{fault:?}"));
        let burnt = course.advance(Phase::BurnIn, burn_in as usize);
        // In two blocks: where a block ends must not be seen in a draw.
        let first = point.ensemble.draws as usize / 3;
        let rest = point.ensemble.draws as usize - first;
        let (one, two) = (
            course.advance(Phase::Draws, first),
            course.advance(Phase::Draws, rest),
        );
        for lane in 0..group.len() {
            for block in [&burnt[lane], &one[lane], &two[lane]] {
                hash_values(&mut draws, &block.values);
            }
            let state = course.save(lane);
            for part in [&state.frozen, &state.moving] {
                states.update((part.len() as u64).to_le_bytes());
                states.update(part);
            }
            for (quantity, chains) in kept.iter_mut().enumerate() {
                chains.push([column(&one[lane], quantity), column(&two[lane], quantity)].concat());
            }
        }
    }
    let mut estimates = Sha256::new();
    for (quantity, chains) in point.model.quantities().iter().zip(&kept) {
        let chains: Vec<&[f64]> = chains.iter().map(Vec::as_slice).collect();
        hash_estimate(
            &mut estimates,
            &estimate(&chains, quantity.condition, &[0.025, 0.5, 0.975]),
        );
    }
    Digests {
        draws: hex(&draws.finalize().into()),
        states: hex(&states.finalize().into()),
        estimates: hex(&estimates.finalize().into()),
    }
}

fn column(block: &Block, quantity: usize) -> &[f64] {
    &block.values[quantity * block.draws..(quantity + 1) * block.draws]
}

fn hash_values(hash: &mut Sha256, values: &[f64]) {
    for value in values {
        hash.update(value.to_bits().to_le_bytes());
    }
}

fn hash_estimate(hash: &mut Sha256, e: &Estimate) {
    let mut one = |value: Option<f64>| match value {
        Some(value) => hash.update(value.to_bits().to_le_bytes()),
        None => hash.update(*b"no value"),
    };
    for value in [
        e.value,
        e.mcse,
        e.mcse_lags,
        e.mcse_batches,
        e.sd,
        e.sd_mcse,
        e.r_hat,
        e.effective_bulk,
        e.effective_tail,
        e.effective_mean,
        e.tail_index,
        e.limits.map(|l| l.0),
        e.limits.map(|l| l.1),
    ] {
        one(value);
    }
    for quantile in &e.quantiles {
        one(quantile.value);
        one(quantile.mcse);
    }
    for note in &e.notes {
        hash.update(note.to_string());
    }
}

fn line(name: &str, digests: &Digests) -> String {
    format!(
        "{name}: draws {} states {} estimates {}",
        digests.draws, digests.states, digests.estimates
    )
}

fn kept() -> Vec<String> {
    let path = root().join("tests/digits/kept.txt");
    let text = fs::read_to_string(path).unwrap_or_default();
    text.lines().map(str::to_owned).collect()
}

#[expect(
    clippy::disallowed_methods,
    reason = "a test asked to keep its digests"
)]
fn write_anew() -> bool {
    std::env::var_os("ODOGRAPH_WRITE_DIGITS").is_some()
}

/// The whole set, each study in lockstep of all its chains.
#[test]
fn short_draws_and_estimates_are_the_kept_ones() {
    let now: Vec<String> = STUDIES
        .iter()
        .map(|name| line(name, &digests(&plan(name), 8)))
        .collect();
    if write_anew() {
        let text = now.join("\n") + "\n";
        fs::write(root().join("tests/digits/kept.txt"), text).expect("written");
        return;
    }
    assert_eq!(now, kept());
}

/// One chain alone, three together, all together: no digit can tell.
#[test]
fn short_lanes_can_not_be_seen() {
    for name in ["walk", "cycle"] {
        let plan = plan(name);
        let all = digests(&plan, 8);
        for lanes in [1, 3] {
            assert_eq!(digests(&plan, lanes), all, "{name} with {lanes} lanes");
        }
    }
}

/// Another root must give other digits, or the digests above would show nothing.
#[test]
fn another_root_gives_other_digits() {
    let plan = plan("walk");
    let mut other = plan.clone();
    other.root = "another".into();
    let (a, b) = (digests(&plan, 8), digests(&other, 8));
    assert_ne!(a.draws, b.draws);
    assert_ne!(a.estimates, b.estimates);
}

/// The binary with 1, 2 and 7 threads: the same summary, the same digest of the result.
#[test]
fn threads_can_not_be_seen() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut summaries = Vec::new();
    for threads in ["1", "2", "7"] {
        for study in ["walk", "cycle"] {
            let file = root().join("tests/digits").join(format!("{study}.toml"));
            let into = folder.path().join(threads);
            let run = run(&file, &into, &["--threads", threads]);
            // So short a run may leave chains that disagree: it says so, and is compared all the same.
            assert!(matches!(run.status, 0 | 3), "{}", run.stderr);
            summaries.push((study, run.file("summary.json")));
        }
    }
    for study in ["walk", "cycle"] {
        let of: Vec<&String> = summaries
            .iter()
            .filter(|s| s.0 == study)
            .map(|s| &s.1)
            .collect();
        assert!(of.windows(2).all(|pair| pair[0] == pair[1]), "{study}");
    }
}
