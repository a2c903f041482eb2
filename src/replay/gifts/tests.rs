//! Which blocks of a trail can be taken over, when blocks are cut elsewhere and states are thinned.

use super::*;
use crate::course::State;
use crate::engine::toy::{Planted, Toy};
use crate::engine::{Mark, Reader, Stood};
use crate::plan::BurnIn;
use crate::record::trail_file::TrailRow;

struct Blank;

impl Reader for Blank {
    fn column(&self, _: Mark, _: usize, _: &mut Vec<f64>) -> Result<(), String> {
        Ok(())
    }
    fn state(&self, _: &Stood) -> Result<State, String> {
        Ok(State {
            frozen: vec![1],
            moving: vec![2],
        })
    }
}

fn task(chains: usize, block: u64, burn_in: u64, reviews: &[u64]) -> Task {
    let toy = Toy::new(0.5, Planted::Nothing);
    let mut task = toy.task(1, chains, BurnIn::Fixed(burn_in), reviews);
    task.block = block;
    task
}

/// A trail of these blocks, and its states after those named.
fn record(chains: usize, cut: &[(Phase, u64)], kept: &[u64]) -> (PointTrail, Checkpoints) {
    let state_hash = StateHash {
        frozen: trail::plain(&[1]),
        moving: trail::plain(&[2]),
    };
    let row = |chain: usize, block: usize| {
        let (phase, draws) = match block {
            0 => (Phase::BurnIn, 0),
            block => cut[block - 1],
        };
        TrailRow {
            point: 0,
            chain,
            block: block as u64,
            phase,
            draws,
            draws_digest: [0; 32],
            state_hash,
            link: [0; 32],
        }
    };
    let length = |phase| cut.iter().filter(|b| b.0 == phase).map(|b| b.1).sum();
    let trail = PointTrail {
        chains: (0..chains)
            .map(|chain| (0..=cut.len()).map(|block| row(chain, block)).collect())
            .collect(),
        burn_in: length(Phase::BurnIn),
        draws: length(Phase::Draws),
        kept: None,
    };
    let stood = |&(phase, draws): &(Phase, u64)| Stood {
        phase,
        draws: draws as usize,
        draws_digest: [0; 32],
        state_hash,
        link: [0; 32],
        mark: Mark(0),
        kept: true,
        frozen: Mark(0),
    };
    let blocks: Vec<Stood> = cut.iter().map(stood).collect();
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("states.parquet");
    checkpoints::write(&path, &vec![blocks; chains], kept, &Blank).unwrap();
    (trail, Checkpoints::open(&path, 1000, 100).unwrap())
}

/// Draws, the block of the record that it ends with, and whether its states are kept.
fn told(pieces: &[Piece]) -> Vec<(u64, u64, bool)> {
    let one = |piece: &Piece| (piece.draws, piece.row, piece.kept);
    pieces.iter().map(one).collect()
}

#[test]
fn blocks_are_cut_anew_where_both_cuts_meet() {
    // Blocks of 100 up to 950 after a burn-in of 250; all states kept.
    let short = blocks(&task(2, 100, 250, &[950]), 250, 950).unwrap();
    let all: Vec<u64> = (1..=short.len() as u64).collect();
    let (trail, states) = record(2, &short, &all);
    // Twice as long: two of theirs make one of ours; the last, cut at 950, ends where none of ours does.
    let long = task(2, 200, 250, &[3000]);
    let wanted = [
        (200, 2, true),
        (50, 3, true),
        (200, 5, true),
        (200, 7, true),
        (200, 9, true),
        (200, 11, true),
    ];
    assert_eq!(told(&pieces(&long, &trail, &states, 2)), wanted);
    // A review of ours at 950 ends a block there.
    let reviewed = task(2, 200, 250, &[950, 3000]);
    let pieces_reviewed = pieces(&reviewed, &trail, &states, 2);
    assert_eq!(told(&pieces_reviewed)[6..], [(150, 13, true)]);
    // Shorter than the record: no further than ours goes.
    let shorter = pieces(&task(2, 100, 250, &[400]), &trail, &states, 2);
    assert_eq!(shorter.len(), 3 + 4);
    // Blocks of 50 end within theirs: the first one already.
    assert!(pieces(&task(2, 50, 250, &[3000]), &trail, &states, 2).is_empty());
}

#[test]
fn pieces_end_with_a_state_that_is_kept() {
    let short = blocks(&task(2, 100, 250, &[1000]), 250, 1000).unwrap();
    // Thinned: the last of the burn-in, every fourth of the draws, and the last.
    let (trail, states) = record(2, &short, &[3, 7, 11, 13]);
    let long = task(2, 200, 250, &[700, 3000]);
    let found = pieces(&long, &trail, &states, 2);
    let kept: Vec<u64> = found.iter().filter(|p| p.kept).map(|p| p.row).collect();
    assert_eq!(kept, [3, 7, 11, 13]);
    assert_eq!(found.len(), 2 + 6);
    // Cut to a review: no further than the last state within it.
    let cut = |most: u64| {
        let mut cut = pieces(&long, &trail, &states, 2);
        whole_to(&mut cut, most);
        told(&cut).last().copied()
    };
    assert_eq!(cut(1000), Some((200, 13, true)));
    assert_eq!(cut(700), Some((200, 7, true)));
    assert_eq!(cut(300), Some((50, 3, true)));
}
