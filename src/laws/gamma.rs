//! The gamma law, by shape and rate, by shape and scale, or by mean and standard deviation.

use super::algebra::Function;
use super::inside::positive;
use super::law::{Domain, Parameter, Support};
use super::search;
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

/// The x with Q(shape, x) = s, from (s, shape).
static UPPER_QUANTILE: Function = Function {
    name: "upper quantile of the standard gamma law",
    evaluate: |s, shape, _| {
        if s >= 0.5 {
            return maths::gamma_quantile(shape, 1.0 - s);
        }
        search::smallest(0.0, f64::MAX, false, |x| maths::gamma_q(shape, x) <= s)
    },
};

/// The x with Q(shape, x) = s, good for small s.
pub(super) fn standard_upper_quantile<'p>(s: Term<'p>, shape: Term<'p>) -> Term<'p> {
    s.call(&UPPER_QUANTILE, shape, 0.0)
}

pub(super) struct ByRate;

impl Written for ByRate {
    const NAME: &'static str = "gamma";
    const ABOUT: &'static str = "rate^shape x^(shape - 1) exp(-rate x) / Gamma(shape) (Johnson, Kotz & Balakrishnan 1994, ch. 17)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("shape", Domain::Positive, "shape"),
        Parameter::new("rate", Domain::Positive, "1 / scale"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some((p[0] - 1.0) * x.ln() - p[1] * x),
            parameters: p[0] * p[1].ln() - p[0].ln_gamma(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].gamma_p(p[1] * x)
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].gamma_q(p[1] * x)
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].ln_gamma_p(p[1] * x)
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].ln_gamma_q(p[1] * x)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0].gamma_quantile(q) / p[1]
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        standard_upper_quantile(s, p[0]) / p[1]
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        positive(random::gamma(stream, p[0]) / p[1])
    }
}

fn from_scale<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    [p[0], 1.0 / p[1]]
}

pub(super) struct ByScale;

impl Written for ByScale {
    const NAME: &'static str = "gamma";
    const ABOUT: &'static str = "x^(shape - 1) exp(-x / scale) / (scale^shape Gamma(shape)) (Johnson, Kotz & Balakrishnan 1994, ch. 17)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("shape", Domain::Positive, "shape"),
        Parameter::new("scale", Domain::Positive, "1 / rate"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some((p[0] - 1.0) * x.ln() - x * (1.0 / p[1])),
            parameters: -(p[0] * p[1].ln()) - p[0].ln_gamma(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.distribution(x, &from_scale(p))
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.survival(x, &from_scale(p))
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_distribution(x, &from_scale(p))
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_survival(x, &from_scale(p))
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.quantile(q, &from_scale(p))
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.upper_quantile(s, &from_scale(p))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        positive(random::gamma(stream, p[0]) * p[1])
    }
}

/// shape = (mean / sd)^2, rate = mean / sd^2
fn moments<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    let ratio = p[0] / p[1];
    [ratio.square(), ratio / p[1]]
}

/// Beyond these, shape and rate are refused.
const SMALLEST: f64 = 1e-300;
const LARGEST: f64 = 1e300;

/// Shape and rate, held to what the formulas can take.
fn from_moments<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    moments(p).map(|term| term.at_least(SMALLEST).at_most(LARGEST))
}

pub(super) struct ByMoments;

impl Written for ByMoments {
    const NAME: &'static str = "gamma";
    const ABOUT: &'static str = "the gamma law with shape = (mean / sd)^2 and rate = mean / sd^2 (Johnson, Kotz & Balakrishnan 1994, ch. 17)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("mean", Domain::Positive, "mean"),
        Parameter::new("sd", Domain::Positive, "standard deviation"),
    ];
    const SUPPORT: Support = Support::POSITIVE;

    fn condition<'p>(&self, p: &[Term<'p>]) -> Option<Term<'p>> {
        let [shape, rate] = moments(p);
        let regular = |term: Term<'p>| {
            let above = term.constant(SMALLEST).less_equal(term);
            above.and(term.less_equal(LARGEST))
        };
        Some(regular(shape).and(regular(rate)))
    }
    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        ByRate.log_density(x, &from_moments(p))
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.distribution(x, &from_moments(p))
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.survival(x, &from_moments(p))
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_distribution(x, &from_moments(p))
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.ln_survival(x, &from_moments(p))
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.quantile(q, &from_moments(p))
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ByRate.upper_quantile(s, &from_moments(p))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        let ratio = p[0] / p[1];
        positive(random::gamma(stream, ratio * ratio) * (p[1] / ratio))
    }
}
