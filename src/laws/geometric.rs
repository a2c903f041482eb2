//! The geometric law: failures before the first success.

use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};

pub(super) struct Geometric;

impl Written for Geometric {
    const NAME: &'static str = "geometric";
    const ABOUT: &'static str =
        "probability (1 - probability)^x (Johnson, Kemp & Kotz 2005, ch. 5)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new(
        "probability",
        Domain::PositiveUnit,
        "chance of a success",
    )];
    const SUPPORT: Support = Support::COUNTS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(x.times_ln(1.0 - p[0])),
            parameters: p[0].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        -((x + 1.0) * (-p[0]).log1p()).expm1()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((x + 1.0) * (-p[0]).log1p()).exp()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        (x + 1.0) * (-p[0]).log1p()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let guess = ((-q).log1p() / (-p[0]).log1p() - 1.0).ceil().at_least(0.0);
        // Rounding may have carried the quotient over a whole number.
        let lower = (guess - 1.0).at_least(0.0);
        let early = q.less_equal(self.distribution(lower, p));
        let late = self.distribution(guess, p).less(q);
        early.select(lower, late.select(guess + 1.0, guess))
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let guess = (s.ln() / (-p[0]).log1p() - 1.0).ceil().at_least(0.0);
        let lower = (guess - 1.0).at_least(0.0);
        let early = self.survival(lower, p).less_equal(s);
        let late = s.less(self.survival(guess, p));
        early.select(lower, late.select(guess + 1.0, guess))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::geometric(stream, p[0])
    }
}
