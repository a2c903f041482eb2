//! The uniform law.

use super::law::{Bound, Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::Stream;

pub(super) struct Uniform;

impl Written for Uniform {
    const NAME: &'static str = "uniform";
    const ABOUT: &'static str = "1 / (to - from) (Johnson, Kotz & Balakrishnan 1995, ch. 26)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("from", Domain::Real, "lower end"),
        Parameter::new("to", Domain::Real, "upper end"),
    ];
    const SUPPORT: Support = Support {
        lower: Bound::Parameter(0),
        upper: Bound::Parameter(1),
        closed: true,
        integer: false,
    };

    fn condition<'p>(&self, p: &[Term<'p>]) -> Option<Term<'p>> {
        Some(p[0].less(p[1]).and((p[1] - p[0]).less(f64::INFINITY)))
    }
    fn log_density<'p>(&self, _x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: None,
            parameters: -(p[1] - p[0]).ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x - p[0]) / (p[1] - p[0])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (p[1] - x) / (p[1] - p[0])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] + q * (p[1] - p[0])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1] - s * (p[1] - p[0])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        let x = p[0] + stream.open() * (p[1] - p[0]);
        // Rounding may carry the sum over the end.
        if x <= p[1] { x } else { p[1] }
    }
}
