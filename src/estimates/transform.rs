//! The fast Fourier transform (Cooley & Tukey 1965) in one fixed order, for sums of autocorrelations.

use crate::maths::{cos, sin};

/// The sums over all series of the products at every lag below `length`; `flat` holds the centred series
/// one after another.
///
/// Two series share one complex transform, as real and imaginary part: the real part of the inverse
/// transform of |Z|^2 is the sum of both autocorrelations. Forward transforms leave their result in
/// bit-reversed order and the inverse starts from it, so nothing is ever put in order.
pub(super) fn summed_autocorrelations(flat: &[f64], length: usize) -> Vec<f64> {
    // Twice the length, so that the ends do not wrap around onto each other.
    let size = (2 * length).next_power_of_two();
    let turns = Turns::new(size);
    let mut power = vec![0.0; size];
    for pair in flat.chunks(2 * length) {
        let mut re = vec![0.0; size];
        let mut im = vec![0.0; size];
        re[..length].copy_from_slice(&pair[..length]);
        im[..pair.len() - length].copy_from_slice(&pair[length..]);
        forward(&mut re, &mut im, &turns);
        for ((p, r), i) in power.iter_mut().zip(&re).zip(&im) {
            *p += r * r + i * i;
        }
    }
    let mut im = vec![0.0; size];
    backward(&mut power, &mut im, &turns);
    power.truncate(length);
    for p in &mut power {
        *p /= size as f64;
    }
    power
}

/// cos and sin of 2 pi k / s for k < s/2, for each power of two s up to a size, smallest first.
struct Turns {
    levels: Vec<(Vec<f64>, Vec<f64>)>,
}

impl Turns {
    fn new(size: usize) -> Turns {
        let half = size / 2;
        let step = 2.0 * std::f64::consts::PI / size as f64;
        let mut c: Vec<f64> = Vec::with_capacity(half);
        let mut s: Vec<f64> = Vec::with_capacity(half);
        for k in 0..half {
            c.push(cos(step * k as f64));
            s.push(sin(step * k as f64));
        }
        let mut levels = vec![(c, s)];
        while let Some((c, s)) = levels.last() {
            if c.len() < 2 {
                break;
            }
            let every_other = |x: &[f64]| x.iter().step_by(2).copied().collect::<Vec<f64>>();
            let next = (every_other(c), every_other(s));
            levels.push(next);
        }
        levels.reverse();
        Turns { levels }
    }

    fn of(&self, size: usize) -> (&[f64], &[f64]) {
        let (c, s) = &self.levels[size.trailing_zeros() as usize - 1];
        (c, s)
    }
}

/// Decimation in frequency: natural order in, bit-reversed order out. Depth first, for the caches.
fn forward(re: &mut [f64], im: &mut [f64], turns: &Turns) {
    let size = re.len();
    if size < 2 {
        return;
    }
    let (c, s) = turns.of(size);
    let (ra, rb) = re.split_at_mut(size / 2);
    let (ia, ib) = im.split_at_mut(size / 2);
    for k in 0..c.len() {
        let (dr, di) = (ra[k] - rb[k], ia[k] - ib[k]);
        ra[k] += rb[k];
        ia[k] += ib[k];
        rb[k] = dr * c[k] + di * s[k];
        ib[k] = di * c[k] - dr * s[k];
    }
    forward(ra, ia, turns);
    forward(rb, ib, turns);
}

/// Decimation in time, the way back without the division: bit-reversed order in, natural order out.
fn backward(re: &mut [f64], im: &mut [f64], turns: &Turns) {
    let size = re.len();
    if size < 2 {
        return;
    }
    let (c, s) = turns.of(size);
    let (ra, rb) = re.split_at_mut(size / 2);
    let (ia, ib) = im.split_at_mut(size / 2);
    backward(ra, ia, turns);
    backward(rb, ib, turns);
    for k in 0..c.len() {
        let tr = rb[k] * c[k] - ib[k] * s[k];
        let ti = ib[k] * c[k] + rb[k] * s[k];
        rb[k] = ra[k] - tr;
        ib[k] = ia[k] - ti;
        ra[k] += tr;
        ia[k] += ti;
    }
}
