//! The error of a function of several means, by leaving out one block of draws after another (Quenouille
//! 1956; Tukey 1958), in blocks longer than ten autocorrelation times.

use super::batch::{batch_count, batch_means};
use super::moments::{mean, squares};
use crate::maths::ceil;

/// A function of several means with its Monte Carlo error.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Jackknife {
    /// The function at the overall means.
    pub value: f64,
    /// The same with the bias of order 1/n taken away.
    pub unbiased: f64,
    pub mcse: f64,
    /// Blocks over all chains.
    pub blocks: usize,
}

/// Why there is no error.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum NoJackknife {
    #[error("the quantities must have the same chains and equally many draws, all finite")]
    Shape,
    #[error("{blocks} blocks of ten autocorrelation times are too few; 20 are needed")]
    TooFewBlocks { blocks: usize },
    #[error("the function is not finite at the means of the draws")]
    NotFinite,
}

/// The function `f` of the means of quantities. `quantities[q][c]`: the draws of quantity q in chain c;
/// `tau`: the largest autocorrelation time among them.
pub fn jackknife(
    quantities: &[&[&[f64]]],
    tau: f64,
    f: impl Fn(&[f64]) -> f64,
) -> Result<Jackknife, NoJackknife> {
    let chains = quantities.first().map_or(0, |q| q.len());
    let draws = quantities
        .first()
        .and_then(|q| q.first())
        .map_or(0, |c| c.len());
    let even = quantities.iter().all(|q| {
        q.len() == chains
            && q.iter()
                .all(|c| c.len() == draws && c.iter().all(|x| x.is_finite()))
    });
    if draws == 0 || !even {
        return Err(NoJackknife::Shape);
    }
    let shortest = ceil(10.0 * if tau > 1.0 { tau } else { 1.0 });
    let most = (draws as f64 / shortest) as usize;
    let usual = batch_count(draws).unwrap_or(most);
    let a_chain = if usual < most { usual } else { most };
    let blocks = a_chain * chains;
    if blocks < 20 {
        return Err(NoJackknife::TooFewBlocks { blocks });
    }
    // Means of blocks, quantity by quantity.
    let means: Vec<Vec<f64>> = quantities
        .iter()
        .map(|q| {
            q.iter()
                .flat_map(|chain| batch_means(chain, a_chain))
                .collect()
        })
        .collect();
    let overall: Vec<f64> = means.iter().map(|m| mean(m)).collect();
    let n = blocks as f64;
    let value = f(&overall);
    let without: Vec<f64> = (0..blocks)
        .map(|b| {
            let left: Vec<f64> = overall
                .iter()
                .zip(&means)
                .map(|(all, m)| (n * all - m[b]) / (n - 1.0))
                .collect();
            f(&left)
        })
        .collect();
    if !value.is_finite() || without.iter().any(|v| !v.is_finite()) {
        return Err(NoJackknife::NotFinite);
    }
    let centre = mean(&without);
    Ok(Jackknife {
        value,
        unbiased: n * value - (n - 1.0) * centre,
        mcse: ((n - 1.0) / n * squares(&without, centre)).sqrt(),
        blocks,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::estimates::pooled_batch_variance;
    use crate::maths::{absolute, sin};

    fn waves(step: f64) -> Vec<f64> {
        (0..4000)
            .map(|i| sin(step * (i * i % 997) as f64) + 2.0)
            .collect()
    }

    #[test]
    fn of_one_mean_it_is_batch_means() {
        let x = waves(1.7);
        let chains = [&x[..2000], &x[2000..]];
        let j = jackknife(&[&chains], 1.0, |m| m[0]).expect("long enough");
        let batches =
            pooled_batch_variance(&chains, batch_count(2000).expect("long")).expect("varies");
        assert!(absolute(j.mcse * j.mcse / batches - 1.0) < 1e-9);
        assert!(absolute(j.unbiased - j.value) < 1e-12);
    }

    #[test]
    fn a_ratio_agrees_with_the_delta_method() {
        let (x, y) = (waves(1.7), waves(0.9));
        let j = jackknife(&[&[&x], &[&y]], 3.0, |m| m[0] / m[1]).expect("long enough");
        let (a, b) = (mean(&x), mean(&y));
        let linear: Vec<f64> = x.iter().zip(&y).map(|(x, y)| (x - a / b * y) / b).collect();
        let delta = pooled_batch_variance(&[&linear], j.blocks)
            .expect("varies")
            .sqrt();
        assert!(absolute(j.mcse / delta - 1.0) < 0.01, "{} {delta}", j.mcse);
    }

    #[test]
    fn refuses_what_it_cannot_do() {
        let x = waves(1.7);
        assert_eq!(
            jackknife(&[&[&x]], 30.0, |m| m[0]),
            Err(NoJackknife::TooFewBlocks { blocks: 13 })
        );
        assert_eq!(
            jackknife(&[&[&x]], 1.0, |m| 1.0 / (m[0] - m[0])),
            Err(NoJackknife::NotFinite)
        );
        assert_eq!(
            jackknife(&[&[&x], &[&x[1..]]], 1.0, |m| m[0]),
            Err(NoJackknife::Shape)
        );
    }
}
