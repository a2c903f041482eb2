//! Reading back the bytes of a saved state.

use crate::course::State;

/// A chain that makes a step a nanosecond comes so far in a hundred days.
const MOST: u64 = 1 << 53;

/// Bytes of one part of a state, taken from the front.
pub struct Part<'a>(&'a [u8]);

impl Part<'_> {
    pub fn array<const N: usize>(&mut self) -> Result<[u8; N], String> {
        let (head, rest) = self
            .0
            .split_first_chunk::<N>()
            .ok_or("the saved state is shorter than this sampler needs")?;
        self.0 = rest;
        Ok(*head)
    }
    pub fn real(&mut self) -> Result<f64, String> {
        self.array().map(f64::from_le_bytes)
    }
    /// A count of steps or draws. None comes near the bound, which keeps sums of counts from running over.
    pub fn count(&mut self) -> Result<u64, String> {
        let count = u64::from_le_bytes(self.array()?);
        if count > MOST {
            return Err("the saved state has an impossible count".into());
        }
        Ok(count)
    }
}

/// A state being read, in the order in which it was written.
pub struct Reader<'a> {
    pub frozen: Part<'a>,
    pub moving: Part<'a>,
}

impl<'a> Reader<'a> {
    pub fn new(state: &'a State) -> Reader<'a> {
        Reader {
            frozen: Part(&state.frozen),
            moving: Part(&state.moving),
        }
    }

    /// Fails when bytes are left over.
    pub fn finish(self) -> Result<(), String> {
        if self.frozen.0.is_empty() && self.moving.0.is_empty() {
            Ok(())
        } else {
            Err("the saved state is longer than this sampler needs".into())
        }
    }
}
