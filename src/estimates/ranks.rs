//! Draws in order, their ranks, and normal scores of the ranks (Vehtari et al. 2021, section 4.1).

use crate::maths::normal_quantile;

/// The draws of all chains in ascending order, with the way back to their places.
pub(super) struct Ordered {
    /// Ascending; -0 counts as 0.
    pub(super) values: Vec<f64>,
    /// Place of each (chain after chain) among the draws.
    places: Vec<u32>,
}

impl Ordered {
    /// Fewer than 2^32 draws, none of them NaN.
    pub(super) fn new(chains: &[&[f64]]) -> Ordered {
        let mut keyed: Vec<(u64, u32)> = chains
            .iter()
            .flat_map(|chain| chain.iter())
            .zip(0u32..)
            .map(|(x, place)| (key(*x), place))
            .collect();
        keyed.sort_unstable();
        Ordered {
            values: keyed.iter().map(|(k, _)| value(*k)).collect(),
            places: keyed.iter().map(|(_, place)| *place).collect(),
        }
    }

    /// The largest number of draws that are equal, and the value they share.
    pub(super) fn mode(&self) -> (f64, usize) {
        let mut best = (f64::NAN, 0);
        for (from, to) in ties(&self.values) {
            if to - from > best.1 {
                best = (self.values[from], to - from);
            }
        }
        best
    }

    /// Normal scores of the draws, in their places.
    pub(super) fn scores(&self) -> Vec<f64> {
        let count = self.values.len();
        let mut out = vec![0.0; count];
        for (from, to) in ties(&self.values) {
            let score = score(from, to, count);
            for place in &self.places[from..to] {
                out[*place as usize] = score;
            }
        }
        out
    }

    /// Normal scores of the distances from the median, in the places of the draws. `None` where the median
    /// is infinite or lies between the infinities.
    pub(super) fn folded_scores(&self, median: f64) -> Option<Vec<f64>> {
        if !median.is_finite() {
            return None;
        }
        let count = self.values.len();
        // Distances grow from the median outwards on both sides: merge the two.
        let mut right = self.values.partition_point(|v| *v < median);
        let mut left = right;
        let mut distances = Vec::with_capacity(count);
        let mut order = Vec::with_capacity(count);
        while left > 0 || right < count {
            let below = if left > 0 {
                median - self.values[left - 1]
            } else {
                f64::INFINITY
            };
            let above = if right < count {
                self.values[right] - median
            } else {
                f64::INFINITY
            };
            if right == count || left > 0 && below <= above {
                left -= 1;
                distances.push(below);
                order.push(self.places[left]);
            } else {
                distances.push(above);
                order.push(self.places[right]);
                right += 1;
            }
        }
        let mut out = vec![0.0; count];
        for (from, to) in ties(&distances) {
            let score = score(from, to, count);
            for place in &order[from..to] {
                out[*place as usize] = score;
            }
        }
        Some(out)
    }
}

/// The score of draws that share the places `from..to` (from 0) among so many.
fn score(from: usize, to: usize, count: usize) -> f64 {
    // Their mean rank, counted from 1; exact, being a multiple of one half.
    let rank = (from + 1 + to) as f64 / 2.0;
    let total = count as f64;
    // The upper half mirrors the lower, so that scores are symmetric in every bit.
    if 2.0 * rank > total + 1.0 {
        -normal_quantile((total + 1.0 - rank - 0.375) / (total + 0.25))
    } else {
        normal_quantile((rank - 0.375) / (total + 0.25))
    }
}

/// Runs of equal values among ascending ones.
fn ties(sorted: &[f64]) -> impl Iterator<Item = (usize, usize)> {
    let mut from = 0;
    std::iter::from_fn(move || {
        let first = *sorted.get(from)?;
        let start = from;
        from += 1;
        while sorted.get(from) == Some(&first) {
            from += 1;
        }
        Some((start, from))
    })
}

/// Bits that order as the numbers do.
fn key(x: f64) -> u64 {
    let bits = (x + 0.0).to_bits();
    if bits >> 63 == 1 {
        !bits
    } else {
        bits | 1 << 63
    }
}

fn value(key: u64) -> f64 {
    f64::from_bits(if key >> 63 == 1 {
        key & !(1 << 63)
    } else {
        !key
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn keys_order_as_numbers() {
        let x = [
            f64::NEG_INFINITY,
            -2.5,
            -5e-324,
            0.0,
            5e-324,
            1.0,
            f64::INFINITY,
        ];
        assert!(x.windows(2).all(|w| key(w[0]) < key(w[1])));
        assert!(x.iter().all(|v| value(key(*v)) == *v));
        assert_eq!(key(-0.0), key(0.0));
    }

    #[test]
    fn ties_share_their_mean_rank() {
        let x = [3.0, 1.0, 3.0, 2.0, -0.0, 0.0];
        let ordered = Ordered::new(&[&x[..3], &x[3..]]);
        let z = ordered.scores();
        assert_eq!(z[0], z[2]);
        assert_eq!(z[4], z[5]);
        let expected = normal_quantile((5.5 - 0.375) / 6.25);
        assert!((z[0] - expected).abs() < 1e-15);
        assert_eq!(ordered.mode(), (0.0, 2));
    }

    #[test]
    fn folding_ranks_distances() {
        let x = [0.0, 4.0, 1.0, 7.0, 3.0, f64::INFINITY, -1.0];
        let folded = Ordered::new(&[&x]).folded_scores(3.0).expect("finite");
        let distances: Vec<f64> = x.iter().map(|v| (v - 3.0f64).abs()).collect();
        assert_eq!(folded, Ordered::new(&[&distances]).scores());
        assert!(Ordered::new(&[&x]).folded_scores(f64::INFINITY).is_none());
    }
}
