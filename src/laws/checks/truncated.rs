//! Every law cut to an interval, in its middle, at an end, and far out.

use super::cases::cases;
use super::walk::{Trial, whole};
use crate::laws::{Truncated, find, table};
use crate::maths;
use crate::random::trial::{LIMIT, distance, numbers};

#[test]
fn every_law_agrees_with_itself_between_bounds() {
    let mut faults = Vec::new();
    for law in table() {
        for p in cases(*law) {
            let at = law.at(&p);
            let low = |q: f64| at.quantile(q);
            let high = |s: f64| at.upper_quantile(s);
            let bounds = [
                (low(0.2), low(0.7)),
                (low(0.6), None),
                (None, low(0.3)),
                (high(1e-4), None),
                (high(1e-9), high(1e-12)),
                (None, low(1e-6)),
            ];
            for (from, to) in bounds {
                // Nothing between the bounds, or so little room that the doubles there are too few.
                let (lower, upper) = law.support().ends(&p);
                let (a, b) = (from.unwrap_or(lower), to.unwrap_or(upper));
                if !(b - a > 1e-7 * b.abs()) && b < f64::INFINITY {
                    continue;
                }
                let trial = Trial {
                    integer: law.support().integer,
                    cut: from.is_some() || to.is_some(),
                    draws: 4_000,
                };
                if let Err(fault) = whole(at.truncated(from, to), trial) {
                    faults.push(format!(
                        "{} {p:?} in {from:?} to {to:?}: {fault}",
                        law.usage()
                    ));
                }
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn cut_far_out_where_the_tail_is_no_double() {
    // P(X > 50) is about e^-1254; beyond, the normal law falls off as an exponential one of rate 50 and a bit.
    let normal = find("normal", &["mean", "sd"]).expect("in the table");
    let p = [0.0, 1.0];
    for (from, to, sign) in [(Some(50.0), None, 1.0), (None, Some(-50.0), -1.0)] {
        let cut = normal.at(&p).truncated(from, to);
        let draws = numbers(20_000, 4, |stream| {
            sign * cut.draw(stream).expect("a proper law")
        });
        assert!(draws.iter().all(|&x| x >= 50.0));
        let start = maths::ln_normal_cdf(-50.0);
        let d = distance(&draws, |x| -maths::expm1(maths::ln_normal_cdf(-x) - start));
        assert!(d < LIMIT, "{d}");
        assert!(cut.quantile(0.5).is_some_and(f64::is_nan));
        let density = cut.log_density(sign * 50.0);
        assert!((density - (-1250.0 - 0.918_938_533_204_672_7 - start)).abs() < 1e-10);
    }
    // P(X >= 300) for a mean of 1 is about 300!^-1 / e: e^-1415.
    let poisson = find("poisson", &["mean"]).expect("in the table");
    let p = [1.0];
    let cut = poisson.at(&p).truncated(Some(300.0), None);
    let draws = numbers(20_000, 4, |stream| cut.draw(stream).expect("a proper law"));
    let first = draws.iter().filter(|&&x| x == 300.0).count() as f64 / 20_000.0;
    // Within 5 standard deviations of 300 / 301 or so, whose own error is 1e-5.
    assert!((first - 300.0 / 301.0).abs() < 5.0 * (0.0033_f64 / 20_000.0).sqrt());
}

#[test]
fn bounds_that_leave_nothing() {
    let normal = find("normal", &["mean", "sd"]).expect("in the table");
    let p = [0.0, 1.0];
    let cut = normal.at(&p).truncated(Some(2.0), Some(1.0));
    assert_eq!(cut.log_density(1.5), f64::NEG_INFINITY);
    assert!(cut.distribution(1.5).is_some_and(f64::is_nan));
    assert!(cut.quantile(0.5).is_some_and(f64::is_nan));
    assert!(numbers(1, 1, |stream| cut.draw(stream).expect("a proper law"))[0].is_nan());
    let poisson = find("poisson", &["mean"]).expect("in the table");
    let p = [3.0];
    let cut = poisson.at(&p).truncated(Some(1.2), Some(1.8));
    assert_eq!(cut.log_density(1.0), f64::NEG_INFINITY);
    assert!(numbers(1, 1, |stream| cut.draw(stream).expect("a proper law"))[0].is_nan());
}

#[test]
fn whole_numbers_on_the_bounds_belong_to_the_interval() {
    let poisson = find("poisson", &["mean"]).expect("in the table");
    let p = [3.0];
    for (from, to) in [(2.0, 4.0), (1.5, 4.5)] {
        let cut = poisson.at(&p).truncated(Some(from), Some(to));
        let total: f64 = [2.0, 3.0, 4.0]
            .iter()
            .map(|&k| maths::exp(cut.log_density(k)))
            .sum();
        assert!((total - 1.0).abs() < 1e-14);
        assert_eq!(cut.log_density(1.0), f64::NEG_INFINITY);
        assert_eq!(cut.quantile(0.0), Some(2.0));
        assert_eq!(cut.quantile(1.0), Some(4.0));
    }
}

#[test]
fn flat_laws_cannot_be_cut() {
    let flat = find("flat", &[]).expect("in the table");
    assert!(Truncated::new(flat, None, None).is_none());
}
