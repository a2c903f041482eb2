//! The Laplace law.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};
use std::f64::consts::LN_2;

/// ln P(Z <= z)
fn ln_lower(z: Term<'_>) -> Term<'_> {
    let tail = -z.abs() - LN_2;
    z.less(0.0).select(tail, (-tail.exp()).log1p())
}

fn standard_quantile(q: Term<'_>) -> Term<'_> {
    q.less(0.5).select((2.0 * q).ln(), -(2.0 * (1.0 - q)).ln())
}

pub(super) struct Laplace;

impl Written for Laplace {
    const NAME: &'static str = "laplace";
    const ABOUT: &'static str =
        "exp(-|x - location| / scale) / (2 scale) (Johnson, Kotz & Balakrishnan 1995, ch. 24)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("location", Domain::Real, "centre"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-((x - p[0]) * (1.0 / p[1])).abs()),
            parameters: -p[1].ln() - LN_2,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower((x - p[0]) / p[1]).exp()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower((p[0] - x) / p[1]).exp()
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower((x - p[0]) / p[1])
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_lower((p[0] - x) / p[1])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] + p[1] * standard_quantile(q)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * standard_quantile(s)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        let size = p[1] * random::exponential(stream);
        let up = stream.word() >> 63 == 1;
        finite(if up { p[0] + size } else { p[0] - size })
    }
}
