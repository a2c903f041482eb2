//! Gamma numbers of rate 1 (Marsaglia & Tsang 2000).

use super::{Stream, exponential, normal};
use crate::maths;

/// A gamma number of rate 1; NaN unless `shape` is positive and finite. Where a small shape would give less
/// than the smallest double, it gives the smallest double; [`ln_gamma`] keeps the size.
pub fn gamma(stream: &mut Stream, shape: f64) -> f64 {
    if shape >= 1.0 {
        return at_least_one(stream, shape);
    }
    let x = maths::exp(ln_gamma(stream, shape));
    if x == 0.0 { f64::from_bits(1) } else { x }
}

/// The logarithm of a gamma number, from the same words as [`gamma`].
pub fn ln_gamma(stream: &mut Stream, shape: f64) -> f64 {
    if shape >= 1.0 {
        return maths::ln(at_least_one(stream, shape));
    }
    if shape.is_nan() || shape <= 0.0 {
        return f64::NAN;
    }
    // G(shape) = G(shape + 1) U^(1 / shape), where -ln U is exponential.
    let above = maths::ln(at_least_one(stream, shape + 1.0));
    above - exponential(stream) / shape
}

fn at_least_one(stream: &mut Stream, shape: f64) -> f64 {
    if shape.is_nan() || shape == f64::INFINITY {
        return f64::NAN;
    }
    let d = shape - 1.0 / 3.0;
    let c = 1.0 / maths::sqrt(9.0 * d);
    loop {
        let x = normal(stream);
        let root = 1.0 + c * x;
        if root <= 0.0 {
            continue;
        }
        let v = root * root * root;
        let u = stream.open();
        let square = x * x;
        if u < 1.0 - 0.0331 * square * square
            || maths::ln(u) < 0.5 * square + d * (1.0 - v + maths::ln(v))
        {
            return d * v;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::trial::{LIMIT, distance, golden, numbers};

    #[test]
    fn values_are_stable() {
        assert_eq!(golden(20_000, |s| gamma(s, 0.3)), "57e5e30a46bdbd6f");
        assert_eq!(golden(20_000, |s| ln_gamma(s, 1e-4)), "6827ce13cd3377cc");
        assert_eq!(golden(20_000, |s| gamma(s, 1.0)), "bbd3a9fbee876b39");
        assert_eq!(golden(20_000, |s| gamma(s, 37.5)), "984d964884fdd2c3");
        assert_eq!(golden(20_000, |s| ln_gamma(s, 37.5)), "186a06e9f8000f7c");
    }

    #[test]
    fn follows_the_gamma_law() {
        for shape in [0.05, 0.5, 1.0, 2.5, 300.0] {
            let draws = numbers(1_000_000, 1, |s| gamma(s, shape));
            let d = distance(&draws, |x| maths::gamma_p(shape, x));
            assert!(d < LIMIT, "shape {shape}: {d}");
        }
    }

    #[test]
    fn logarithms_of_tiny_numbers_follow_the_law() {
        // For such a shape P(ln G <= y) is e^(shape y) / Gamma(shape + 1) up to e^y.
        let shape = 1e-3;
        let draws = numbers(1_000_000, 1, |s| ln_gamma(s, shape));
        let d = distance(&draws, |y| {
            if y < -40.0 {
                maths::exp(shape * y - maths::ln_gamma(shape + 1.0))
            } else {
                maths::gamma_p(shape, maths::exp(y))
            }
        });
        assert!(d < LIMIT, "{d}");
        assert!(draws.iter().filter(|&&y| y < -745.0).count() > 100_000);
        assert!(
            numbers(1000, 1, |s| gamma(s, shape))
                .iter()
                .all(|&x| x > 0.0)
        );
    }

    #[test]
    fn a_forgotten_boost_and_a_loose_squeeze_are_caught() {
        let forgotten = numbers(1_000_000, 1, |s| at_least_one(s, 1.05));
        assert!(distance(&forgotten, |x| maths::gamma_p(0.05, x)) > LIMIT);
        // The proposal taken as it comes.
        let (d, c) = (1.0 - 1.0 / 3.0, 1.0 / maths::sqrt(9.0 - 3.0));
        let loose = numbers(1_000_000, 1, |s| {
            loop {
                let root = 1.0 + c * normal(s);
                if root > 0.0 {
                    return d * root * root * root;
                }
            }
        });
        assert!(distance(&loose, |x| maths::gamma_p(1.0, x)) > LIMIT);
    }

    #[test]
    fn parameters_outside_the_domain_give_nan() {
        for shape in [0.0, -1.0, f64::NAN, f64::INFINITY] {
            numbers(1, 1, |s| ln_gamma(s, shape))
                .iter()
                .for_each(|x| assert!(x.is_nan()));
            numbers(1, 1, |s| gamma(s, shape))
                .iter()
                .for_each(|x| assert!(x.is_nan()));
        }
    }
}
