//! The lognormal law.

use super::inside::positive;
use super::law::{Domain, Parameter, Support};
use super::normal::{BySd, LN_SQRT_TAU};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::Stream;

pub(super) struct Lognormal;

impl Written for Lognormal {
    const NAME: &'static str = "lognormal";
    const ABOUT: &'static str = "exp(-((ln(x) - log_mean) / log_sd)^2 / 2) / (x log_sd sqrt(2 pi)) (Johnson, Kotz & Balakrishnan 1994, ch. 14)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("log_mean", Domain::Real, "mean of ln(x)"),
        Parameter::new("log_sd", Domain::Positive, "standard deviation of ln(x)"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let z = (x.ln() - p[0]) * (1.0 / p[1]);
        Parts {
            point: Some(-x.ln()),
            mixed: Some(-0.5 * z.square()),
            parameters: -p[1].ln() - LN_SQRT_TAU,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.distribution(x.ln(), p)
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.survival(x.ln(), p)
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.ln_distribution(x.ln(), p)
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.ln_survival(x.ln(), p)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.quantile(q, p).exp()
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.upper_quantile(s, p).exp()
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        positive(maths::exp(BySd.draw(stream, p)))
    }
}
