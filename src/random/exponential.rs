//! Standard exponential numbers by the ziggurat of 256 layers (Marsaglia & Tsang 2000), with different bits
//! of one word for layer and position (Doornik 2005).

use super::Stream;
use super::ziggurat::{LAYERS, Table, falling};
use crate::maths;
use std::sync::LazyLock;

/// Computed to 40 digits as for the normal law; the digits that Marsaglia & Tsang print agree.
const TAIL: f64 = 7.697_117_470_131_05;
const AREA: f64 = 0.003_949_659_822_581_557;

pub(super) static EXPONENTIAL: LazyLock<Table> =
    LazyLock::new(|| Table::new(TAIL, AREA, falling, |f| -maths::ln(f), |_| 1.0));

/// An exponential number of rate 1; never 0.
#[inline]
pub fn exponential(stream: &mut Stream) -> f64 {
    from_table(stream, &EXPONENTIAL)
}

/// A number from each stream, what [`exponential`] would give.
pub fn exponentials(streams: &mut [Stream], into: &mut [f64]) {
    let table = &*EXPONENTIAL;
    for (stream, number) in streams.iter_mut().zip(into) {
        *number = from_table(stream, table);
    }
}

#[inline(always)]
fn from_table(stream: &mut Stream, table: &Table) -> f64 {
    let (layer, x) = proposal(stream.word(), table);
    if x < table.x[layer + 1] {
        return x;
    }
    beyond(stream, table, layer, x)
}

#[inline(always)]
fn proposal(word: u64, table: &Table) -> (usize, f64) {
    let layer = (word & (LAYERS as u64 - 1)) as usize;
    let position = ((word >> 11) as f64 + 0.5) * (1.0 / 9007199254740992.0);
    (layer, position * table.x[layer])
}

#[cold]
#[inline(never)]
fn beyond(stream: &mut Stream, table: &Table, mut layer: usize, mut x: f64) -> f64 {
    loop {
        if layer == 0 {
            // The law has no memory: its tail is the law again.
            return TAIL - maths::ln(stream.open());
        }
        if table.under(layer, x, stream.unit(), falling) {
            return x;
        }
        (layer, x) = proposal(stream.word(), table);
        if x < table.x[layer + 1] {
            return x;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{LIMIT, RARE, cells, distance, golden, numbers, stream};

    fn distribution(x: f64) -> f64 {
        -maths::expm1(-x)
    }

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(100_000, exponential), "7b86585ce5d62508");
    }

    #[test]
    fn each_branch_keeps_its_values() {
        let one = |word: u64| {
            let table = &*EXPONENTIAL;
            let (layer, x) = proposal(word, table);
            let inside = x < table.x[layer + 1];
            let value = if inside {
                x
            } else {
                beyond(&mut stream(1), table, layer, x)
            };
            (layer, inside, format!("{:016x}", value.to_bits()))
        };
        assert_eq!(
            one(0x3000_0000_0000_0000),
            (0, true, "3ffa1762df1f0ca7".into())
        );
        assert_eq!(
            one(0xffff_ffff_ffff_ff00),
            (0, false, "4021f8fb5b70269e".into())
        );
        assert_eq!(
            one(0xff80_0000_0000_0001),
            (1, false, "3fe32d0e615ebbe0".into())
        );
        assert_eq!(
            one(0xffff_ffff_ffff_ffff),
            (255, false, "3fe32d0e615ebbe0".into())
        );
    }

    #[test]
    fn streams_together_give_what_each_gives_alone() {
        let mut together: [Stream; 5] = std::array::from_fn(|seed| stream(seed as u8));
        let mut alone = together.clone();
        for _ in 0..1000 {
            let mut row = [0.0; 5];
            exponentials(&mut together, &mut row);
            assert_eq!(row, alone.each_mut().map(exponential));
        }
        assert_eq!(together, alone);
    }

    #[test]
    fn follows_the_exponential_law() {
        let d = distance(&numbers(1_000_000, 1, exponential), distribution);
        assert!(d < LIMIT, "{d}");
    }

    #[test]
    fn a_wedge_without_its_test_is_caught() {
        assert!(cells(6_000_000, 1, distribution, exponential) > RARE);
        let untested = |stream: &mut Stream| {
            let (layer, x) = proposal(stream.word(), &EXPONENTIAL);
            if layer == 0 && x > TAIL {
                TAIL - maths::ln(stream.open())
            } else {
                x
            }
        };
        assert!(cells(6_000_000, 1, distribution, untested) < RARE);
    }
}
