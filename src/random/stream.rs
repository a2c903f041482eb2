//! PCG64-DXSM (O'Neill 2014; the DXSM output function as in `rand_pcg`), state and increment taken from a
//! SHA-256 over length-prefixed fields.

use rand_core::Rng;
use rand_pcg::Lcg128CmDxsm64;
use sha2::{Digest, Sha256};

/// What a stream is for; part of its seed, so that no two purposes share words.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Purpose {
    /// The start of a chain.
    Start,
    /// The kernels of a chain.
    Walk,
    /// One draw of a predicted quantity.
    Prediction { quantity: u64, draw: u64 },
    /// Statistical tests of the program itself.
    Test,
}

/// One stream of random 64-bit words. Keeps no spare value: its state is 32 bytes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Stream {
    generator: Lcg128CmDxsm64,
}

impl Stream {
    /// The stream of a chain's key for a purpose.
    pub fn new(key: &[u8; 32], purpose: Purpose) -> Stream {
        let (name, quantity, draw) = match purpose {
            Purpose::Start => ("start", 0, 0),
            Purpose::Walk => ("walk", 0, 0),
            Purpose::Prediction { quantity, draw } => ("prediction", quantity, draw),
            Purpose::Test => ("test", 0, 0),
        };
        let mut hash = Sha256::new();
        for field in [
            b"odograph stream".as_slice(),
            key,
            name.as_bytes(),
            &quantity.to_le_bytes(),
            &draw.to_le_bytes(),
        ] {
            hash.update((field.len() as u64).to_le_bytes());
            hash.update(field);
        }
        Stream::load(&hash.finalize().into())
    }

    /// The next 64 random bits.
    #[inline]
    pub fn word(&mut self) -> u64 {
        self.generator.next_u64()
    }

    /// Uniform on the multiples of 2^-53 in [0, 1).
    #[inline]
    pub fn unit(&mut self) -> f64 {
        (self.word() >> 11) as f64 * (1.0 / 9007199254740992.0)
    }

    /// Uniform on the open interval (0, 1): the odd multiples of 2^-54. Never 0, never 1.
    #[inline]
    pub fn open(&mut self) -> f64 {
        ((self.word() >> 11) as f64 + 0.5) * (1.0 / 9007199254740992.0)
    }

    /// The exact state: generator state, then its increment without the low bit, little-endian.
    pub fn save(&self) -> [u8; 32] {
        let mut bytes = [0; 32];
        bytes[..16].copy_from_slice(&self.generator.state().to_le_bytes());
        bytes[16..].copy_from_slice(&self.generator.stream().to_le_bytes());
        bytes
    }

    /// The stream with a saved state.
    pub fn load(bytes: &[u8; 32]) -> Stream {
        let (state, stream) = bytes.split_at(16);
        let word = |half: &[u8]| u128::from_le_bytes(half.try_into().expect("16 bytes"));
        Stream {
            generator: Lcg128CmDxsm64::from_state(word(state), word(stream)),
        }
    }
}
