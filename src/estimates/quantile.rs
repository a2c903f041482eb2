//! Quantiles and their Monte Carlo errors (Vehtari et al. 2021, section 4).

use super::effective::{Effective, effective_of};
use super::indicator::Indicators;
use super::lags::Lags;
use crate::maths::beta_quantile;

/// The quantile at a level of ascending values (at least one), by linear interpolation between order
/// statistics (type 7 of Hyndman & Fan 1996). `None` between minus and plus infinity.
pub(super) fn quantile(sorted: &[f64], level: f64) -> Option<f64> {
    let place = (sorted.len() - 1) as f64 * level;
    let below = place.floor();
    let part = place - below;
    let low = sorted[below as usize];
    let high = sorted[if below as usize + 1 < sorted.len() {
        below as usize + 1
    } else {
        below as usize
    }];
    let step = high - low;
    let value = if part == 0.0 || low == high {
        low
    } else if step.is_finite() {
        low + step * part
    } else {
        low * (1.0 - part) + high * part
    };
    (!value.is_nan()).then_some(value)
}

/// The effective size of "at most this value" over chains of equal length; where every draw is at most
/// the value, of "below this value".
pub(super) fn effective_at(chains: &[&[f64]], value: f64) -> Option<Effective> {
    let at_most = Indicators::new(chains, |x| x <= value);
    let indicators = if at_most.all() {
        Indicators::new(chains, |x| x < value)
    } else {
        at_most
    };
    let means = indicators.means();
    effective_of(&mut Lags::new(indicators), &means)
}

/// Half the distance of the order statistics at the 16 % and 84 % points of Beta(ESS p + 1, ESS (1-p) + 1).
/// Zero where they tie; `None` where one of them is infinite.
pub(super) fn quantile_error(sorted: &[f64], level: f64, effective: f64) -> Option<f64> {
    // The normal distribution function at -1 and 1.
    let (low, high) = (0.158_655_253_931_457, 0.841_344_746_068_543);
    let (a, b) = (effective * level + 1.0, effective * (1.0 - level) + 1.0);
    let count = sorted.len() as f64;
    let at = |rank: f64| {
        let rank = if rank < 1.0 {
            1.0
        } else if rank > count {
            count
        } else {
            rank
        };
        sorted[rank as usize - 1]
    };
    let lower = at((beta_quantile(a, b, low) * count).floor());
    let upper = at((beta_quantile(a, b, high) * count).ceil());
    let (width, halves) = (upper - lower, upper / 2.0 - lower / 2.0);
    let error = if width.is_finite() {
        width / 2.0
    } else {
        halves
    };
    error.is_finite().then_some(error)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn infinities_do_not_make_nan() {
        let inf = f64::INFINITY;
        assert_eq!(quantile(&[-inf, inf], 0.5), None);
        assert_eq!(quantile(&[-inf, inf], 0.0), Some(-inf));
        assert_eq!(quantile(&[1.0, inf], 0.5), Some(inf));
        assert_eq!(quantile(&[inf, inf], 0.5), Some(inf));
        assert_eq!(quantile(&[-1.7e308, 1.7e308], 0.5), Some(0.0));
        assert_eq!(quantile(&[3.0], 0.975), Some(3.0));
    }

    /// The order statistics around a quantile lie about one standard error of the count away on each side, at
    /// every effective size.
    #[test]
    fn errors_of_uniform_quantiles() {
        let n = 300_000;
        let sorted: Vec<f64> = (0..n)
            .map(|i| (f64::from(i) + 0.5) / f64::from(n))
            .collect();
        for level in [0.025, 0.05, 0.3, 0.5, 0.975] {
            let mut effective = 100.0;
            while effective < 400_000.0 {
                let error = quantile_error(&sorted, level, effective).expect("finite");
                let want = (level * (1.0 - level) / effective).sqrt();
                let ratio = error / want;
                assert!((0.8..1.2).contains(&ratio), "{level} {effective}: {ratio}");
                effective *= 1.0173;
            }
        }
    }
}
