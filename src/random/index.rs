//! Whole numbers below a bound, without bias (Lemire 2019).

use super::Stream;

/// Uniform on 0, 1, …, n - 1; `n` is at least 1.
#[inline]
pub fn index(stream: &mut Stream, n: u64) -> u64 {
    let mut product = u128::from(stream.word()) * u128::from(n);
    if (product as u64) < n {
        // The lowest 2^64 mod n fractions would favour some numbers: drawn again.
        let refused = n.wrapping_neg() % n;
        while (product as u64) < refused {
            product = u128::from(stream.word()) * u128::from(n);
        }
    }
    (product >> 64) as u64
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{RARE, chi_square, golden, numbers};

    /// So large that a third of the words must be refused.
    const LARGE: u64 = 3 << 62;

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(20_000, |s| index(s, 6) as f64), "06f78c0d9649c4c2");
        assert_eq!(
            golden(20_000, |s| index(s, LARGE) as f64),
            "03df1a2a2f33b34a"
        );
    }

    #[test]
    fn all_numbers_are_as_likely() {
        for n in [1, 2, 6, 37] {
            let draws = numbers(1_000_000, 1, |s| index(s, n) as f64);
            let alarm = chi_square(&draws, |k| if k < n as f64 { 1.0 / n as f64 } else { 0.0 });
            assert!(alarm > RARE, "{n}: {alarm:e}");
        }
    }

    #[test]
    fn refusal_removes_the_bias_that_a_product_alone_has() {
        let third = |x: u64| (x % 3) as f64;
        let even = |k: f64| if k < 3.0 { 1.0 / 3.0 } else { 0.0 };
        let fair = numbers(1_000_000, 1, |s| third(index(s, LARGE)));
        assert!(chi_square(&fair, even) > RARE);
        let biased = numbers(1_000_000, 1, |s| {
            third(((u128::from(s.word()) * u128::from(LARGE)) >> 64) as u64)
        });
        assert!(chi_square(&biased, even) < RARE);
    }
}
