//! The trail: one hash chain over a chain's blocks, from the chain key through every state.
//!
//! ```text
//! state_hash[k] = H(state tag, H(frozen part), H(moving part))
//! link[0]       = H(trail tag, chain key, state_hash[0])
//! link[k]       = H(link[k-1], k, phase, draws, H(draws of k), state_hash[k])
//! ```
//!
//! `H` is SHA-256 over length-prefixed fields; numbers are 64-bit little-endian words. `H(draws of k)` is
//! plain SHA-256 over the block's values, quantity by quantity, as little-endian doubles with one NaN.

use crate::course::{Block, Phase, State};
use sha2::{Digest as _, Sha256};

/// A SHA-256.
pub type Digest = [u8; 32];

const TRAIL: &[u8] = b"odograph trail 1";
const STATE: &[u8] = b"odograph state 1";

/// The hashes of a state's two parts; the frozen one must not change while draws are taken.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct StateHash {
    pub frozen: Digest,
    pub moving: Digest,
}

impl StateHash {
    pub fn of(state: &State) -> StateHash {
        StateHash {
            frozen: plain(&state.frozen),
            moving: plain(&state.moving),
        }
    }

    /// Both parts in one.
    pub fn whole(&self) -> Digest {
        fields(&[STATE, &self.frozen, &self.moving])
    }
}

/// SHA-256 of bytes as they are.
pub fn plain(bytes: &[u8]) -> Digest {
    Sha256::digest(bytes).into()
}

/// SHA-256 over fields, each preceded by its length.
fn fields(parts: &[&[u8]]) -> Digest {
    let mut hash = Sha256::new();
    for part in parts {
        hash.update((part.len() as u64).to_le_bytes());
        hash.update(part);
    }
    hash.finalize().into()
}

/// A phase as the number that stands for it in trails and journals.
pub fn phase_number(phase: Phase) -> u8 {
    match phase {
        Phase::BurnIn => 0,
        Phase::Draws => 1,
    }
}

/// The head of a trail.
pub fn first_link(chain_key: &Digest, state: &StateHash) -> Digest {
    fields(&[TRAIL, chain_key, &state.whole()])
}

/// The link of block `number` (from 1) after the link before it.
pub fn next_link(
    before: &Digest,
    number: u64,
    phase: Phase,
    draws: u64,
    draws_digest: &Digest,
    state: &StateHash,
) -> Digest {
    fields(&[
        before,
        &number.to_le_bytes(),
        &[phase_number(phase)],
        &draws.to_le_bytes(),
        draws_digest,
        &state.whole(),
    ])
}

/// The bytes of a block's values that are hashed and kept: little-endian doubles, every NaN the same.
pub fn payload(block: &Block) -> Vec<u8> {
    let mut bytes = vec![0; block.values.len() * 8];
    for (place, value) in bytes.chunks_exact_mut(8).zip(&block.values) {
        place.copy_from_slice(&bits(*value).to_le_bytes());
    }
    bytes
}

/// Hashes values as [`payload`] would have them.
pub fn hash_values(hash: &mut Sha256, values: &[f64]) {
    let mut bytes = [0; 8 * 512];
    for values in values.chunks(512) {
        for (place, value) in bytes.chunks_exact_mut(8).zip(values) {
            place.copy_from_slice(&bits(*value).to_le_bytes());
        }
        hash.update(&bytes[..8 * values.len()]);
    }
}

/// The bits of a value, every NaN the same.
fn bits(value: f64) -> u64 {
    const NAN: u64 = 0x7ff8_0000_0000_0000;
    if value.is_nan() { NAN } else { value.to_bits() }
}

/// The values back from their bytes.
pub fn values(bytes: &[u8]) -> impl Iterator<Item = f64> + '_ {
    bytes
        .chunks_exact(8)
        .map(|word| f64::from_le_bytes(word.try_into().expect("8 bytes")))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The construction written out by hand once more, so that a change of layout shows.
    #[test]
    fn links_follow_the_written_construction() {
        let state = State {
            frozen: vec![1, 2],
            moving: vec![3],
        };
        let hash = StateHash::of(&state);
        let mut bytes = Vec::new();
        bytes.extend(16u64.to_le_bytes());
        bytes.extend(b"odograph state 1");
        for part in [Sha256::digest([1, 2]), Sha256::digest([3])] {
            bytes.extend(32u64.to_le_bytes());
            bytes.extend(part);
        }
        let whole: Digest = Sha256::digest(&bytes).into();
        assert_eq!(hash.whole(), whole);

        let mut bytes = Vec::new();
        for part in [
            [7u8; 32].as_slice(),
            &5u64.to_le_bytes(),
            &[1],
            &9u64.to_le_bytes(),
            &[8; 32],
            &whole,
        ] {
            bytes.extend((part.len() as u64).to_le_bytes());
            bytes.extend(part);
        }
        let link: Digest = Sha256::digest(&bytes).into();
        assert_eq!(
            next_link(&[7; 32], 5, Phase::Draws, 9, &[8; 32], &hash),
            link
        );
    }

    #[test]
    fn every_nan_has_the_same_bytes() {
        let block = |value| Block {
            draws: 1,
            values: vec![value],
        };
        assert_eq!(payload(&block(f64::NAN)), payload(&block(-f64::NAN)));
        assert_eq!(
            values(&payload(&block(-0.0))).next().map(f64::to_bits),
            Some((-0.0f64).to_bits())
        );
    }
}
