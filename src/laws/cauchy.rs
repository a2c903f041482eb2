//! The Cauchy law.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::Stream;
use std::f64::consts::{FRAC_1_PI, PI};

/// ln(π)
pub(super) const LN_PI: f64 = 1.144_729_885_849_400_2;

/// P(Z <= z), from the angle that the tail subtends.
fn lower(z: Term<'_>) -> Term<'_> {
    let tail = FRAC_1_PI * (1.0 / z.abs()).atan();
    z.less(0.0).select(tail, 1.0 - tail)
}

fn standard_quantile(q: Term<'_>) -> Term<'_> {
    let low = -(1.0 / (PI * q).tan());
    let high = 1.0 / (PI * (1.0 - q)).tan();
    let centre = (PI * (q - 0.5)).tan();
    q.less(0.25)
        .select(low, (q.constant(0.75)).less(q).select(high, centre))
}

pub(super) struct Cauchy;

impl Written for Cauchy {
    const NAME: &'static str = "cauchy";
    const ABOUT: &'static str = "1 / (pi scale (1 + ((x - location) / scale)^2)) (Johnson, Kotz & Balakrishnan 1994, ch. 16)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("location", Domain::Real, "centre"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let z = (x - p[0]) * (1.0 / p[1]);
        Parts {
            point: None,
            mixed: Some(-z.square().log1p()),
            parameters: -p[1].ln() - LN_PI,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        lower((x - p[0]) / p[1])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        lower((p[0] - x) / p[1])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] + p[1] * standard_quantile(q)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * standard_quantile(s)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(p[0] + p[1] * maths::tan(PI * (stream.open() - 0.5)))
    }
}
