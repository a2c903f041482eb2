//! The effective size of several means together (Vats, Flegal & Jones 2019).

use super::batch::batch_means;
use super::moments::mean;
use crate::maths::{cholesky, exp, gamma_quantile, ln, ln_gamma};

/// n (det L / det B)^(1/p) over p quantities: L the covariance of the draws about the overall means, B the
/// covariance of batch means about them times the batch length, with `batches` batches a chain.
/// `quantities[q][c]`: the draws of quantity q in chain c. `None` where a matrix is singular (a constant, a
/// quantity given twice, fewer batches than quantities) and where draws are not finite.
pub fn multivariate_effective(quantities: &[&[&[f64]]], batches: usize) -> Option<f64> {
    let p = quantities.len();
    let chains = quantities.first()?.len();
    let draws = quantities.first()?.first()?.len();
    let fits = |q: &&[&[f64]]| {
        q.len() == chains
            && q.iter()
                .all(|c| c.len() == draws && c.iter().all(|x| x.is_finite()))
    };
    if batches == 0 || draws < batches || !quantities.iter().all(fits) {
        return None;
    }
    let centred: Vec<Vec<f64>> = quantities
        .iter()
        .map(|q| {
            let all = q.concat();
            let centre = mean(&all);
            all.into_iter().map(|x| x - centre).collect()
        })
        .collect();
    let means: Vec<Vec<f64>> = centred
        .iter()
        .map(|x| {
            x.chunks_exact(draws)
                .flat_map(|chain| batch_means(chain, batches))
                .collect()
        })
        .collect();
    let length = (draws / batches) as f64;
    let spread = ln_determinant(&centred)?;
    let error = ln_determinant(&means)? + p as f64 * ln(length);
    Some((chains * draws) as f64 * exp((spread - error) / p as f64))
}

/// ln of the determinant of the covariance of centred rows, each scaled to unit variance first so that units
/// do not matter to the factorisation.
fn ln_determinant(rows: &[Vec<f64>]) -> Option<f64> {
    let p = rows.len();
    let divisor = rows.first()?.len().checked_sub(1).filter(|d| *d > 0)? as f64;
    let product = |a: &[f64], b: &[f64]| {
        let products: Vec<f64> = a.iter().zip(b).map(|(x, y)| x * y).collect();
        mean(&products) * (products.len() as f64 / divisor)
    };
    let scales: Vec<f64> = rows.iter().map(|r| product(r, r).sqrt()).collect();
    if scales.iter().any(|s| !(*s > 0.0 && s.is_finite())) {
        return None;
    }
    let mut matrix = vec![0.0; p * p];
    for i in 0..p {
        for j in 0..=i {
            let r = if i == j {
                1.0
            } else {
                product(&rows[i], &rows[j]) / scales[i] / scales[j]
            };
            matrix[i * p + j] = r;
            matrix[j * p + i] = r;
        }
    }
    if !cholesky(&mut matrix, p) {
        return None;
    }
    let mut total = 0.0;
    for i in 0..p {
        let pivot = matrix[i * p + i];
        if pivot < 1e-7 {
            return None;
        }
        total += 2.0 * (ln(pivot) + ln(scales[i]));
    }
    Some(total)
}

/// The multivariate effective size at which a confidence region at level 1 - `alpha` for `p` means has a
/// volume of `error` to the p times that of the spread of the draws.
pub fn minimum_effective(p: u64, alpha: f64, error: f64) -> f64 {
    let p = p as f64;
    let chi_square = 2.0 * gamma_quantile(p / 2.0, 1.0 - alpha);
    let ln_volume = std::f64::consts::LN_2 * 2.0 / p + ln(std::f64::consts::PI)
        - 2.0 / p * (ln(p) + ln_gamma(p / 2.0));
    exp(ln_volume) * chi_square / (error * error)
}
