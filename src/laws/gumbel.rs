//! The Gumbel law, of largest values.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

pub(super) struct Gumbel;

impl Written for Gumbel {
    const NAME: &'static str = "gumbel";
    const ABOUT: &'static str = "exp(-(z + e^-z)) / scale, z = (x - location) / scale (Johnson, Kotz & Balakrishnan 1995, ch. 22)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("location", Domain::Real, "mode"),
        Parameter::new("scale", Domain::Positive, "scale"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        // Held where e^-z is infinite: minus infinity plus infinity would be no number.
        let z = ((x - p[0]) * (1.0 / p[1])).at_least(-1e4);
        Parts {
            point: None,
            mixed: Some(-(z + (-z).exp())),
            parameters: -p[1].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (-(-((x - p[0]) / p[1])).exp()).exp()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-(-((x - p[0]) / p[1])).exp()).expm1()
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -(-((x - p[0]) / p[1])).exp()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let z = (x - p[0]) / p[1];
        let hazard = (-z).exp();
        // From here on -expm1(-h) is h to the last bit, and h would underflow.
        z.less(40.0).select((-(-hazard).expm1()).ln(), -z)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * (-q.ln()).ln()
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * (-(-s).log1p()).ln()
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(p[0] - p[1] * maths::ln(random::exponential(stream)))
    }
}
