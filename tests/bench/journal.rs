//! What journalling costs a draw of ten quantities: its bytes, their hashes, the link, the write.

use crate::timing;
use odograph::course::{Block, Phase, State};
use odograph::engine::trail::{self, StateHash};
use odograph::engine::{Finished, Journal};
use odograph::record::JournalFile;
use std::path::Path;

const QUANTITIES: usize = 10;
/// Microseconds of a draw that is dear enough for the journal to be a small part.
const DEAR: f64 = 20.0;

/// Processor seconds of this process so far, all threads, by the kernel's count of ticks (1/100 s).
fn processor_seconds() -> Option<f64> {
    let stat = std::fs::read_to_string("/proc/self/stat").ok()?;
    let fields: Vec<&str> = stat.rsplit(')').next()?.split_whitespace().collect();
    let ticks = |i: usize| fields.get(i)?.parse::<f64>().ok();
    Some((ticks(11)? + ticks(12)?) / 100.0)
}

/// Appends blocks of this many draws as the engine does, until there are `draws`; gives the processor's
/// microseconds a draw.
fn cost(file: &Path, block_draws: usize, draws: usize) -> Option<f64> {
    let mut journal = JournalFile::open(file, &[0; 32]).expect("a journal");
    let block = Block {
        draws: block_draws,
        values: (0..block_draws * QUANTITIES)
            .map(|i| i as f64 * 0.37)
            .collect(),
    };
    let state = State {
        frozen: vec![1; 900],
        moving: vec![2; 140],
    };
    let mut hash = StateHash::of(&state);
    let mut link = trail::first_link(&[0; 32], &hash);
    let before = processor_seconds()?;
    for number in 1..=(draws / block_draws) as u64 {
        let payload = trail::payload(&block);
        hash.moving = trail::plain(&state.moving);
        let draws_digest = trail::plain(&payload);
        link = trail::next_link(
            &link,
            number,
            Phase::Draws,
            block_draws as u64,
            &draws_digest,
            &hash,
        );
        let finished = Finished {
            point: 0,
            chain: 0,
            number,
            phase: Phase::Draws,
            draws: block_draws,
            payload,
            draws_digest,
            state: Some(state.clone()),
            state_hash: hash,
            link,
        };
        journal.append(&finished).expect("appended");
    }
    journal.sync().expect("on the disk");
    Some((processor_seconds()? - before) * 1e6 / draws as f64)
}

pub fn run(folder: &Path) {
    for block_draws in [100, 1000, 10_000] {
        let draws = 3_000_000;
        let costs: Option<Vec<f64>> = (0..3)
            .map(|round| {
                let file = folder.join(format!("journal-{block_draws}-{round}"));
                let cost = cost(&file, block_draws, draws);
                std::fs::remove_file(file).expect("removed");
                cost
            })
            .collect();
        let name = format!("journal, ten quantities, blocks of {block_draws}");
        match costs {
            Some(costs) => {
                let cost = timing::median(costs);
                timing::single(&name, "us/draw", cost, "0.7 or less");
                let share = 100.0 * cost / (DEAR + cost);
                timing::single("  where a draw takes 20 us", "% of time", share, "under 5");
            }
            None => timing::single(&name, "us/draw", f64::NAN, "no processor clock here"),
        }
    }
}
