//! Which blocks are drawn again when not all are, and what that finds.

use crate::random::{Purpose, Stream, index};

/// How much of the draws is drawn again.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Audit {
    All,
    /// This part of the blocks, chosen by lot from a seed: the operating system's randomness, unless the verifier
    /// gives one.
    Part {
        part: f64,
        seed: [u8; 32],
    },
}

/// Blocks that are drawn again together: those after block `from` up to block `to` of some chains of a point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Piece {
    pub point: usize,
    /// First chain, and how many.
    pub chain: usize,
    pub chains: usize,
    /// Its state is kept, or it is the start.
    pub from: u64,
    pub to: u64,
}

impl Piece {
    pub fn blocks(&self) -> u64 {
        (self.to - self.from) * self.chains as u64
    }
}

/// Draws this part of the pieces by lot, at least one. Their number does not depend on which are drawn, so that
/// each has the same chance.
pub fn draw(pieces: &[Piece], part: f64, seed: &[u8; 32]) -> Vec<Piece> {
    let wanted = (part * pieces.len() as f64).ceil() as usize;
    let mut left: Vec<Piece> = pieces.to_vec();
    let mut stream = Stream::new(seed, Purpose::Test);
    let mut chosen = Vec::new();
    while chosen.len() < wanted && !left.is_empty() {
        let at = index(&mut stream, left.len() as u64) as usize;
        chosen.push(left.swap_remove(at));
    }
    chosen
}

/// With what probability altered blocks are found, when some of all pieces are drawn again by lot. Blocks of one
/// piece are found together or not at all, and a forger would alter such.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Chance {
    /// Blocks chosen by lot, and blocks of the record.
    pub chosen: u64,
    pub all: u64,
    /// Pieces chosen by lot, and pieces of the record.
    pub pieces_chosen: u64,
    pub pieces: u64,
    /// Blocks of the largest piece.
    pub largest: u64,
}

impl Chance {
    /// Of pieces chosen by lot among all.
    pub fn new(chosen: &[Piece], all: &[Piece]) -> Chance {
        Chance {
            chosen: chosen.iter().map(Piece::blocks).sum(),
            all: all.iter().map(Piece::blocks).sum(),
            pieces_chosen: chosen.len() as u64,
            pieces: all.len() as u64,
            largest: all.iter().map(Piece::blocks).max().unwrap_or(1),
        }
    }

    /// The probability that at least one of `altered` blocks is drawn again when they stand where they are found
    /// least, in as few pieces as hold them: one less the hypergeometric probability of none.
    pub fn of(&self, altered: u64) -> f64 {
        let hidden = altered.div_ceil(self.largest).min(self.pieces);
        let mut missed = 1.0;
        for one in 0..hidden {
            let left = (self.pieces - self.pieces_chosen) as f64 - one as f64;
            if left <= 0.0 {
                return 1.0;
            }
            missed *= left / (self.pieces - one) as f64;
        }
        1.0 - missed
    }

    /// One in a hundred of all blocks, at least one.
    pub fn one_in_a_hundred(&self) -> u64 {
        (self.all / 100).max(1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn chances_are_hypergeometric_in_pieces() {
        let mut chance = Chance {
            chosen: 5,
            all: 100,
            pieces_chosen: 5,
            pieces: 100,
            largest: 1,
        };
        assert!((chance.of(1) - 0.05).abs() < 1e-15);
        // 1 - C(95, 10) / C(100, 10), by hand.
        let missed: f64 = (0..10)
            .map(|i| f64::from(95 - i) / f64::from(100 - i))
            .product();
        assert!((chance.of(10) - (1.0 - missed)).abs() < 1e-15);
        assert_eq!(chance.of(96), 1.0);
        assert_eq!(chance.of(1000), 1.0);
        assert_eq!(chance.one_in_a_hundred(), 1);
        // Ten blocks that lie in one piece are found as seldom as one; twelve take a second.
        chance.largest = 11;
        assert!((chance.of(10) - 0.05).abs() < 1e-15);
        assert!((chance.of(12) - (1.0 - 95.0 / 100.0 * 94.0 / 99.0)).abs() < 1e-15);
    }

    #[test]
    fn a_lot_holds_the_part_asked_for_and_favours_none() {
        let piece = |from| Piece {
            point: 0,
            chain: 0,
            chains: 4,
            from,
            to: from + 1,
        };
        let pieces: Vec<Piece> = (0..40).map(piece).collect();
        let mut counts = [0_u32; 40];
        for seed in 0..2000_u32 {
            let mut key = [0; 32];
            key[..4].copy_from_slice(&seed.to_le_bytes());
            let chosen = draw(&pieces, 0.05, &key);
            assert_eq!(chosen.len(), 2);
            for piece in chosen {
                counts[piece.from as usize] += 1;
            }
        }
        // 100 each, standard deviation 9.7.
        assert!(
            counts.iter().all(|&count| (60..=140).contains(&count)),
            "{counts:?}"
        );
        assert_eq!(draw(&pieces, 1.0, &[0; 32]).len(), 40);
    }
}
