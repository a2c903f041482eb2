//! The normal law, by standard deviation or by precision.

use super::law::{Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

/// ln(sqrt(2 π))
pub(super) const LN_SQRT_TAU: f64 = 0.918_938_533_204_672_7;

pub(super) struct BySd;

impl Written for BySd {
    const NAME: &'static str = "normal";
    const ABOUT: &'static str = "exp(-((x - mean) / sd)^2 / 2) / (sd sqrt(2 pi)) (Johnson, Kotz & Balakrishnan 1994, ch. 13)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("mean", Domain::Real, "mean"),
        Parameter::new("sd", Domain::Positive, "standard deviation"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let z = (x - p[0]) * (1.0 / p[1]);
        Parts {
            point: None,
            mixed: Some(-0.5 * z.square()),
            parameters: -p[1].ln() - LN_SQRT_TAU,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((x - p[0]) / p[1]).normal_cdf()
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((p[0] - x) / p[1]).normal_cdf()
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((x - p[0]) / p[1]).ln_normal_cdf()
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ((p[0] - x) / p[1]).ln_normal_cdf()
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] + p[1] * q.normal_quantile()
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[0] - p[1] * s.normal_quantile()
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        p[0] + p[1] * random::normal(stream)
    }
}

pub(super) struct ByPrecision;

/// Mean and standard deviation.
fn by_sd<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    [p[0], 1.0 / p[1].sqrt()]
}

impl Written for ByPrecision {
    const NAME: &'static str = "normal";
    const ABOUT: &'static str = "exp(-precision (x - mean)^2 / 2) sqrt(precision / (2 pi)) (Johnson, Kotz & Balakrishnan 1994, ch. 13)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("mean", Domain::Real, "mean"),
        Parameter::new("precision", Domain::Positive, "1 / sd^2"),
    ];
    const SUPPORT: Support = Support::REALS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(-0.5 * p[1] * (x - p[0]).square()),
            parameters: 0.5 * p[1].ln() - LN_SQRT_TAU,
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.distribution(x, &by_sd(p))
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.survival(x, &by_sd(p))
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.ln_distribution(x, &by_sd(p))
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.ln_survival(x, &by_sd(p))
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.quantile(q, &by_sd(p))
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        BySd.upper_quantile(s, &by_sd(p))
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        p[0] + random::normal(stream) / maths::sqrt(p[1])
    }
}
