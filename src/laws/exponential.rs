//! The exponential law, by rate or by mean.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};

pub(super) struct ByRate;

impl Written for ByRate {
    const NAME: &'static str = "exponential";
    const ABOUT: &'static str = "rate exp(-rate x) (Johnson, Kotz & Balakrishnan 1994, ch. 19)";
    const PARAMETERS: &'static [Parameter] =
        &[Parameter::new("rate", Domain::Positive, "events per unit")];
    const SUPPORT: Support = Support::NON_NEGATIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-(p[0] * x)),
            parameters: p[0].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-(p[0] * x)).expm1()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-(p[0] * x)).exp()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(p[0] * x)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-q).log1p() / p[0]
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -s.ln() / p[0]
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(random::exponential(stream) / p[0])
    }
}

fn by_rate<'p>(p: &[Term<'p>]) -> [Term<'p>; 1] {
    [1.0 / p[0]]
}

pub(super) struct ByMean;

impl Written for ByMean {
    const NAME: &'static str = "exponential";
    const ABOUT: &'static str = "exp(-x / mean) / mean (Johnson, Kotz & Balakrishnan 1994, ch. 19)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new("mean", Domain::Positive, "mean")];
    const SUPPORT: Support = Support::NON_NEGATIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-(x * (1.0 / p[0]))),
            parameters: -p[0].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.distribution(x, &by_rate(p))
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.survival(x, &by_rate(p))
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_distribution(x, &by_rate(p))
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_survival(x, &by_rate(p))
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.quantile(q, &by_rate(p))
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.upper_quantile(s, &by_rate(p))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(random::exponential(stream) * p[0])
    }
}
