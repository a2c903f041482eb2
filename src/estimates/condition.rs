//! The probability of a condition: draws of 0 and 1.

use super::estimate::{Estimate, MINIMUM_DRAWS, cautions, every_half_still, set_error};
use super::moments::{Scaled, mean, variance};
use super::note::Note;
use super::quantile::effective_at;
use super::r_hat::split_r_hat;
use super::rare::{ENOUGH, RARE_SHARE};
use super::stray::stuck;

/// Rank scores and distances from the median are straight-line functions of 0 and 1, so bulk and folded
/// R-hat coincide with the plain split one, and bulk and tail effective size with that of the mean.
pub(super) fn estimate_condition(e: &mut Estimate, chains: &[&[f64]]) {
    let total = (e.chains * e.draws) as u64;
    let seen = chains
        .iter()
        .flat_map(|c| c.iter())
        .filter(|x| **x != 0.0)
        .count() as u64;
    let share = seen as f64 / total as f64;
    if seen > 0 && seen < total && every_half_still(chains) {
        e.notes.push(Note::AllStuck);
        return;
    }
    e.value = Some(share);
    if e.draws < MINIMUM_DRAWS {
        e.notes.push(Note::Short {
            draws: e.draws as u64,
            needed: MINIMUM_DRAWS as u64,
        });
        return;
    }
    if seen == 0 || seen == total {
        e.notes.push(Note::Rare {
            seen,
            of: total,
            effective: None,
            limits: None,
        });
        return;
    }
    let scaled = Scaled::new(chains, 0.0);
    e.sd = variance(&scaled.values).map(|v| scaled.length(v.sqrt()));
    e.r_hat = split_r_hat(&scaled.values, e.draws);
    let effective = effective_at(chains, 0.5);
    let size = effective.map(|x| x.size);
    (e.effective_bulk, e.effective_tail, e.effective_mean) = (size, size, size);
    let still = stuck(
        chains,
        e.draws as f64 / effective.map_or(1.0, |x| x.tau_within),
    );
    if !still.is_empty() {
        e.notes.push(Note::Stuck { chains: still });
    }
    e.note_disagreement();
    let rarer = if share < 0.5 { share } else { 1.0 - share };
    let independent = size.map(|s| if s < total as f64 { s } else { total as f64 });
    if !e.chains_disagree()
        && rarer <= RARE_SHARE
        && independent.is_some_and(|s| rarer * s < ENOUGH)
    {
        e.notes.push(Note::Rare {
            seen,
            of: total,
            effective: independent,
            limits: None,
        });
    } else {
        set_error(e, &scaled, mean(&scaled.values), effective);
    }
    cautions(e);
}
