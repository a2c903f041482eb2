//! A running covariance for each lane and the Cholesky factor that proposals are shaped by (Haario,
//! Saksman & Tamminen 2001), in burn-in only.

use super::gain::AdaptiveScale;
use super::lockstep::{Moments, add_to_moments};
use super::saved::Part;
use crate::maths;

/// For `n` coordinates of several lanes. Vectors have element `i` of lane `l` at `i * lanes + l`; lower
/// triangles are packed by rows, element `(i, j)` at `(i (i + 1) / 2 + j) * lanes + l`.
#[derive(Debug, Clone)]
pub struct RunningCovariance {
    n: usize,
    lanes: usize,
    mean: Vec<f64>,
    covariance: Vec<f64>,
    factor: Vec<f64>,
    /// Draws seen by each lane, and the count at which its factor is next made anew.
    seen: Vec<u64>,
    next: Vec<u64>,
    gain: Vec<f64>,
    deviation: Vec<f64>,
    scratch: Vec<f64>,
}

impl RunningCovariance {
    /// Begins with the identity as factor.
    pub fn new(n: usize, lanes: usize) -> RunningCovariance {
        let triangle = n * (n + 1) / 2;
        let mut factor = vec![0.0; triangle * lanes];
        for i in 0..n {
            let at = (i * (i + 3) / 2) * lanes;
            factor[at..at + lanes].fill(1.0);
        }
        RunningCovariance {
            n,
            lanes,
            mean: vec![0.0; n * lanes],
            covariance: vec![0.0; triangle * lanes],
            factor,
            seen: vec![0; lanes],
            next: vec![first_refresh(n); lanes],
            gain: vec![0.0; lanes],
            deviation: vec![0.0; n * lanes],
            scratch: vec![0.0; triangle],
        }
    }

    /// The Cholesky factors, packed.
    pub fn factor(&self) -> &[f64] {
        &self.factor
    }

    /// Takes in where the active lanes stand: coordinates `on` of `position`. Draw `s` weighs as s^2 (the
    /// step is 3 / (s + 2)), so that the way from the start is forgotten as its cube: the first tenth of
    /// the past carries a thousandth of the weight.
    pub fn add(&mut self, on: &[usize], position: &[f64], active: &[bool]) {
        for (lane, gain) in self.gain.iter_mut().enumerate() {
            self.seen[lane] += u64::from(active[lane]);
            *gain = 3.0 / (self.seen[lane] as f64 + 2.0);
        }
        let moments = Moments {
            mean: &mut self.mean,
            covariance: &mut self.covariance,
            deviation: &mut self.deviation,
        };
        add_to_moments(on, position, active, &self.gain, moments);
    }

    /// Makes a lane's factor anew if its time has come: first after 10 n draws (at least 50), then each
    /// time an eighth has been added (at least 16 draws). `scale` moves so that the volume of a step stays
    /// what it was: the covariance gives the shape, the acceptance rate the size. A covariance that is not
    /// positive definite leaves the old factor.
    pub fn refresh(&mut self, lane: usize, scale: &mut AdaptiveScale) {
        let seen = self.seen[lane];
        if seen != self.next[lane] {
            return;
        }
        self.next[lane] = seen + if seen < 128 { 16 } else { seen / 8 };
        if !self.decompose(lane) {
            return;
        }
        let mut volume = 0.0;
        for i in 0..self.n {
            let at = i * (i + 3) / 2;
            let old = &mut self.factor[at * self.lanes + lane];
            volume += maths::ln(*old) - maths::ln(self.scratch[at]);
        }
        for (at, new) in self.scratch.iter().enumerate() {
            self.factor[at * self.lanes + lane] = *new;
        }
        scale.shift(volume / self.n as f64);
    }

    /// The Cholesky factor of a lane's covariance into `scratch`, columns left to right. Correlations are
    /// shrunk by `1 / (1 + (m / n)^2)` with `m` a third of the draws seen, which is about how many of
    /// them are worth an independent one for the first directions: a covariance of few draws is trusted
    /// for its diagonal only.
    fn decompose(&mut self, lane: usize) -> bool {
        let ratio = self.seen[lane] as f64 / (3.0 * self.n as f64);
        let keep = 1.0 - 1.0 / (1.0 + ratio * ratio);
        let at = |i: usize, j: usize| i * (i + 1) / 2 + j;
        for i in 0..self.n {
            for j in 0..=i {
                let mut rest = self.covariance[at(i, j) * self.lanes + lane];
                if i != j {
                    rest *= keep;
                }
                for k in 0..j {
                    rest -= self.scratch[at(i, k)] * self.scratch[at(j, k)];
                }
                self.scratch[at(i, j)] = if i != j {
                    rest / self.scratch[at(j, j)]
                } else if rest > f64::MIN_POSITIVE && rest < f64::INFINITY {
                    rest.sqrt()
                } else {
                    return false;
                };
            }
        }
        true
    }

    pub fn save(&self, lane: usize, bytes: &mut Vec<u8>) {
        for part in [&self.mean, &self.covariance, &self.factor] {
            for x in part.iter().skip(lane).step_by(self.lanes) {
                bytes.extend(x.to_le_bytes());
            }
        }
        bytes.extend(self.seen[lane].to_le_bytes());
        bytes.extend(self.next[lane].to_le_bytes());
    }

    pub fn load(&mut self, lane: usize, bytes: &mut Part) -> Result<(), String> {
        for part in [&mut self.mean, &mut self.covariance, &mut self.factor] {
            for x in part.iter_mut().skip(lane).step_by(self.lanes) {
                *x = bytes.real()?;
            }
        }
        self.seen[lane] = bytes.count()?;
        self.next[lane] = bytes.count()?;
        Ok(())
    }
}

fn first_refresh(n: usize) -> u64 {
    let draws = 10 * n as u64;
    if draws > 50 { draws } else { 50 }
}
