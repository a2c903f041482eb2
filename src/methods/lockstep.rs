//! The lane loops of the random walk: eight lanes in a register where the machine has them so wide, with the
//! same bits where it has not, since no lane's arithmetic crosses to another.

use multiversion::multiversion;

/// Lanes that go through a loop together.
const BLOCK: usize = 8;

/// Adds to each moved coordinate its row of the factor times the normals (in the order of the columns),
/// or just its normal without a factor. Coordinate `on[i]` of `proposal`, `i` of `normals`, the packed rows
/// of `factor`: all with lanes fastest.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))]
pub fn add_steps(on: &[usize], factor: Option<&[f64]>, normals: &[f64], proposal: &mut [f64]) {
    let lanes = normals.len() / on.len();
    let whole = lanes - lanes % BLOCK;
    for first in (0..whole).step_by(BLOCK) {
        add_block::<BLOCK>(on, factor, normals, proposal, lanes, first);
    }
    for first in whole..lanes {
        add_block::<1>(on, factor, normals, proposal, lanes, first);
    }
}

#[inline(always)]
fn add_block<const N: usize>(
    on: &[usize],
    factor: Option<&[f64]>,
    normals: &[f64],
    proposal: &mut [f64],
    lanes: usize,
    first: usize,
) {
    let mut row = 0;
    for (i, &coordinate) in on.iter().enumerate() {
        let x: &mut [f64; N] = block_mut(proposal, coordinate * lanes + first);
        match factor {
            Some(factor) => {
                let mut moved = *x;
                for j in 0..=i {
                    let l: &[f64; N] = block(factor, (row + j) * lanes + first);
                    let z: &[f64; N] = block(normals, j * lanes + first);
                    for k in 0..N {
                        moved[k] += l[k] * z[k];
                    }
                }
                *x = moved;
                row += i + 1;
            }
            None => {
                let z: &[f64; N] = block(normals, i * lanes + first);
                for k in 0..N {
                    x[k] += z[k];
                }
            }
        }
    }
}

/// Takes the moved coordinates of the proposal where it was accepted.
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))]
pub fn accept_rows(on: &[usize], accept: &[bool], proposal: &[f64], position: &mut [f64]) {
    let lanes = accept.len();
    let whole = lanes - lanes % BLOCK;
    for first in (0..whole).step_by(BLOCK) {
        accept_block::<BLOCK>(on, accept, proposal, position, first);
    }
    for first in whole..lanes {
        accept_block::<1>(on, accept, proposal, position, first);
    }
}

#[inline(always)]
fn accept_block<const N: usize>(
    on: &[usize],
    accept: &[bool],
    proposal: &[f64],
    position: &mut [f64],
    first: usize,
) {
    let lanes = accept.len();
    let accept: &[bool; N] = block(accept, first);
    for &coordinate in on {
        let new: &[f64; N] = block(proposal, coordinate * lanes + first);
        let x: &mut [f64; N] = block_mut(position, coordinate * lanes + first);
        for k in 0..N {
            x[k] = if accept[k] { new[k] } else { x[k] };
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
#[multiversion(targets("x86_64+avx512f+avx512dq+avx512vl", "x86_64+avx2"))]
pub fn add_to_moments(
    on: &[usize],
    position: &[f64],
    active: &[bool],
    gain: &[f64],
    mut moments: Moments,
) {
    let lanes = active.len();
    let whole = lanes - lanes % BLOCK;
    for first in (0..whole).step_by(BLOCK) {
        moments_block::<BLOCK>(on, position, active, gain, &mut moments, first);
    }
    for first in whole..lanes {
        moments_block::<1>(on, position, active, gain, &mut moments, first);
    }
}

#[inline(always)]
fn moments_block<const N: usize>(
    on: &[usize],
    position: &[f64],
    active: &[bool],
    gain: &[f64],
    moments: &mut Moments,
    first: usize,
) {
    let lanes = active.len();
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
