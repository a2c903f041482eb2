//! The law of the reciprocal of a gamma number.

use super::gamma::standard_upper_quantile;
use super::inside::positive;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

pub(super) struct InverseGamma;

impl Written for InverseGamma {
    const NAME: &'static str = "inverse_gamma";
    const ABOUT: &'static str = "scale^shape x^(-shape - 1) exp(-scale / x) / Gamma(shape) (Johnson, Kotz & Balakrishnan 1994, ch. 17)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("shape", Domain::Positive, "shape"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-((p[0] + 1.0) * x.ln()) - p[1] / x),
            parameters: p[0] * p[1].ln() - p[0].ln_gamma(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].gamma_q(p[1] / x)
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].gamma_p(p[1] / x)
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].ln_gamma_q(p[1] / x)
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].ln_gamma_p(p[1] / x)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] / standard_upper_quantile(q, p[0])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] / p[0].gamma_quantile(s)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        // By logarithms: for a small shape the gamma number underflows long before its reciprocal does.
        positive(maths::exp(maths::ln(p[1]) - random::ln_gamma(stream, p[0])))
    }
}
