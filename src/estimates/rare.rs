//! Limits for the probability of a rare condition (Clopper & Pearson 1934), on effective counts.

use super::estimate::Estimate;
use super::note::Note;
use crate::maths::beta_quantile;

/// A condition counts as rare while fewer than this many effective draws fall on its rarer side.
pub(super) const ENOUGH: f64 = 10.0;
/// ... and its rarer side is no more than this share of the draws.
pub(super) const RARE_SHARE: f64 = 0.2;

/// 95 % limits (2.5 % on each side) of a probability seen with a share among `effective` independent draws.
/// Counts need not be whole.
pub fn exact_limits(share: f64, effective: f64) -> (f64, f64) {
    let seen = share * effective;
    let missed = (1.0 - share) * effective;
    let low = if seen > 0.0 {
        beta_quantile(seen, missed + 1.0, 0.025)
    } else {
        0.0
    };
    let high = if missed > 0.0 {
        beta_quantile(seen + 1.0, missed, 0.975)
    } else {
        1.0
    };
    (low, high)
}

/// Gives the rare conditions among the estimates of a point their limits. A condition that was seen seldom
/// or never cannot tell the effective size of its own draws, so the least one of the point's other
/// quantities stands for the run (bulk or tail, conditions only where there is nothing else). Where chains disagree
/// about any quantity, nothing tells the effective size of the run.
pub fn settle(estimates: &mut [Estimate]) {
    let disagree = estimates.iter().any(Estimate::chains_disagree);
    let least = |conditions: bool| {
        let mut least: Option<f64> = None;
        for e in estimates.iter().filter(|e| e.condition == conditions) {
            for size in [e.effective_bulk, e.effective_tail].into_iter().flatten() {
                if least.is_none_or(|l| size < l) {
                    least = Some(size);
                }
            }
        }
        least
    };
    let run = least(false).or_else(|| least(true));
    for e in estimates {
        let total = (e.chains * e.draws) as f64;
        let share = e.value;
        for note in e.notes.iter_mut().filter(|note| note.is_seldom()) {
            let size = match (e.effective_bulk, run) {
                (Some(own), Some(run)) if run > own => Some(own),
                (own, run) => run.or(own),
            };
            let size = size.filter(|_| !disagree);
            let size = size.map(|s| if s < total { s } else { total });
            e.effective_run = size;
            if let Note::Rare {
                effective, limits, ..
            } = note
            {
                *effective = size;
                *limits = size
                    .zip(share)
                    .map(|(size, share)| exact_limits(share, size));
                e.limits = *limits;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A quantity about which chains disagree has an effective size that means nothing: it stands for no run, and
    /// neither does that of another.
    #[test]
    fn chains_that_disagree_tell_no_size_of_the_run() {
        let never = Estimate {
            condition: true,
            chains: 4,
            draws: 1000,
            value: Some(0.0),
            notes: vec![Note::Rare {
                seen: 0,
                of: 4000,
                effective: None,
                limits: None,
            }],
            ..Estimate::default()
        };
        let sized = Estimate {
            effective_bulk: Some(500.0),
            ..Estimate::default()
        };
        let mut apart = sized.clone();
        apart.notes.push(Note::Disagree { r_hat: 1.7 });
        let mut well = [never.clone(), sized.clone()];
        settle(&mut well);
        assert_eq!(well[0].effective_run, Some(500.0));
        assert!(well[0].limits.is_some());
        let mut badly = [never, sized, apart];
        settle(&mut badly);
        assert_eq!((badly[0].effective_run, badly[0].limits), (None, None));
    }

    #[test]
    fn limits_of_few_and_none() {
        // None of n: 1 - 0.025^(1/n), by algebra. 0.025^(1/100) = 0.963783...
        let (low, high) = exact_limits(0.0, 100.0);
        assert_eq!(low, 0.0);
        assert!((high - 0.036_216_693_1).abs() < 1e-9, "{high}");
        assert_eq!(exact_limits(1.0, 100.0).1, 1.0);
        assert!((exact_limits(1.0, 100.0).0 - (1.0 - high)).abs() < 1e-12);
        // 3 of 50: the limits solve the binomial tails (checked by summing them below).
        let (low, high) = exact_limits(0.06, 50.0);
        let tail = |p: f64, from: usize, to: usize| -> f64 {
            (from..=to)
                .map(|k| {
                    let mut term = 1.0;
                    for i in 0..k {
                        term *= (50 - i) as f64 / (i + 1) as f64 * p;
                    }
                    for _ in 0..50 - k {
                        term *= 1.0 - p;
                    }
                    term
                })
                .sum()
        };
        assert!((tail(low, 3, 50) - 0.025).abs() < 1e-10);
        assert!((tail(high, 0, 3) - 0.025).abs() < 1e-10);
    }
}
