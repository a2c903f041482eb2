//! Effective sizes (Vehtari, Gelman, Simpson, Carpenter & Bürkner 2021, section 3.2).

use super::lags::{Lags, Series, Source};
use super::moments::{halves, mean, variance};
use crate::maths::ln;

/// An effective size and what it was made of.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Effective {
    /// Independent draws that would give the same error of the mean; at most S log10 S.
    pub size: f64,
    /// Autocorrelation time, disagreement between the chains included.
    pub tau: f64,
    /// Index of the last pair of lags that entered it.
    pub last_pair: usize,
    /// Autocorrelation time from within the chains alone.
    pub tau_within: f64,
}

/// The effective size for the mean of chains of equal length, split into halves. `None` for fewer than
/// four draws a chain, for draws that are not finite, and where nothing varies.
pub fn effective(chains: &[&[f64]]) -> Option<Effective> {
    let draws = chains.first().map_or(0, |chain| chain.len());
    if draws < 4
        || chains
            .iter()
            .any(|c| c.len() != draws || c.iter().any(|x| !x.is_finite()))
    {
        return None;
    }
    let flat: Vec<f64> = chains.concat();
    effective_flat(&flat, draws)
}

/// The same for finite draws laid chain after chain, four or more a chain.
pub(super) fn effective_flat(flat: &[f64], draws: usize) -> Option<Effective> {
    let means: Vec<f64> = halves(flat, draws).map(mean).collect();
    effective_of(&mut Lags::new(Series::halves(flat, draws)), &means)
}

/// From the autocovariances of halves and the means of the halves.
pub(super) fn effective_of<S: Source>(lags: &mut Lags<S>, means: &[f64]) -> Option<Effective> {
    let length = lags.length();
    let within = lags.get(0);
    let n = length as f64;
    let total = (n - 1.0) / n * within + variance(means).unwrap_or(0.0);
    if !(total > 0.0 && total.is_finite()) {
        return None;
    }
    let mut all = Pairs::default();
    // Every half constant, at different values: nothing is known from within.
    let mut inner = Pairs {
        ended: within <= 0.0,
        ..Pairs::default()
    };
    let mut pair = 0;
    while 2 * pair + 1 < length && !(all.ended && inner.ended) {
        let (even, odd) = (lags.get(2 * pair), lags.get(2 * pair + 1));
        let rho = |g: f64| 1.0 - (within - g) / total;
        let first = if pair == 0 { 1.0 } else { rho(even) };
        all.add(first + rho(odd));
        if within > 0.0 {
            inner.add((even + odd) / within);
        }
        pair += 1;
    }
    let draws = (length * lags.series()) as f64;
    let least = std::f64::consts::LN_10 / ln(draws);
    let tau = if all.tau() > least { all.tau() } else { least };
    let tau_within = if inner.tau() > least {
        inner.tau()
    } else {
        least
    };
    Some(Effective {
        size: draws / tau,
        tau: all.tau(),
        last_pair: all.count - 1,
        tau_within,
    })
}

/// The initial positive pairs of autocorrelations, made monotone (Geyer 1992). The first always counts.
#[derive(Default)]
struct Pairs {
    count: usize,
    least: f64,
    sum: f64,
    ended: bool,
}

impl Pairs {
    fn add(&mut self, pair: f64) {
        if self.ended {
            return;
        }
        if self.count > 0 && pair <= 0.0 {
            self.ended = true;
            return;
        }
        if self.count == 0 || pair < self.least {
            self.least = pair;
        }
        self.sum += self.least;
        self.count += 1;
    }

    fn tau(&self) -> f64 {
        2.0 * self.sum - 1.0
    }
}
