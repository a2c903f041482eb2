//! The logistic law.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

pub(super) struct Logistic;

impl Written for Logistic {
    const NAME: &'static str = "logistic";
    const ABOUT: &'static str = "e^-z / (scale (1 + e^-z)^2), z = (x - location) / scale (Johnson, Kotz & Balakrishnan 1995, ch. 23)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("location", Domain::Real, "centre"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let z = ((x - p[0]) * (1.0 / p[1])).abs();
        Parts {
            point: None,
            mixed: Some(-z - 2.0 * (-z).exp().log1p()),
            parameters: -p[1].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((x - p[0]) / p[1]).logistic()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((p[0] - x) / p[1]).logistic()
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -((p[0] - x) / p[1]).softplus()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -((x - p[0]) / p[1]).softplus()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] + p[1] * (q.ln() - (-q).log1p())
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * (s.ln() - (-s).log1p())
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        // ln(U / (1 - U)) with 1 - U = e^-E keeps the upper tail as fine as the lower.
        let standard = maths::ln(maths::expm1(random::exponential(stream)));
        finite(p[0] + p[1] * standard)
    }
}
