//! The Student law.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};
use std::f64::consts::LN_2;

fn z<'p>(x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
    (x - p[1]) / p[2]
}

/// degrees / (degrees + z^2), whose tail is the incomplete beta function's, and one less it; by quotients
/// that don't overflow.
fn share<'p>(z: Term<'p>, degrees: Term<'p>) -> [Term<'p>; 2] {
    let ratio = (z / degrees.sqrt()).square();
    let small = ratio.less(1.0);
    let inverse = 1.0 / small.select(1.0, ratio);
    let ratio = small.select(ratio, 1.0);
    [
        small.select(1.0 / (1.0 + ratio), inverse / (1.0 + inverse)),
        small.select(ratio / (1.0 + ratio), 1.0 / (1.0 + inverse)),
    ]
}

/// P(|Z| > |z|), and ln of it: near the centre from the complement, which cancels nothing there.
fn both_tails<'p>(z: Term<'p>, degrees: Term<'p>) -> Term<'p> {
    let [tail, centre] = share(z, degrees);
    let (half, shape) = (degrees.constant(0.5), 0.5 * degrees);
    centre
        .less(0.5)
        .select(centre.beta_ic(half, shape), tail.beta_i(shape, half))
}

fn ln_both_tails<'p>(z: Term<'p>, degrees: Term<'p>) -> Term<'p> {
    let [tail, centre] = share(z, degrees);
    let (half, shape) = (degrees.constant(0.5), 0.5 * degrees);
    centre
        .less(0.5)
        .select(centre.ln_beta_ic(half, shape), tail.ln_beta_i(shape, half))
}

/// P(Z <= z)
fn lower<'p>(z: Term<'p>, degrees: Term<'p>) -> Term<'p> {
    let tail = 0.5 * both_tails(z, degrees);
    z.less(0.0).select(tail, 1.0 - tail)
}

fn ln_lower<'p>(z: Term<'p>, degrees: Term<'p>) -> Term<'p> {
    let tail = 0.5 * both_tails(z, degrees);
    z.less(0.0)
        .select(ln_both_tails(z, degrees) - LN_2, (-tail).log1p())
}

/// The z with P(Z <= z) = q.
fn standard_quantile<'p>(q: Term<'p>, degrees: Term<'p>) -> Term<'p> {
    let lower = q.less(0.5);
    let tail = 2.0 * lower.select(q, 1.0 - q);
    let (half, shape) = (degrees.constant(0.5), 0.5 * degrees);
    let far = tail.beta_quantile(shape, half);
    let near = (1.0 - tail).beta_quantile(half, shape);
    let ratio = tail
        .less(0.5)
        .select((1.0 - far) / far, near / (1.0 - near));
    let size = (degrees * ratio).sqrt();
    lower.select(-size, size)
}

pub(super) struct Student;

impl Written for Student {
    const NAME: &'static str = "student";
    const ABOUT: &'static str = "(1 + z^2 / degrees)^(-(degrees + 1) / 2) / (scale sqrt(degrees) B(degrees / 2, 1 / 2)), z = (x - location) / scale (Johnson, Kotz & Balakrishnan 1995, ch. 28)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("degrees", Domain::Positive, "degrees of freedom"),
        Parameter::new("location", Domain::Real, "centre"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let z = (x - p[1]) * (1.0 / p[2]);
        Parts {
            point: None,
            mixed: Some(-0.5 * (p[0] + 1.0) * (z.square() * (1.0 / p[0])).log1p()),
            parameters: -p[2].ln() - 0.5 * p[0].ln() - (0.5 * p[0]).ln_beta(0.5),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        lower(z(x, p), p[0])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        lower(-z(x, p), p[0])
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower(z(x, p), p[0])
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower(-z(x, p), p[0])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] + p[2] * standard_quantile(q, p[0])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] - p[2] * standard_quantile(s, p[0])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        let half = 0.5 * p[0];
        let spread = maths::exp(0.5 * (maths::ln(half) - random::ln_gamma(stream, half)));
        finite(p[1] + p[2] * (random::normal(stream) * spread))
    }
}
