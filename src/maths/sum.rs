//! Sums of fixed shape: the order of the additions depends on the number of elements alone.
//!
//! Elements are cut into chunks of [`CHUNK`]. In a chunk, element i goes to partial sum i % [`PARTIALS`]
//! (all begin at 0); the partials are combined as ((0+4)+(2+6)) + ((1+5)+(3+7)). Chunks are combined by a
//! fixed binary tree, split at the largest power of two below their count. No chunk at all sums to 0.
//!
//! A loop that makes its elements as it goes can give the same bits: feed each chunk's elements in order to
//! a [`Partials`], keep its [`Partials::total`], and pass the totals of all chunks to [`combine_chunks`].
//! With several chains side by side, each chain keeps its own eight partials.

/// Elements of one chunk.
pub const CHUNK: usize = 1024;
/// Interleaved partial sums in a chunk.
pub const PARTIALS: usize = 8;

/// The partial sums of one chunk under way.
#[derive(Debug, Clone, Copy, Default)]
pub struct Partials {
    sums: [f64; PARTIALS],
}

impl Partials {
    /// Adds elements of the chunk, the first of which has a place in the chunk that is a multiple of
    /// [`PARTIALS`]: feed whole groups of eight, only the chunk's last piece may have another length.
    #[inline(always)]
    pub fn add(&mut self, elements: &[f64]) {
        let mut groups = elements.chunks_exact(PARTIALS);
        for group in &mut groups {
            for (sum, x) in self.sums.iter_mut().zip(group) {
                *sum += x;
            }
        }
        for (sum, x) in self.sums.iter_mut().zip(groups.remainder()) {
            *sum += x;
        }
    }

    /// The sum of the chunk.
    #[inline(always)]
    pub fn total(&self) -> f64 {
        combine_partials(&self.sums)
    }
}

/// ((0+4)+(2+6)) + ((1+5)+(3+7)).
#[inline(always)]
pub fn combine_partials(p: &[f64; PARTIALS]) -> f64 {
    ((p[0] + p[4]) + (p[2] + p[6])) + ((p[1] + p[5]) + (p[3] + p[7]))
}

/// The sum of the chunks' sums: a binary tree, split at the largest power of two below the count.
pub fn combine_chunks(totals: &[f64]) -> f64 {
    match totals {
        [] => 0.0,
        [one] => *one,
        _ => {
            let (left, right) = totals.split_at(totals.len().next_power_of_two() / 2);
            combine_chunks(left) + combine_chunks(right)
        }
    }
}

/// The sum of the elements, of fixed shape.
pub fn sum(elements: &[f64]) -> f64 {
    if elements.len() <= CHUNK {
        let mut partials = Partials::default();
        partials.add(elements);
        return partials.total();
    }
    let chunks = elements.len().div_ceil(CHUNK);
    let (left, right) = elements.split_at(chunks.next_power_of_two() / 2 * CHUNK);
    sum(left) + sum(right)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn chunkwise_is_the_same() {
        let elements: Vec<f64> = (0..5000).map(|i| 1.0 / (i as f64 + 0.3)).collect();
        for n in [
            0, 1, 7, 8, 9, 1023, 1024, 1025, 2048, 3000, 4096, 4097, 5000,
        ] {
            let totals: Vec<f64> = elements[..n]
                .chunks(CHUNK)
                .map(|chunk| {
                    let mut partials = Partials::default();
                    for piece in chunk.chunks(256) {
                        partials.add(piece);
                    }
                    partials.total()
                })
                .collect();
            assert_eq!(
                combine_chunks(&totals).to_bits(),
                sum(&elements[..n]).to_bits()
            );
        }
    }

    #[test]
    fn shape_as_documented() {
        let x: Vec<f64> = (0..2500)
            .map(|i| (i as f64 + 0.1) * (i as f64 + 0.1))
            .collect();
        let chunk = |from: usize, to: usize| {
            let mut p = [0.0; 8];
            for i in from..to {
                p[(i - from) % 8] += x[i];
            }
            ((p[0] + p[4]) + (p[2] + p[6])) + ((p[1] + p[5]) + (p[3] + p[7]))
        };
        let want = (chunk(0, 1024) + chunk(1024, 2048)) + chunk(2048, 2500);
        assert_eq!(sum(&x).to_bits(), want.to_bits());
    }
}
