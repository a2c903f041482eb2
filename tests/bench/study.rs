//! A study as a user writes it, resolved and brought to the end of its burn-in, in this process.

use odograph::course::{ChainSeed, Course, Phase};
use odograph::plan::{BurnIn, Plan};
use std::path::Path;
use std::sync::Arc;

/// Chains that run in lockstep.
pub const CHAINS: usize = 8;

pub fn resolve(file: &Path) -> Plan {
    odograph::study::resolve(file, &odograph::cli::FAMILIES)
        .unwrap_or_else(|faults| panic!("{}: {faults:#?}", file.display()))
}

/// Writes a study and its data into a folder and resolves it.
pub fn plan(folder: &Path, study: &str, data: &[(&str, String)]) -> Plan {
    for (name, text) in data {
        std::fs::write(folder.join(name), text).expect("written");
    }
    let file = folder.join("study.toml");
    std::fs::write(&file, study).expect("written");
    resolve(&file)
}

/// The chains of the only point, at their starts.
pub fn course(plan: &Plan) -> Box<dyn Course> {
    let seeds: Vec<ChainSeed> = (0..plan.points[0].ensemble.chains)
        .map(|chain| ChainSeed {
            chain: chain as usize,
            stream_key: plan.stream_key(0, chain),
        })
        .collect();
    Arc::clone(&plan.points[0].model)
        .course(&seeds)
        .unwrap_or_else(|fault| panic!("{fault:?}"))
}

/// The same after burn-in, one draw in.
pub fn settled(plan: &Plan) -> Box<dyn Course> {
    let BurnIn::Fixed(burn_in) = plan.points[0].ensemble.burn_in else {
        panic!("a bench says how long burn-in is");
    };
    let mut course = course(plan);
    course.advance(Phase::BurnIn, burn_in as usize);
    course.advance(Phase::Draws, 1);
    course
}
