//! The figures of one quantity from the draws of all its chains.

use super::batch::{batch_count, pooled_batch_variance};
use super::condition::estimate_condition;
use super::effective::{Effective, effective_flat};
use super::moments::{Scaled, halves, mean, squares, variance};
use super::note::Note;
use super::quantile::{effective_at, quantile, quantile_error};
use super::r_hat::{RHat, split_r_hat};
use super::ranks::Ordered;
use super::rare::{ENOUGH, RARE_SHARE};
use super::stray::{stray, stuck};
use super::tail::{tail_index, tail_size};
use crate::plan::MOST_DRAWS;

/// Draws a chain below which no error, R-hat or effective size is given: 20 batches of two draws.
pub const MINIMUM_DRAWS: usize = 40;
/// An effective size under this has too large an error of its own.
const FEW: f64 = 100.0;
/// R-hat above this stands in the notes.
const UNMIXED: f64 = 1.05;
/// ... and above this no error is given: the bound in common use since Gelman & Rubin (1992). Errors count
/// what moves within chains, and so say too little where chains lie apart.
const DISAGREE: f64 = 1.1;

/// What the draws say about one quantity. A figure that does not exist is `None`, with the reason in
/// `notes`; nothing here is ever NaN or infinite but `value` and quantiles of infinite draws.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Estimate {
    pub condition: bool,
    pub chains: usize,
    /// A chain.
    pub draws: usize,
    /// The mean; of a condition, its probability.
    pub value: Option<f64>,
    /// Monte Carlo standard error of the value: the larger of the next two.
    pub mcse: Option<f64>,
    /// From the standard deviation and the effective size of the mean (Vehtari et al. 2021).
    pub mcse_lags: Option<f64>,
    /// From batch means pooled over the chains.
    pub mcse_batches: Option<f64>,
    /// Standard deviation of the draws: the standard uncertainty of the quantity.
    pub sd: Option<f64>,
    pub sd_mcse: Option<f64>,
    /// At the levels asked for, in their order; none for a condition.
    pub quantiles: Vec<QuantileEstimate>,
    /// The larger of bulk and folded.
    pub r_hat: Option<f64>,
    pub effective_bulk: Option<f64>,
    /// The lesser of those at 5 % and 95 %.
    pub effective_tail: Option<f64>,
    /// For the mean itself, from the draws as they are.
    pub effective_mean: Option<f64>,
    /// The larger of both tails.
    pub tail_index: Option<f64>,
    /// 95 % limits of the probability of a rare condition.
    pub limits: Option<(f64, f64)>,
    /// For a quantity that (hardly) ever took one value: the effective size of the run, once
    /// [`super::settle`] has found it.
    pub effective_run: Option<f64>,
    pub notes: Vec<Note>,
}

/// A quantile of the draws.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct QuantileEstimate {
    pub level: f64,
    pub value: Option<f64>,
    pub mcse: Option<f64>,
}

impl Estimate {
    /// Are errors withheld because chains stand still or disagree?
    pub fn chains_disagree(&self) -> bool {
        self.notes.iter().any(Note::is_disagreement)
    }

    /// Notes an R-hat above which there is no error.
    pub(super) fn note_disagreement(&mut self) {
        // Chains that stand still or stray have been named, which says more.
        if let Some(r_hat) = self
            .r_hat
            .filter(|r| *r > DISAGREE && !self.chains_disagree())
        {
            self.notes.push(Note::Disagree { r_hat });
        }
    }
}

/// The estimate of one quantity. `chains`: the draws of each chain, equally many; `condition`: the draws
/// are 0 and 1 and the mean is a probability; `levels`: quantiles wanted, each in (0, 1).
///
/// # Panics
/// When chains differ in length or a level lies outside [0, 1].
pub fn estimate(chains: &[&[f64]], condition: bool, levels: &[f64]) -> Estimate {
    let draws = chains.first().map_or(0, |chain| chain.len());
    assert!(
        chains.iter().all(|c| c.len() == draws),
        "chains of equal length"
    );
    assert!(
        levels.iter().all(|l| (0.0..=1.0).contains(l)),
        "levels between 0 and 1"
    );
    let mut e = Estimate {
        condition,
        chains: chains.len(),
        draws,
        ..Estimate::default()
    };
    if !condition {
        e.quantiles = levels
            .iter()
            .map(|level| QuantileEstimate {
                level: *level,
                value: None,
                mcse: None,
            })
            .collect();
    }
    let total = (chains.len() * draws) as u64;
    let all = || chains.iter().flat_map(|chain| chain.iter());
    let missing = all().filter(|x| x.is_nan()).count() as u64;
    if total == 0 {
        e.notes.push(Note::NoDraws);
    } else if total > MOST_DRAWS {
        e.notes.push(Note::TooManyDraws);
    } else if missing > 0 {
        e.notes.push(Note::NotANumber {
            count: missing,
            of: total,
        });
    } else if condition {
        estimate_condition(&mut e, chains);
    } else {
        estimate_number(&mut e, chains);
    }
    e
}

fn estimate_number(e: &mut Estimate, chains: &[&[f64]]) {
    let draws = e.draws;
    let ordered = Ordered::new(chains);
    let sorted = &ordered.values;
    let total = sorted.len();
    let infinite = sorted.iter().filter(|x| x.is_infinite()).count();
    if infinite > 0 {
        e.notes.push(Note::Infinite {
            count: infinite as u64,
            of: total as u64,
        });
    }
    let constant = sorted[0] == sorted[total - 1];
    if !constant && every_half_still(chains) {
        e.notes.push(Note::AllStuck);
        return;
    }
    for q in &mut e.quantiles {
        q.value = quantile(sorted, q.level);
    }
    if constant {
        if infinite == 0 {
            e.value = Some(sorted[0]);
        }
        e.notes.push(Note::Constant { value: sorted[0] });
        return;
    }
    let median = quantile(sorted, 0.5);
    let scaled = match median {
        Some(centre) if infinite == 0 => Some(Scaled::new(chains, centre)),
        _ => None,
    };
    let mut centre = 0.0;
    if let Some(scaled) = &scaled {
        centre = mean(&scaled.values);
        e.value = Some(scaled.value(centre));
        e.sd = variance(&scaled.values).map(|v| scaled.length(v.sqrt()));
    }
    if draws < MINIMUM_DRAWS {
        e.notes.push(Note::Short {
            draws: draws as u64,
            needed: MINIMUM_DRAWS as u64,
        });
        return;
    }

    let scores = ordered.scores();
    let bulk = split_r_hat(&scores, draws);
    let effective_bulk = effective_flat(&scores, draws);
    drop(scores);
    let folded = median
        .and_then(|m| ordered.folded_scores(m))
        .and_then(|scores| split_r_hat(&scores, draws));
    e.r_hat = RHat { bulk, folded }.larger();
    e.effective_bulk = effective_bulk.map(|x| x.size);
    e.effective_tail = effective_tail(chains, sorted);

    let tau_within = effective_bulk.map_or(1.0, |x| x.tau_within);
    let still = stuck(chains, draws as f64 / tau_within);
    if !still.is_empty() {
        e.notes.push(Note::Stuck { chains: still });
    }
    let efficiency = e
        .effective_tail
        .or(e.effective_bulk)
        .map_or(1.0, |x| x / total as f64);
    e.tail_index = tail_index(sorted, tail_size(total, efficiency));
    let heavy = e.tail_index.filter(|index| *index > 0.5);
    if let Some(scaled) = scaled {
        let tails = e.tail_index;
        error_of_mean(e, &scaled, centre, &ordered, heavy.is_some());
        if let Some(index) = heavy {
            e.notes.push(Note::HeavyTail { index });
            e.sd = None;
            if index >= 1.0 {
                e.value = None;
            }
        } else if tails.is_none_or(|index| index <= 0.25) && !e.chains_disagree() {
            // Beyond 1/4 the fourth moment does not exist.
            e.sd_mcse = error_of_sd(&scaled, centre, draws);
        }
    }
    e.note_disagreement();
    errors_of_quantiles(e, chains, sorted);
    cautions(e);
}

/// The error of the mean, or the reason why there is none.
fn error_of_mean(e: &mut Estimate, scaled: &Scaled, centre: f64, ordered: &Ordered, heavy: bool) {
    let total = scaled.values.len() as f64;
    let effective = effective_flat(&scaled.values, e.draws);
    e.effective_mean = effective.map(|x| x.size);
    if heavy {
        return;
    }
    let (value, count) = ordered.mode();
    let others = total - count as f64;
    let size = e
        .effective_mean
        .map_or(0.0, |s| if s < total { s } else { total });
    if others / total <= RARE_SHARE && others / total * size < ENOUGH {
        e.notes.push(Note::NearlyConstant {
            value,
            others: others as u64,
            of: total as u64,
        });
        return;
    }
    set_error(e, scaled, centre, effective);
}

/// Both errors of the mean, unless chains stand still or stray.
pub(super) fn set_error(
    e: &mut Estimate,
    scaled: &Scaled,
    centre: f64,
    effective: Option<Effective>,
) {
    let (Some(batches), Some(effective)) = (batch_count(e.draws), effective) else {
        return;
    };
    if let Some((list, errors)) = stray(&scaled.values, e.draws, batches, effective.tau_within) {
        e.notes.push(Note::Stray {
            chains: list,
            of: e.chains,
            errors,
        });
    }
    e.note_disagreement();
    if e.chains_disagree() {
        return;
    }
    let total = scaled.values.len() as f64;
    let spread = squares(&scaled.values, centre) / (total - 1.0);
    let by_lags = scaled.length((spread / effective.size).sqrt());
    let chains: Vec<&[f64]> = scaled.values.chunks_exact(e.draws).collect();
    let by_batches = pooled_batch_variance(&chains, batches).map(|v| scaled.length(v.sqrt()));
    e.mcse_lags = Some(by_lags);
    e.mcse_batches = by_batches;
    e.mcse = Some(match by_batches {
        Some(b) if b > by_lags => b,
        _ => by_lags,
    });
}

/// The error of the standard deviation by the delta method on the squared distances from the mean.
pub(super) fn error_of_sd(scaled: &Scaled, centre: f64, draws: usize) -> Option<f64> {
    let distances: Vec<f64> = scaled
        .values
        .iter()
        .map(|y| (y - centre) * (y - centre))
        .collect();
    let effective = effective_flat(&distances, draws)?;
    let total = distances.len() as f64;
    let second = mean(&distances);
    let spread = squares(&distances, second) / total;
    let sd = (second * total / (total - 1.0)).sqrt();
    Some(scaled.length((spread / effective.size).sqrt() / (2.0 * sd)))
}

/// The lesser of the effective sizes at 5 % and 95 %.
fn effective_tail(chains: &[&[f64]], sorted: &[f64]) -> Option<f64> {
    let at = |level: f64| quantile(sorted, level).and_then(|q| effective_at(chains, q));
    match (at(0.05), at(0.95)) {
        (Some(a), Some(b)) => Some(if b.size < a.size { b.size } else { a.size }),
        (a, b) => a.or(b).map(|x| x.size),
    }
}

fn errors_of_quantiles(e: &mut Estimate, chains: &[&[f64]], sorted: &[f64]) {
    if e.chains_disagree() {
        return;
    }
    let mut tied = Vec::new();
    for q in &mut e.quantiles {
        let effective = q.value.and_then(|value| effective_at(chains, value));
        q.mcse = effective.and_then(|x| quantile_error(sorted, q.level, x.size));
        if q.mcse == Some(0.0) || q.value.is_some() && effective.is_none() {
            q.mcse = None;
            tied.push(q.level);
        }
    }
    if !tied.is_empty() {
        e.notes.push(Note::Ties { levels: tied });
    }
}

/// What to know before believing figures that do exist.
pub(super) fn cautions(e: &mut Estimate) {
    if e.chains == 1 {
        e.notes.push(Note::OneChain);
    }
    if let Some(r_hat) = e.r_hat.filter(|r| *r > UNMIXED && *r <= DISAGREE) {
        e.notes.push(Note::NotMixed { r_hat });
    }
    let least = match (e.effective_bulk, e.effective_tail) {
        (Some(a), Some(b)) if b < a => Some(b),
        (a, b) => a.or(b),
    };
    if let Some(size) = least.filter(|s| *s < FEW) {
        e.notes.push(Note::FewEffective { size });
    }
}

/// Does no half of any chain move?
pub(super) fn every_half_still(chains: &[&[f64]]) -> bool {
    chains
        .iter()
        .all(|chain| halves(chain, chain.len()).all(|half| half.iter().all(|x| *x == half[0])))
}
