//! The journal under a toy run: cut, torn and spoilt anywhere, the same ends come out.

use super::*;
use crate::engine::toy::{Planted, Toy};
use crate::engine::{
    Columns, Event, Halt, Judge, Orders, PointEnd, Settling, Sink, Task, Verdict, conduct,
};
use crate::plan::BurnIn;
use std::sync::atomic::AtomicBool;

impl Sink for JournalFile {
    fn event(&mut self, event: &Event) {
        if let Event::Reviewing { .. } = event {
            self.sync_soon();
        }
    }
}

/// Ends the burn-in at its second review, the draws at 700; figures are the bits of all that was recorded.
struct Bits;

impl Judge for Bits {
    type Figures = Vec<Vec<Vec<u64>>>;
    fn burn_in(&self, _: usize, columns: &Columns) -> Result<Settling, String> {
        Ok(Settling {
            r_hat: None,
            words: String::new(),
            settled: columns.draws() >= 80,
        })
    }
    fn review(
        &self,
        _: usize,
        columns: &Columns,
        _: &AtomicBool,
    ) -> Result<Verdict<Self::Figures>, String> {
        let bits = |column: Vec<f64>| column.into_iter().map(f64::to_bits).collect();
        let all = (0..3).map(|quantity| columns.quantity(quantity));
        let figures = all.map(|chains| Ok(chains?.into_iter().map(bits).collect()));
        Ok(Verdict {
            met: Some(columns.draws() >= 700),
            standing: String::new(),
            figures: figures.collect::<Result<_, String>>()?,
        })
    }
}

type Ends = Vec<PointEnd<Vec<Vec<Vec<u64>>>>>;

fn tasks() -> Vec<Task> {
    let toy = Toy::new(0.9, Planted::Nothing);
    let burn_in = BurnIn::Chosen {
        from: 80,
        at_most: 1000,
    };
    vec![
        toy.task(1, 4, burn_in, &[200, 330, 700, 900]),
        toy.task(2, 1, BurnIn::Fixed(30), &[150]),
    ]
}

fn run(path: &Path, threads: usize, lanes: usize) -> Result<Ends, Halt> {
    let mut journal = JournalFile::open(path, &[7; 32]).expect("a journal");
    let stop = AtomicBool::new(false);
    let orders = Orders {
        threads,
        lanes: Some(lanes),
        stop: &stop,
    };
    conduct(&tasks(), &Bits, &orders, &mut journal)
}

fn whole() -> (tempfile::TempDir, PathBuf, Ends) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("journal");
    let ends = run(&path, 2, 2).expect("a run");
    (folder, path, ends)
}

/// Frames in whole bytes of a journal.
fn whole_frames(mut bytes: &[u8]) -> u64 {
    let mut count = 0;
    while let Some(header) = bytes.first_chunk::<HEADER>() {
        let frame = Header::read(header).unwrap().frame().unwrap();
        bytes = &bytes[frame as usize..];
        count += 1;
    }
    count
}

#[test]
fn a_journal_cut_anywhere_goes_on_to_the_same_bits() {
    let (_folder, path, ends) = whole();
    let bytes = std::fs::read(&path).unwrap();
    // Every part of some frames, then coarser to the end.
    let fine = (0..2 * HEADER + HEAD).step_by(13);
    let coarse = (0..=bytes.len()).step_by(bytes.len() / 97);
    for (turn, cut) in fine.chain(coarse).enumerate() {
        std::fs::write(&path, &bytes[..cut]).unwrap();
        let torn = JournalFile::open(&path, &[7; 32]).unwrap().cut;
        assert_eq!(torn.map_or(0, |torn| torn.behind), 0, "cut at {cut}");
        let again = run(&path, 1 + turn % 3, 1 + turn % 4);
        assert_eq!(again.as_ref(), Ok(&ends), "cut at {cut} of {}", bytes.len());
        let length = std::fs::metadata(&path).unwrap().len();
        assert_eq!(length, bytes.len() as u64, "cut at {cut}");
    }
}

#[test]
fn a_spoilt_byte_is_found_and_what_follows_is_computed_again() {
    let (_folder, path, ends) = whole();
    let bytes = std::fs::read(&path).unwrap();
    for at in (HEAD..bytes.len()).step_by(bytes.len() / 61) {
        let mut spoilt = bytes.clone();
        spoilt[at] ^= 0x10;
        std::fs::write(&path, &spoilt).unwrap();
        let journal = JournalFile::open(&path, &[7; 32]).unwrap();
        let cut = journal
            .cut
            .unwrap_or_else(|| panic!("byte {at} went unseen"));
        assert!(cut.at <= at as u64 && cut.at + cut.bytes == bytes.len() as u64);
        let frames = whole_frames(&bytes[cut.at as usize..]);
        assert_eq!(cut.behind, frames - 1, "byte {at}");
        drop(journal);
        assert_eq!(run(&path, 2, 3).as_ref(), Ok(&ends), "byte {at}");
    }
}

#[test]
fn zeros_after_a_power_cut_are_a_torn_tail() {
    let (_folder, path, ends) = whole();
    let mut bytes = std::fs::read(&path).unwrap();
    let half = bytes.len() / 2;
    bytes[half..].fill(0);
    std::fs::write(&path, &bytes).unwrap();
    assert_eq!(run(&path, 2, 4), Ok(ends));
}

#[test]
fn the_journal_of_another_plan_is_refused() {
    let (_folder, path, _) = whole();
    let other = JournalFile::open(&path, &[8; 32]).err();
    assert!(
        matches!(other, Some(RecordFault::Foreign { .. })),
        "{other:?}"
    );
    std::fs::write(&path, vec![b'x'; 5000]).unwrap();
    let noise = JournalFile::open(&path, &[7; 32]).err();
    assert!(
        matches!(noise, Some(RecordFault::Foreign { .. })),
        "{noise:?}"
    );
}

/// A header whose own check holds, with counts past any file: cut off, and nothing is set aside for it.
#[test]
fn counts_past_the_file_are_a_torn_tail() {
    let (_folder, path, _) = whole();
    let bytes = std::fs::read(&path).unwrap();
    let first: [u8; HEADER] = bytes[HEAD..HEAD + HEADER].try_into().unwrap();
    for (draws, quantities, moving) in [
        (u32::MAX, u32::MAX, u32::MAX),
        (u32::MAX, 1, 0),
        (1, 1, u32::MAX),
    ] {
        let mut header = Header::read(&first).unwrap();
        (header.draws, header.quantities, header.moving) = (draws, quantities, moving);
        let mut hostile = bytes[..HEAD].to_vec();
        hostile.extend(header.bytes());
        hostile.extend(&bytes[HEAD + HEADER..]);
        std::fs::write(&path, &hostile).unwrap();
        let journal = JournalFile::open(&path, &[7; 32]).unwrap();
        assert_eq!((journal.stood, journal.end), (0, HEAD as u64));
    }
}

/// Whole frames in an order that no run leaves: said, not guessed at.
#[test]
fn frames_out_of_order_are_refused() {
    let (_folder, path, _) = whole();
    let bytes = std::fs::read(&path).unwrap();
    let first: [u8; HEADER] = bytes[HEAD..HEAD + HEADER].try_into().unwrap();
    let frame = Header::read(&first).unwrap().frame().unwrap() as usize;
    let twice = [&bytes[..HEAD + frame], &bytes[HEAD..HEAD + frame]].concat();
    std::fs::write(&path, twice).unwrap();
    let fault = JournalFile::open(&path, &[7; 32])
        .err()
        .unwrap()
        .to_string();
    assert!(
        fault.contains("does not follow the one before it"),
        "{fault}"
    );
}

/// A state with a long frozen part is kept once while it does not change.
#[test]
fn a_frozen_part_is_kept_once() {
    let (_folder, path, _) = whole();
    let mut journal = JournalFile::open(&path, &[7; 32]).unwrap();
    let stood = journal.standing(0, 1);
    let frozen: Vec<_> = stood
        .iter()
        .filter(|block| block.phase == crate::course::Phase::Draws)
        .map(|block| block.frozen)
        .collect();
    assert!(frozen.len() > 3 && frozen.iter().all(|mark| *mark == frozen[0]));
    let reader = journal.reader();
    for block in &stood {
        let state = reader.state(block).unwrap();
        assert_eq!(
            crate::engine::trail::StateHash::of(&state),
            block.state_hash
        );
    }
}

/// The blocks of a whole journal taken over into another, the states after some of them left out.
fn taken(from: &Path, to: &Path, kept: impl Fn(u64) -> bool) {
    let mut whole = JournalFile::open(from, &[7; 32]).unwrap();
    let mut journal = JournalFile::open(to, &[7; 32]).unwrap();
    let reader = whole.reader();
    for (point, chain) in whole.shelf.clone().into_keys() {
        for (number, stood) in (1..).zip(whole.standing(point, chain)) {
            let mut columns = Vec::new();
            for quantity in 0..3 {
                reader.column(stood.mark, quantity, &mut columns).unwrap();
            }
            let block = crate::course::Block {
                draws: stood.draws,
                values: columns,
            };
            let taken = journal.take(&Finished {
                point,
                chain,
                number,
                phase: stood.phase,
                draws: stood.draws,
                payload: trail::payload(&block),
                draws_digest: stood.draws_digest,
                state: kept(number).then(|| reader.state(&stood).unwrap()),
                state_hash: stood.state_hash,
                link: stood.link,
            });
            taken.unwrap();
        }
    }
    journal.sync().unwrap();
}

/// Blocks taken over without their states: the run goes on from the last state that is kept, draws what stands
/// behind it again, and comes to the same bits; so it does from any part of such a journal.
#[test]
fn blocks_without_their_states_are_gone_on_with() {
    let (_folder, path, ends) = whole();
    let folder = tempfile::tempdir().unwrap();
    let other = folder.path().join("journal");
    for every in [1, 2, 5, 100] {
        taken(&path, &other, |number| number % every == 0);
        let mut journal = JournalFile::open(&other, &[7; 32]).unwrap();
        assert!(journal.cut.is_none());
        let stood = journal.standing(0, 2);
        for (number, block) in (1..).zip(&stood) {
            assert_eq!(block.kept, number % every == 0);
            let state = journal.reader().state(block);
            let hash = state.map(|state| trail::StateHash::of(&state));
            assert_eq!(hash.ok(), block.kept.then_some(block.state_hash));
        }
        drop(journal);
        let bytes = std::fs::read(&other).unwrap();
        for cut in (0..=bytes.len()).step_by(bytes.len() / 13) {
            std::fs::write(&other, &bytes[..cut]).unwrap();
            for (threads, lanes) in [(1, 4), (2, 3)] {
                let again = run(&other, threads, lanes);
                assert_eq!(again.as_ref(), Ok(&ends), "every {every}, cut at {cut}");
            }
        }
        std::fs::remove_file(&other).unwrap();
    }
}

/// What is thrown away leaves a journal as it was begun.
#[test]
fn a_cleared_journal_is_begun_anew() {
    let (_folder, path, ends) = whole();
    let mut journal = JournalFile::open(&path, &[7; 32]).unwrap();
    journal.clear().unwrap();
    assert!(journal.standing(0, 0).is_empty());
    drop(journal);
    assert_eq!(std::fs::metadata(&path).unwrap().len(), HEAD as u64);
    assert_eq!(run(&path, 2, 2), Ok(ends));
}
