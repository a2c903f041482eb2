//! The layout of the journal: a head, then frames, one a block. Numbers are little-endian.
//!
//! ```text
//! head:   "odograph" | version u32 | plan digest 32 | SHA-256 of these
//! frame:  header (200 bytes) | payload | frozen part of the state, if it changed | moving part
//! header:   0 "blok"      4 point u32     8 chain u32    12 phase u8   13 frozen part follows u8
//!          14 state left out u8   15 zero u8   16 number u64   24 draws u32    28 quantities u32
//!          32 frozen bytes u32   36 moving bytes u32
//!          40 SHA-256 of the payload    72 of the frozen part    104 of the moving part
//!         136 link of the trail        168 SHA-256 of the 168 bytes before
//! ```
//!
//! The header's own check covers the digests of all that follows it, so every byte of a frame is hashed
//! once. A frozen part that is not repeated is that of the chain's last frame which has one. The state of a block
//! that was taken over from a record may be left out: its hash stands, its bytes do not.

use crate::course::{Phase, State};
use crate::engine::trail::{self, Digest, StateHash};
use crate::engine::{Finished, Mark, Stood};

/// Bytes of the head of a journal.
pub const HEAD: usize = 8 + 4 + 32 + 32;
/// Bytes of a frame's header.
pub const HEADER: usize = 200;

/// Begins every header.
pub const MAGIC: &[u8; 4] = b"blok";

const VERSION: u32 = 1;

/// The head of the journal of a plan.
pub fn head(plan: &Digest) -> [u8; HEAD] {
    let mut bytes = [0; HEAD];
    bytes[..8].copy_from_slice(b"odograph");
    bytes[8..12].copy_from_slice(&VERSION.to_le_bytes());
    bytes[12..44].copy_from_slice(plan);
    let check = trail::plain(&bytes[..44]);
    bytes[44..].copy_from_slice(&check);
    bytes
}

/// What the header of a frame says.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Header {
    pub point: u32,
    pub chain: u32,
    pub phase: Phase,
    pub frozen_here: bool,
    /// Whether the state after the block follows.
    pub kept: bool,
    pub number: u64,
    pub draws: u32,
    pub quantities: u32,
    pub frozen: u32,
    pub moving: u32,
    pub draws_digest: Digest,
    pub state_hash: StateHash,
    pub link: Digest,
}

impl Header {
    /// The header of a finished block; `frozen_here` where the frozen part of its state is to follow. Fails when a
    /// count does not fit its field.
    pub fn of(block: &Finished, frozen_here: bool) -> Result<Header, std::num::TryFromIntError> {
        let state = block.state.as_ref();
        let size = |part: fn(&State) -> &Vec<u8>| state.map_or(0, |state| part(state).len());
        let frozen_here = frozen_here && state.is_some();
        Ok(Header {
            point: block.point.try_into()?,
            chain: block.chain.try_into()?,
            phase: block.phase,
            frozen_here,
            kept: state.is_some(),
            number: block.number,
            draws: block.draws.try_into()?,
            quantities: (block.payload.len() / 8 / block.draws.max(1)).try_into()?,
            frozen: if frozen_here {
                size(|state| &state.frozen).try_into()?
            } else {
                0
            },
            moving: size(|state| &state.moving).try_into()?,
            draws_digest: block.draws_digest,
            state_hash: block.state_hash,
            link: block.link,
        })
    }

    pub fn bytes(&self) -> [u8; HEADER] {
        let mut bytes = [0; HEADER];
        let mut put = |at: usize, field: &[u8]| bytes[at..at + field.len()].copy_from_slice(field);
        put(0, MAGIC);
        put(4, &self.point.to_le_bytes());
        put(8, &self.chain.to_le_bytes());
        put(
            12,
            &[
                trail::phase_number(self.phase),
                self.frozen_here.into(),
                (!self.kept).into(),
            ],
        );
        put(16, &self.number.to_le_bytes());
        put(24, &self.draws.to_le_bytes());
        put(28, &self.quantities.to_le_bytes());
        put(32, &self.frozen.to_le_bytes());
        put(36, &self.moving.to_le_bytes());
        put(40, &self.draws_digest);
        put(72, &self.state_hash.frozen);
        put(104, &self.state_hash.moving);
        put(136, &self.link);
        let check = trail::plain(&bytes[..168]);
        bytes[168..].copy_from_slice(&check);
        bytes
    }

    /// `None` when the bytes are not a whole header of this version.
    pub fn read(bytes: &[u8; HEADER]) -> Option<Header> {
        if bytes[168..] != trail::plain(&bytes[..168]) || bytes[..4] != *MAGIC {
            return None;
        }
        let word = |at: usize| u32::from_le_bytes(bytes[at..at + 4].try_into().expect("4 bytes"));
        let digest = |at: usize| -> Digest { bytes[at..at + 32].try_into().expect("32 bytes") };
        let phase = match bytes[12] {
            0 => Phase::BurnIn,
            1 => Phase::Draws,
            _ => return None,
        };
        let header = Header {
            point: word(4),
            chain: word(8),
            phase,
            frozen_here: match bytes[13] {
                0 => false,
                1 => true,
                _ => return None,
            },
            kept: match bytes[14] {
                0 => true,
                1 => false,
                _ => return None,
            },
            number: u64::from_le_bytes(bytes[16..24].try_into().expect("8 bytes")),
            draws: word(24),
            quantities: word(28),
            frozen: word(32),
            moving: word(36),
            draws_digest: digest(40),
            state_hash: StateHash {
                frozen: digest(72),
                moving: digest(104),
            },
            link: digest(136),
        };
        let without = !header.frozen_here && (header.frozen, header.moving) == (0, 0);
        (header.kept || without).then_some(header)
    }

    /// Bytes of the payload; `None` past what a file can hold.
    pub fn payload(&self) -> Option<u64> {
        u64::from(self.draws)
            .checked_mul(u64::from(self.quantities))?
            .checked_mul(8)
    }

    /// Bytes of the whole frame.
    pub fn frame(&self) -> Option<u64> {
        let state = u64::from(self.frozen) + u64::from(self.moving);
        self.payload()?.checked_add(HEADER as u64 + state)
    }

    /// The block as the engine knows it, its frame at `mark`.
    pub fn stood(&self, mark: Mark, frozen: Mark) -> Stood {
        Stood {
            phase: self.phase,
            draws: self.draws as usize,
            draws_digest: self.draws_digest,
            state_hash: self.state_hash,
            link: self.link,
            mark,
            kept: self.kept,
            frozen,
        }
    }
}
