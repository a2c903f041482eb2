//! The law of one trial, by probability or by log odds.

use super::law::{Bound, Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::Stream;

pub(super) struct ByProbability;

impl Written for ByProbability {
    const NAME: &'static str = "bernoulli";
    const ABOUT: &'static str =
        "probability for x = 1, 1 - probability for x = 0 (Johnson, Kemp & Kotz 2005, ch. 3)";
    const PARAMETERS: &'static [Parameter] =
        &[Parameter::new("probability", Domain::Unit, "chance of a 1")];
    const SUPPORT: Support = Support {
        upper: Bound::At(1.0),
        ..Support::COUNTS
    };

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(x.equals(1.0).select(p[0], 1.0 - p[0]).ln()),
            parameters: p[0].constant(0.0),
        }
    }
    fn distribution<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        1.0 - p[0]
    }
    fn survival<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0]
    }
    fn ln_distribution<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-p[0]).log1p()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (1.0 - p[0]).less(q).select(1.0, 0.0)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.less(p[0]).select(1.0, 0.0)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        if stream.unit() < p[0] { 1.0 } else { 0.0 }
    }
}

pub(super) struct ByLogOdds;

impl Written for ByLogOdds {
    const NAME: &'static str = "bernoulli";
    const ABOUT: &'static str = "p for x = 1, 1 - p for x = 0, p = 1 / (1 + exp(-log_odds)) (Johnson, Kemp & Kotz 2005, ch. 3)";
    const PARAMETERS: &'static [Parameter] =
        &[Parameter::new("log_odds", Domain::Real, "ln(p / (1 - p))")];
    const SUPPORT: Support = Support {
        upper: Bound::At(1.0),
        ..Support::COUNTS
    };

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-((1.0 - 2.0 * x) * p[0]).softplus()),
            parameters: p[0].constant(0.0),
        }
    }
    fn distribution<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-p[0]).logistic()
    }
    fn survival<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].logistic()
    }
    fn ln_distribution<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -p[0].softplus()
    }
    fn ln_survival<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-p[0]).softplus()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-p[0]).logistic().less(q).select(1.0, 0.0)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.less(p[0].logistic()).select(1.0, 0.0)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        if stream.unit() < maths::logistic(p[0]) {
            1.0
        } else {
            0.0
        }
    }
}
