//! R-hat (Gelman & Rubin 1992) on split, rank-normalised chains (Vehtari et al. 2021).

use super::moments::{halves, mean, variance};
use super::quantile::quantile;
use super::ranks::Ordered;

/// R-hat of scores laid chain after chain, halves against halves. `None` where no half varies.
pub(super) fn split_r_hat(flat: &[f64], draws: usize) -> Option<f64> {
    let length = (draws / 2) as f64;
    let means: Vec<f64> = halves(flat, draws).map(mean).collect();
    let variances: Option<Vec<f64>> = halves(flat, draws).map(variance).collect();
    let within = mean(&variances?);
    let between = variance(&means)?;
    (within > 0.0).then(|| (((length - 1.0) / length * within + between) / within).sqrt())
}

/// R-hat by ranks: that of the draws (bulk) and that of their distances from the median (folded).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RHat {
    pub bulk: Option<f64>,
    pub folded: Option<f64>,
}

impl RHat {
    /// The larger of the two; of one, that one.
    pub fn larger(self) -> Option<f64> {
        match (self.bulk, self.folded) {
            (Some(a), Some(b)) if b > a => Some(b),
            (Some(a), _) => Some(a),
            (None, b) => b,
        }
    }
}

/// Rank-normalised split R-hat of chains of equal length without NaN. `None` in both for fewer than four
/// draws a chain and where no half varies.
pub fn r_hat(chains: &[&[f64]]) -> RHat {
    let draws = chains.first().map_or(0, |chain| chain.len());
    if draws < 4
        || chains
            .iter()
            .any(|c| c.len() != draws || c.iter().any(|x| x.is_nan()))
    {
        return RHat {
            bulk: None,
            folded: None,
        };
    }
    let ordered = Ordered::new(chains);
    let median = quantile(&ordered.values, 0.5);
    RHat {
        bulk: split_r_hat(&ordered.scores(), draws),
        folded: median
            .and_then(|m| ordered.folded_scores(m))
            .and_then(|scores| split_r_hat(&scores, draws)),
    }
}
