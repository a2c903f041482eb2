//! The beta law.

use super::law::{Bound, Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};

pub(super) struct Beta;

impl Written for Beta {
    const NAME: &'static str = "beta";
    const ABOUT: &'static str = "x^(alpha - 1) (1 - x)^(beta - 1) / B(alpha, beta) (Johnson, Kotz & Balakrishnan 1995, ch. 25)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("alpha", Domain::Positive, "exponent at 0, plus 1"),
        Parameter::new("beta", Domain::Positive, "exponent at 1, plus 1"),
    ];
    const SUPPORT: Support = Support {
        upper: Bound::At(1.0),
        ..Support::POSITIVE
    };

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some((p[0] - 1.0) * x.ln() + (p[1] - 1.0) * (-x).log1p()),
            parameters: -p[0].ln_beta(p[1]),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        x.beta_i(p[0], p[1])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        x.beta_ic(p[0], p[1])
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        x.ln_beta_i(p[0], p[1])
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        x.ln_beta_ic(p[0], p[1])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.beta_quantile(p[0], p[1])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let high = 1.0 - s.beta_quantile(p[1], p[0]);
        s.less(0.5)
            .select(high, (1.0 - s).beta_quantile(p[0], p[1]))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::beta(stream, p[0], p[1])
    }
}
