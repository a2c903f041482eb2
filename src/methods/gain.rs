//! Robbins-Monro adaptation of one scale (Robbins & Monro 1951; Andrieu & Thoms 2008, algorithm 4).

use super::saved::Part;
use crate::maths;

/// A scale that moves on the logarithmic axis until a rate is what it should be.
#[derive(Debug, Clone, PartialEq)]
pub struct AdaptiveScale {
    scale: f64,
    log_scale: f64,
    updates: u64,
    /// The logarithm goes no lower than this.
    lowest: f64,
}

/// Beyond any sensible scale, and far from overflow.
const HIGHEST: f64 = 200.0;

impl AdaptiveScale {
    pub fn new(scale: f64) -> AdaptiveScale {
        AdaptiveScale {
            scale,
            log_scale: maths::ln(scale),
            updates: 0,
            lowest: -HIGHEST,
        }
    }

    /// The same, never adapted below `least`.
    pub fn at_least(self, least: f64) -> AdaptiveScale {
        AdaptiveScale {
            lowest: maths::ln(least),
            ..self
        }
    }

    #[inline]
    pub fn value(&self) -> f64 {
        self.scale
    }

    /// Moves the scale up when `rate` exceeds `wanted`. The gain falls as n^(-5/8), within the powers
    /// (1/2, 1] for which the recursion settles, and takes square roots only; it is divided by the
    /// greatest slope that a rate near `wanted` can have, so that a scale wrong by a factor of a thousand
    /// is mended in some hundred updates.
    pub fn update(&mut self, rate: f64, wanted: f64) {
        self.updates += 1;
        let root = (self.updates as f64).sqrt();
        let gain = 1.0 / (root * root.sqrt().sqrt() * (wanted * (1.0 - wanted)));
        self.shift(gain * (rate - wanted));
    }

    /// Adds to the logarithm of the scale.
    pub fn shift(&mut self, by: f64) {
        let moved = self.log_scale + by;
        self.log_scale = if moved > HIGHEST {
            HIGHEST
        } else if moved < self.lowest {
            self.lowest
        } else {
            moved
        };
        self.scale = maths::exp(self.log_scale);
    }

    pub fn save(&self, bytes: &mut Vec<u8>) {
        bytes.extend(self.scale.to_le_bytes());
        bytes.extend(self.log_scale.to_le_bytes());
        bytes.extend(self.updates.to_le_bytes());
    }

    pub fn load(&mut self, bytes: &mut Part) -> Result<(), String> {
        self.scale = bytes.real()?;
        self.log_scale = bytes.real()?;
        self.updates = bytes.count()?;
        Ok(())
    }
}
