//! The Weibull law.

use super::inside::positive;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

/// ln((x / scale)^shape)
fn ln_hazard<'p>(x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
    p[0] * (x.ln() - p[1].ln())
}

/// (x / scale)^shape
fn hazard<'p>(x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
    ln_hazard(x, p).exp()
}

pub(super) struct Weibull;

impl Written for Weibull {
    const NAME: &'static str = "weibull";
    const ABOUT: &'static str = "(shape / scale) (x / scale)^(shape - 1) exp(-(x / scale)^shape) (Johnson, Kotz & Balakrishnan 1994, ch. 21)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("shape", Domain::Positive, "shape"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let ln = x.ln();
        Parts {
            point: None,
            mixed: Some((p[0] - 1.0) * ln - (p[0] * (ln - p[1].ln())).exp()),
            parameters: p[0].ln() - p[0] * p[1].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-hazard(x, p)).expm1()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-hazard(x, p)).exp()
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let ln = ln_hazard(x, p);
        // Down here -expm1(-h) is h to the last bit, and h would underflow.
        ln.less(-40.0).select(ln, (-(-ln.exp()).expm1()).ln())
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -hazard(x, p)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] * ((-(-q).log1p()).ln() / p[0]).exp()
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] * ((-s.ln()).ln() / p[0]).exp()
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        positive(p[1] * maths::exp(maths::ln(random::exponential(stream)) / p[0]))
    }
}
