//! The index of a tail: the shape of the generalised Pareto law fitted to the draws beyond a threshold
//! (Zhang & Stephens 2009; Vehtari, Simpson, Gelman, Yao & Gabry 2024). Moments of order 1/index and above do
//! not exist.

use super::moments::mean;
use crate::maths::{exp, ln, log1p};

/// Draws beyond the threshold below which no fit is made.
const FEWEST: usize = 20;

/// Shape and scale of a generalised Pareto law.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pareto {
    /// Above 0 for a heavy tail.
    pub index: f64,
    pub scale: f64,
}

/// The fit of Zhang & Stephens (2009) to ascending excesses over a threshold, with a grid of
/// `grid + floor(sqrt(n))` points (theirs: 20; Vehtari et al. 2024: 30). `None` where the excesses are not
/// positive up to their first quartile, or not finite.
pub fn fit(excesses: &[f64], grid: usize) -> Option<Pareto> {
    let count = excesses.len();
    let largest = *excesses.last()?;
    let quarter = (count as f64 / 4.0 + 0.5).floor() as usize;
    let quartile = *excesses.get(quarter.checked_sub(1)?)?;
    if !(quartile > 0.0 && largest.is_finite()) {
        return None;
    }
    // In units of the largest excess.
    let x: Vec<f64> = excesses.iter().map(|e| e / largest).collect();
    let quartile = quartile / largest;
    let n = count as f64;
    let points = grid + n.sqrt().floor() as usize;
    let m = points as f64;
    let shape = |theta: f64| {
        let logs: Vec<f64> = x.iter().map(|e| log1p(-theta * e)).collect();
        -mean(&logs)
    };
    // 1 over the scale; the limit of theta / k for an exponential tail.
    let rate = |theta: f64, k: f64| if k == 0.0 { 1.0 / mean(&x) } else { theta / k };
    let mut thetas = Vec::with_capacity(points);
    let mut profile = Vec::with_capacity(points);
    for j in 1..=points {
        let theta = 1.0 + (1.0 - (m / (j as f64 - 0.5)).sqrt()) / (3.0 * quartile);
        let k = shape(theta);
        thetas.push(theta);
        profile.push(n * (ln(rate(theta, k)) + k - 1.0));
    }
    let mut top = f64::NEG_INFINITY;
    for l in &profile {
        if *l > top {
            top = *l;
        }
    }
    let weights: Vec<f64> = profile.iter().map(|l| exp(l - top)).collect();
    let weighted: Vec<f64> = thetas.iter().zip(&weights).map(|(t, w)| t * w).collect();
    let theta = mean(&weighted) / mean(&weights);
    let k = shape(theta);
    let fit = Pareto {
        index: -k,
        scale: largest / rate(theta, k),
    };
    (fit.index.is_finite() && fit.scale.is_finite()).then_some(fit)
}

/// How many of `draws` draws count as a tail: 3 sqrt(S/r), at most a fifth, where r is the effective size
/// over S (Vehtari et al. 2024): draws that come in clusters need a longer tail.
pub fn tail_size(draws: usize, relative_efficiency: f64) -> usize {
    let r = if relative_efficiency < 1.0 {
        relative_efficiency
    } else {
        1.0
    };
    let s = draws as f64;
    let wanted = (3.0 * (s / r).sqrt()).ceil();
    let most = (0.2 * s).floor();
    (if wanted < most { wanted } else { most }) as usize
}

/// The larger index of both tails of ascending draws, drawn towards 0.5 as by ten more draws (Vehtari et al.
/// 2024). `None` where neither tail can be fitted: too few draws, or too many ties.
pub(super) fn tail_index(sorted: &[f64], size: usize) -> Option<f64> {
    let count = sorted.len();
    if size < FEWEST || count <= size {
        return None;
    }
    // Halved, so that no difference overflows; the index has no scale.
    let excess = |far: f64, near: f64| far / 2.0 - near / 2.0;
    let right: Vec<f64> = sorted[count - size..]
        .iter()
        .map(|x| excess(*x, sorted[count - size - 1]))
        .collect();
    let left: Vec<f64> = sorted[..size]
        .iter()
        .rev()
        .map(|x| excess(sorted[size], *x))
        .collect();
    let index = |excesses: &[f64]| {
        let n = excesses.len() as f64;
        fit(excesses, 30).map(|p| (n * p.index + 5.0) / (n + 10.0))
    };
    match (index(&left), index(&right)) {
        (Some(a), Some(b)) if b > a => Some(b),
        (Some(a), _) => Some(a),
        (None, b) => b,
    }
}
