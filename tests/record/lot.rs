//! A verification that draws a part of the blocks again finds forgeries as often as it says.

use crate::forger::{Forger, copy};
use crate::{STUDY, made};
use odograph::cli::FAMILIES;
use odograph::random::{Purpose, Stream, index};
use odograph::replay::{Account, Audit, Part, Request, verify};
use std::path::Path;
use std::sync::atomic::AtomicBool;

fn audited(record: &Path, part: f64, seed: u64) -> Account {
    let mut key = [0; 32];
    key[..8].copy_from_slice(&seed.to_le_bytes());
    let request = Request {
        registry: &FAMILIES,
        threads: 1,
        audit: Audit::Part { part, seed: key },
        stop: &AtomicBool::new(false),
        progress: &|_| (),
    };
    verify(record, &request)
}

/// Whether it was found, in the blocks drawn again and nowhere else.
fn found(account: &Account) -> bool {
    assert!(
        account
            .findings
            .iter()
            .all(|finding| finding.part == Part::Blocks),
        "{:?}",
        account.findings
    );
    !account.agrees()
}

/// Found so often, where the verifications said these chances.
struct Tally {
    found: f64,
    expected: f64,
    variance: f64,
}

impl Tally {
    fn new() -> Tally {
        Tally {
            found: 0.0,
            expected: 0.0,
            variance: 0.0,
        }
    }

    fn enter(&mut self, account: &Account, altered: u64) {
        let chance = account.chance.expect("a part was asked for").of(altered);
        self.found += f64::from(u8::from(found(account)));
        self.expected += chance;
        self.variance += chance * (1.0 - chance);
    }

    fn agrees(&self) {
        let Tally {
            found,
            expected,
            variance,
        } = self;
        assert!(
            (found - expected).abs() < 3.0 * variance.sqrt(),
            "{found} found, {expected:.1} ± {:.1} expected",
            variance.sqrt()
        );
    }
}

/// One chain's block with its least digit moved.
fn alter(forger: &mut Forger, chain: usize, block: u64, stream: &mut Stream) {
    let values = &mut forger.chains[chain][block as usize - 1].draws.values;
    let at = index(stream, values.len() as u64) as usize;
    values[at] = f64::from_bits(values[at].to_bits() ^ 1);
}

#[test]
fn random_forgeries_are_found_as_often_as_it_says() {
    let study = STUDY
        .replace("{ from = 200, at_most = 3200 }", "400")
        .replace("error = 0.05", "error = 0.000001")
        .replace("at_most = 8000", "at_most = 4000");
    let folder = tempfile::tempdir().expect("a folder");
    let record = made(folder.path(), &study, 3);
    let forged = folder.path().join("forged");
    copy(&record, &forged);
    let mut honest = Forger::of(&record);
    honest.folder = forged;
    let (chains, blocks) = (honest.chains.len() as u64, honest.chains[0].len() as u64);
    let burn_in = honest.burn_in() as u64;
    assert!(blocks > 40, "{blocks}");
    let mut stream = Stream::new(&[5; 32], Purpose::Test);
    let (mut little, mut much, mut first) = (Tally::new(), Tally::new(), 0);
    for seed in 0..200 {
        let mut forger = honest.clone();
        let chain = index(&mut stream, chains) as usize;
        let block = 1 + index(&mut stream, blocks);
        alter(&mut forger, chain, block, &mut stream);
        forger.seal();
        let audit = |part| audited(&forger.folder, part, seed);
        // The first block, and the first after the burn-in, are drawn again in any case.
        if block == 1 || block == burn_in + 1 {
            assert!(found(&audit(0.05)));
            first += 1;
            continue;
        }
        little.enter(&audit(0.05), 1);
        if seed % 4 == 0 {
            much.enter(&audit(0.3), 1);
        }
    }
    assert!(first > 0 && first < 30, "{first}");
    little.agrees();
    much.agrees();
}

/// Blocks between two stored states are drawn again together or not at all: a forger who alters many alters these.
#[test]
fn forged_blocks_close_together_are_found_as_seldom_as_it_says() {
    let study = STUDY
        .replace("{ from = 200, at_most = 3200 }", "800")
        .replace("error = 0.05", "error = 0.000001")
        .replace("at_most = 8000", "at_most = 4000");
    let folder = tempfile::tempdir().expect("a folder");
    let record = made(folder.path(), &study, 3);
    let forged = folder.path().join("forged");
    copy(&record, &forged);
    let mut honest = Forger::of(&record);
    honest.folder = forged;
    let (burn_in, end) = (honest.burn_in() as u64, honest.chains[0].len() as u64);
    let mut kept: Vec<u64> = (1..=end).filter(|block| block % 4 == 0).collect();
    kept.push(end);
    kept.dedup();
    assert_eq!(burn_in % 4, 0, "the last of the burn-in is kept");
    honest.kept = Some(kept.clone());
    let mut stream = Stream::new(&[6; 32], Purpose::Test);
    let mut tally = Tally::new();
    for seed in 0..60 {
        let mut forger = honest.clone();
        // Ten blocks of three chains between two states, away from those that are drawn again in any case.
        let piece = loop {
            let piece = index(&mut stream, kept.len() as u64 - 1) as usize;
            let from = kept[piece];
            if from >= 4 && from != burn_in && kept[piece + 1] - from == 4 {
                break from;
            }
        };
        for number in 0..10 {
            alter(
                &mut forger,
                number % 3,
                piece + 1 + number as u64 / 3,
                &mut stream,
            );
        }
        forger.seal();
        tally.enter(&audited(&forger.folder, 0.25, seed), 10);
    }
    tally.agrees();
}
