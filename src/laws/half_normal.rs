//! The size of a normal number of mean 0.

use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::normal::LN_SQRT_TAU;
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};
use std::f64::consts::{FRAC_1_SQRT_2, LN_2};

pub(super) struct HalfNormal;

impl Written for HalfNormal {
    const NAME: &'static str = "half_normal";
    const ABOUT: &'static str =
        "sqrt(2 / pi) exp(-(x / scale)^2 / 2) / scale (Johnson, Kotz & Balakrishnan 1994, ch. 13)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new(
        "scale",
        Domain::Positive,
        "standard deviation before the sign is dropped",
    )];
    const SUPPORT: Support = Support::NON_NEGATIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-0.5 * (x * (1.0 / p[0])).square()),
            parameters: LN_2 - p[0].ln() - LN_SQRT_TAU,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x / p[0] * FRAC_1_SQRT_2).erf()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x / p[0] * FRAC_1_SQRT_2).erfc()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        LN_2 + (-(x / p[0])).ln_normal_cdf()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        // z^2 / 2 is a gamma number of shape 1/2: keeps small quantiles relatively exact.
        let small = (2.0 * q.constant(0.5).gamma_quantile(q)).sqrt();
        let large = -(0.5 * (1.0 - q)).normal_quantile();
        p[0] * q.less(0.5).select(small, large)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let small = (2.0 * s.constant(0.5).gamma_quantile(1.0 - s)).sqrt();
        let large = -(0.5 * s).normal_quantile();
        p[0] * s.less(0.5).select(large, small)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(p[0] * random::normal(stream).abs())
    }
}
