//! What a run says about its quantities: values, their Monte Carlo errors, and whether the draws can be
//! believed. One quantity at a time, on plain slices, the same draws giving the same bits everywhere.
//!
//! The way through: [`estimate`] on the draws of one quantity; [`settle`] over the estimates of a point
//! (bounds for rare events need the effective size of the whole run); [`review`] against the goal.
//!
//! Choices among published variants:
//! - normal scores use (rank - 3/8)/(S + 1/4) over all S draws (Blom 1958), ties share their mean rank;
//! - effective sizes sum the initial positive pairs made monotone, without the extra even-lag term that
//!   some add after the last pair, and are capped at S log10 S (Vehtari et al. 2021);
//! - of an odd number of draws the middle one is left out when chains are split;
//! - quantiles interpolate linearly between order statistics (type 7 of Hyndman & Fan 1996).

mod batch;
mod condition;
mod effective;
mod estimate;
mod figure;
mod goal;
mod indicator;
mod jackknife;
mod lags;
mod moments;
mod multivariate;
mod note;
mod paired;
mod quantile;
mod r_hat;
mod ranks;
mod rare;
#[cfg(test)]
mod reference;
mod sequence;
mod stray;
mod summary;
mod tail;
mod transform;
#[cfg(test)]
mod truth;

pub use batch::{batch_count, pooled_batch_variance};
pub use effective::{Effective, effective};
pub use estimate::{Estimate, MINIMUM_DRAWS, QuantileEstimate, estimate};
pub use figure::{figure, place_for, r_hat_text, rounded, three_digits};
pub use goal::{Shortfall, Verdict, review, tolerance, unjudged};
pub use jackknife::{Jackknife, NoJackknife, jackknife};
pub use multivariate::{minimum_effective, multivariate_effective};
pub use note::{Note, count};
pub use paired::{Difference, Side, paired_difference};
pub use r_hat::{RHat, r_hat};
pub use rare::{exact_limits, settle};
pub use sequence::{InitialSequence, initial_sequence};
pub use summary::{Figure, GoalState, Paired, Summary, ends, levels};
pub use tail::{Pareto, fit as fit_tail, tail_size};
