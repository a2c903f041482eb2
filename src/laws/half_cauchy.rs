//! The size of a Cauchy number of location 0.

use super::cauchy::LN_PI;
use super::inside::finite;
use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::Stream;
use std::f64::consts::{FRAC_2_PI, FRAC_PI_2, LN_2};

pub(super) struct HalfCauchy;

impl Written for HalfCauchy {
    const NAME: &'static str = "half_cauchy";
    const ABOUT: &'static str =
        "2 / (pi scale (1 + (x / scale)^2)) (Johnson, Kotz & Balakrishnan 1994, ch. 16)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new("scale", Domain::Positive, "median")];
    const SUPPORT: Support = Support::NON_NEGATIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-(x * (1.0 / p[0])).square().log1p()),
            parameters: LN_2 - p[0].ln() - LN_PI,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        FRAC_2_PI * (x / p[0]).atan()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        FRAC_2_PI * (p[0] / x).atan()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let small = (FRAC_PI_2 * q).tan();
        let large = 1.0 / (FRAC_PI_2 * (1.0 - q)).tan();
        p[0] * q.less(0.5).select(small, large)
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let small = (FRAC_PI_2 * (1.0 - s)).tan();
        let large = 1.0 / (FRAC_PI_2 * s).tan();
        p[0] * s.less(0.5).select(large, small)
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        finite(p[0] * maths::tan(FRAC_PI_2 * stream.open()))
    }
}
