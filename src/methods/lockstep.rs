//! The lane loops of the random walk: eight lanes in a register where the machine has them so wide, with the
//! same bits where it has not, since no lane's arithmetic crosses to another. Where there are eight lanes or four,
//! the compiler is told so: then it knows every distance.

use super::gain::AdaptiveScale;
use multiversion::multiversion;

/// Makes steps of the normals, each lane by its scale, and proposes for each moved coordinate its position and its
/// row of the factor times the steps (in the order of the columns), or just its step without a factor. Coordinate `on[i]` of `position` and `proposal`, `i` of
/// `normals`, the packed rows of `factor`: all with lanes fastest.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2")))]
pub fn add_steps(
    on: &[usize],
    factor: Option<&[f64]>,
    scales: &[AdaptiveScale],
    normals: &mut [f64],
    position: &[f64],
    proposal: &mut [f64],
) {
    let lanes = scales.len();
    match lanes {
        8 => add_block::<8>(on, factor, scales, normals, position, proposal, 8, 0),
        4 => add_block::<4>(on, factor, scales, normals, position, proposal, 4, 0),
        _ => (0..lanes).for_each(|first| {
            add_block::<1>(
                on, factor, scales, normals, position, proposal, lanes, first,
            )
        }),
    }
}

#[inline(always)]
#[expect(
    clippy::too_many_arguments,
    reason = "those of `add_steps`, and which lanes"
)]
fn add_block<const N: usize>(
    on: &[usize],
    factor: Option<&[f64]>,
    scales: &[AdaptiveScale],
    normals: &mut [f64],
    position: &[f64],
    proposal: &mut [f64],
    lanes: usize,
    first: usize,
) {
    let scale: [f64; N] = std::array::from_fn(|k| scales[first + k].value());
    let mut row = 0;
    for (i, &coordinate) in on.iter().enumerate() {
        // In this loop, not in one before it: that would be turned into one across the rows, by gathering.
        let z: &mut [f64; N] = block_mut(normals, i * lanes + first);
        for k in 0..N {
            z[k] *= scale[k];
        }
        let mut moved: [f64; N] = *block(position, coordinate * lanes + first);
        match factor {
            Some(factor) => {
                let row_of_factor = &factor[row * lanes..][..(i + 1) * lanes];
                let columns = row_of_factor.chunks_exact(lanes);
                for (l, z) in columns.zip(normals.chunks_exact(lanes)) {
                    let l: &[f64; N] = block(l, first);
                    let z: &[f64; N] = block(z, first);
                    for k in 0..N {
                        moved[k] += l[k] * z[k];
                    }
                }
                row += i + 1;
            }
            None => {
                let z: &[f64; N] = block(normals, i * lanes + first);
                for k in 0..N {
                    moved[k] += z[k];
                }
            }
        }
        *block_mut(proposal, coordinate * lanes + first) = moved;
    }
}

/// A proposal of every lane and where the lanes stand, coordinates with lanes fastest.
pub struct Trial<'a> {
    /// The moved coordinates; elsewhere proposal and position are the same.
    pub on: &'a [usize],
    pub active: &'a [bool],
    /// What a lane's log density may fall by, and less.
    pub patience: &'a [f64],
    pub proposal: &'a [f64],
    /// The log density at the proposal; then how far it is above that at the position.
    pub density: &'a mut [f64],
    pub position: &'a mut [f64],
    pub log_density: &'a mut [f64],
    /// 1 where the step counts, or 0.
    pub counts: u64,
    pub steps: &'a mut [u64],
    pub accepted: &'a mut [u64],
}

/// Moves the active lanes whose proposals are accepted.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2")))]
pub fn decide(mut trial: Trial) {
    let lanes = trial.active.len();
    match lanes {
        8 => decide_block::<8>(&mut trial, 8, 0),
        4 => decide_block::<4>(&mut trial, 4, 0),
        _ => (0..lanes).for_each(|first| decide_block::<1>(&mut trial, lanes, first)),
    }
}

#[inline(always)]
fn decide_block<const N: usize>(trial: &mut Trial, lanes: usize, first: usize) {
    let active: &[bool; N] = block(trial.active, first);
    let patience: &[f64; N] = block(trial.patience, first);
    let density: &mut [f64; N] = block_mut(trial.density, first);
    let log_density: &mut [f64; N] = block_mut(trial.log_density, first);
    let steps: &mut [u64; N] = block_mut(trial.steps, first);
    let accepted: &mut [u64; N] = block_mut(trial.accepted, first);
    // Whole words, so that all lanes are decided in a register.
    let mut accept = [0_u64; N];
    for k in 0..N {
        let active = u64::from(active[k]);
        let rise = density[k] - log_density[k];
        accept[k] = active & u64::from(rise > -patience[k]);
        log_density[k] = if accept[k] != 0 {
            density[k]
        } else {
            log_density[k]
        };
        density[k] = rise;
        steps[k] += active & trial.counts;
        accepted[k] += accept[k] & trial.counts;
    }
    for &coordinate in trial.on {
        let new: &[f64; N] = block(trial.proposal, coordinate * lanes + first);
        let x: &mut [f64; N] = block_mut(trial.position, coordinate * lanes + first);
        for k in 0..N {
            x[k] = if accept[k] != 0 { new[k] } else { x[k] };
        }
    }
}

/// Running mean and packed lower covariance of each lane, and room for one deviation.
pub struct Moments<'a> {
    pub mean: &'a mut [f64],
    pub covariance: &'a mut [f64],
    pub deviation: &'a mut [f64],
}

/// Takes the positions of the active lanes into their moments, each with its own gain.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))
)]
#[cfg_attr(feature = "no-avx512", multiversion(targets("x86_64+avx2")))]
pub fn add_to_moments(
    on: &[usize],
    position: &[f64],
    active: &[bool],
    gain: &[f64],
    mut moments: Moments,
) {
    let lanes = active.len();
    match lanes {
        8 => moments_block::<8>(on, position, active, gain, &mut moments, 8, 0),
        4 => moments_block::<4>(on, position, active, gain, &mut moments, 4, 0),
        _ => (0..lanes).for_each(|first| {
            moments_block::<1>(on, position, active, gain, &mut moments, lanes, first)
        }),
    }
}

#[inline(always)]
fn moments_block<const N: usize>(
    on: &[usize],
    position: &[f64],
    active: &[bool],
    gain: &[f64],
    moments: &mut Moments,
    lanes: usize,
    first: usize,
) {
    let gain: &[f64; N] = block(gain, first);
    let active: &[bool; N] = block(active, first);
    for (i, &coordinate) in on.iter().enumerate() {
        let here: &[f64; N] = block(position, coordinate * lanes + first);
        let mean: &mut [f64; N] = block_mut(moments.mean, i * lanes + first);
        let deviation: &mut [f64; N] = block_mut(moments.deviation, i * lanes + first);
        for k in 0..N {
            deviation[k] = here[k] - mean[k];
            let moved = mean[k] + gain[k] * deviation[k];
            mean[k] = if active[k] { moved } else { mean[k] };
        }
    }
    let mut at = first;
    for i in 0..on.len() {
        let a: &[f64; N] = block(moments.deviation, i * lanes + first);
        for j in 0..=i {
            let b: &[f64; N] = block(moments.deviation, j * lanes + first);
            let covariance: &mut [f64; N] = block_mut(moments.covariance, at);
            for k in 0..N {
                let new = (1.0 - gain[k]) * (covariance[k] + gain[k] * (a[k] * b[k]));
                covariance[k] = if active[k] { new } else { covariance[k] };
            }
            at += lanes;
        }
    }
}

#[inline(always)]
fn block<T, const N: usize>(values: &[T], from: usize) -> &[T; N] {
    values[from..]
        .first_chunk()
        .expect("a block within the lanes")
}

#[inline(always)]
fn block_mut<T, const N: usize>(values: &mut [T], from: usize) -> &mut [T; N] {
    values[from..]
        .first_chunk_mut()
        .expect("a block within the lanes")
}
