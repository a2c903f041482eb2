//! Standard normal numbers by the ziggurat of 256 layers (Marsaglia & Tsang 2000); layer and position come
//! from different bits of one word (Doornik 2005).

use super::Stream;
use super::ziggurat::{LAYERS, Table};
use crate::maths;
use std::sync::LazyLock;

/// Where the tail starts and the area of a layer: computed to 40 digits from the condition that the layers
/// close at the top; the 15 digits that Marsaglia & Tsang print agree.
const TAIL: f64 = 3.654_152_885_361_009;
const AREA: f64 = 0.004_928_673_233_974_655;

pub(super) static NORMAL: LazyLock<Table> =
    LazyLock::new(|| Table::new(TAIL, AREA, density, inverse, |x| (x * x - 1.0).abs()));

fn inverse(f: f64) -> f64 {
    maths::sqrt(-2.0 * maths::ln(f))
}

#[inline]
fn density(x: f64) -> f64 {
    maths::exp(-0.5 * x * x)
}

/// A standard normal number.
#[inline]
pub fn normal(stream: &mut Stream) -> f64 {
    from_table(stream, &NORMAL)
}

/// Rows of a number from each stream, what [`normal`] would give: one stream after another leaves the processor
/// less to wait for than one number after another.
pub fn normals(streams: &mut [Stream], into: &mut [f64]) {
    let table = &*NORMAL;
    for row in into.chunks_exact_mut(streams.len()) {
        for (stream, number) in streams.iter_mut().zip(row) {
            *number = from_table(stream, table);
        }
    }
}

#[inline(always)]
fn from_table(stream: &mut Stream, table: &Table) -> f64 {
    let (layer, x) = proposal(stream.word(), table);
    if x.abs() < table.x[layer + 1] {
        return x;
    }
    beyond(stream, table, layer, x)
}

/// The lowest 8 bits choose the layer, the highest 53 the position: the odd multiples of 2^-53 of its width
/// on both sides.
#[inline(always)]
fn proposal(word: u64, table: &Table) -> (usize, f64) {
    let layer = (word & (LAYERS as u64 - 1)) as usize;
    let position = ((word as i64 >> 11) as f64 + 0.5) * (1.0 / 4503599627370496.0);
    (layer, position * table.x[layer])
}

/// What the rectangles do not decide: about one number in 80.
#[cold]
#[inline(never)]
fn beyond(stream: &mut Stream, table: &Table, mut layer: usize, mut x: f64) -> f64 {
    loop {
        if layer == 0 {
            return tail(stream, x);
        }
        if table.under(layer, x.abs(), stream.unit(), density) {
            return x;
        }
        (layer, x) = proposal(stream.word(), table);
        if x.abs() < table.x[layer + 1] {
            return x;
        }
    }
}

/// A number beyond the last layer, on the side of `x` (Marsaglia 1964).
fn tail(stream: &mut Stream, x: f64) -> f64 {
    loop {
        let excess = -maths::ln(stream.open()) / TAIL;
        if -2.0 * maths::ln(stream.open()) > excess * excess {
            return if x < 0.0 {
                -TAIL - excess
            } else {
                TAIL + excess
            };
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{LIMIT, RARE, cells, distance, golden, numbers, stream};

    const DRAWS: usize = 1_000_000;

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(100_000, normal), "59c7c6b4511e11ab");
    }

    #[test]
    fn each_branch_keeps_its_values() {
        // Bottom rectangle; tail on both sides; wedge accepted and refused.
        let one = |word: u64| {
            let table = &*NORMAL;
            let (layer, x) = proposal(word, table);
            let inside = x.abs() < table.x[layer + 1];
            let value = if inside {
                x
            } else {
                beyond(&mut stream(1), table, layer, x)
            };
            (layer, inside, format!("{:016x}", value.to_bits()))
        };
        assert_eq!(
            one(0x3000_0000_0000_0000),
            (0, true, "3ff776ec9a106321".into())
        );
        assert_eq!(
            one(0x7fff_ffff_ffff_ff00),
            (0, false, "4010071df254fd3e".into())
        );
        assert_eq!(
            one(0x8000_0000_0000_0000),
            (0, false, "c010071df254fd3e".into())
        );
        assert_eq!(
            one(0x7f80_0000_0000_0001),
            (1, false, "3febe4759eee4527".into())
        );
        assert_eq!(
            one(0x7fff_ffff_ffff_ffff),
            (255, false, "3febe4759eee4527".into())
        );
    }

    #[test]
    fn streams_together_give_what_each_gives_alone() {
        let mut together: [Stream; 5] = std::array::from_fn(|seed| stream(seed as u8));
        let mut alone = together.clone();
        for _ in 0..1000 {
            let mut rows = [[0.0; 5]; 2];
            normals(&mut together, rows.as_flattened_mut());
            assert_eq!(rows, [(); 2].map(|_| alone.each_mut().map(normal)));
        }
        assert_eq!(together, alone);
    }

    #[test]
    fn follows_the_normal_law() {
        let draws = numbers(DRAWS, 1, normal);
        let d = distance(&draws, maths::normal_cdf);
        assert!(d < LIMIT, "{d}");
        // The far side of the last layer by itself: about 258 of a million lie beyond.
        let tails = numbers(DRAWS, 2, |stream| tail(stream, 1.0));
        let whole = maths::normal_cdf(-TAIL);
        let d = distance(&tails, |x| 1.0 - maths::normal_cdf(-x) / whole);
        assert!(d < LIMIT, "tail: {d}");
    }

    /// In a law of a few thousand cells of equal probability.
    fn alarm(sampler: impl Fn(&mut Stream) -> f64) -> f64 {
        cells(6 * DRAWS, 1, maths::normal_cdf, sampler)
    }

    #[test]
    fn a_wedge_without_its_test_is_caught() {
        assert!(alarm(normal) > RARE);
        let untested = |stream: &mut Stream| {
            let (layer, x) = proposal(stream.word(), &NORMAL);
            if layer == 0 && x.abs() > TAIL {
                tail(stream, x)
            } else {
                x
            }
        };
        assert!(alarm(untested) < RARE);
    }

    #[test]
    fn a_layer_tied_to_the_position_is_caught() {
        // The fault that Doornik 2005 describes, in its coarse form: the same bits for both.
        let tied = |stream: &mut Stream| {
            let word = stream.word();
            let (layer, x) = proposal(word & !255 | word >> 56, &NORMAL);
            if x.abs() < NORMAL.x[layer + 1] {
                x
            } else {
                beyond(stream, &NORMAL, layer, x)
            }
        };
        assert!(alarm(tied) < RARE);
    }
}
