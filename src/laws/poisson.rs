//! The Poisson law.

use super::algebra::Function;
use super::law::{Domain, Parameter, Support};
use super::search;
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

static QUANTILE: Function = Function {
    name: "quantile of poisson(mean)",
    evaluate: |q, mean, _| {
        let p = [mean];
        let sd = maths::sqrt(mean);
        search::quantile(&Poisson, q, &p, mean, sd)
    },
};

static UPPER_QUANTILE: Function = Function {
    name: "upper quantile of poisson(mean)",
    evaluate: |s, mean, _| {
        let p = [mean];
        let sd = maths::sqrt(mean);
        search::upper_quantile(&Poisson, s, &p, mean, sd)
    },
};

pub(super) struct Poisson;

impl Written for Poisson {
    const NAME: &'static str = "poisson";
    const ABOUT: &'static str = "mean^x exp(-mean) / x! (Johnson, Kemp & Kotz 2005, ch. 4)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new("mean", Domain::NonNegative, "mean")];
    const SUPPORT: Support = Support::COUNTS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: Some(-(x + 1.0).ln_gamma()),
            mixed: Some(x.times_ln(p[0])),
            parameters: -p[0],
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x + 1.0).gamma_q(p[0])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x + 1.0).gamma_p(p[0])
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x + 1.0).ln_gamma_q(p[0])
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x + 1.0).ln_gamma_p(p[0])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.call(&QUANTILE, p[0], 0.0)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.call(&UPPER_QUANTILE, p[0], 0.0)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::poisson(stream, p[0])
    }
}
