//! The negative binomial law, by mean and shape or by successes and probability.

use super::algebra::Function;
use super::law::{Domain, Parameter, Support};
use super::search;
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

/// ln C(x + r - 1, x), without cancellation for large r.
fn ln_ways<'p>(x: Term<'p>, r: Term<'p>) -> Term<'p> {
    -(x + r).ln() - (x + 1.0).ln_beta(r)
}

/// Probability of a failure and of a success.
fn odds<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    [1.0 / (1.0 + p[1] / p[0]), 1.0 / (1.0 + p[0] / p[1])]
}

macro_rules! tail {
    ($name:ident, $small:ident, $large:ident) => {
        /// From the rarer of failure and success.
        fn $name<'p>(x: Term<'p>, r: Term<'p>, [failure, success]: [Term<'p>; 2]) -> Term<'p> {
            failure
                .less(0.5)
                .select(failure.$small(x + 1.0, r), success.$large(r, x + 1.0))
        }
    };
}

tail!(distribution, beta_ic, beta_i);
tail!(survival, beta_i, beta_ic);
tail!(ln_distribution, ln_beta_ic, ln_beta_i);
tail!(ln_survival, ln_beta_i, ln_beta_ic);

static QUANTILE: Function = Function {
    name: "quantile of negative_binomial(mean, shape)",
    evaluate: |q, first, second| {
        let p = [first, second];
        let [mean, sd] = [p[0], maths::sqrt(p[0] * (1.0 + p[0] / p[1]))];
        search::quantile(&ByMean, q, &p, mean, sd)
    },
};

static UPPER_QUANTILE: Function = Function {
    name: "upper quantile of negative_binomial(mean, shape)",
    evaluate: |s, first, second| {
        let p = [first, second];
        let [mean, sd] = [p[0], maths::sqrt(p[0] * (1.0 + p[0] / p[1]))];
        search::upper_quantile(&ByMean, s, &p, mean, sd)
    },
};

pub(super) struct ByMean;

impl Written for ByMean {
    const NAME: &'static str = "negative_binomial";
    const ABOUT: &'static str = "C(x + shape - 1, x) (shape / (shape + mean))^shape (mean / (shape + mean))^x (Johnson, Kemp & Kotz 2005, ch. 5)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("mean", Domain::Positive, "mean"),
        Parameter::new(
            "shape",
            Domain::Positive,
            "shape of the gamma law that the mean of a Poisson law follows; variance = mean + mean^2 / shape",
        ),
    ];
    const SUPPORT: Support = Support::COUNTS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(ln_ways(x, p[1]) - x * (p[1] / p[0]).log1p()),
            parameters: -(p[1] * (p[0] / p[1]).log1p()),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        distribution(x, p[1], odds(p))
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        survival(x, p[1], odds(p))
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_distribution(x, p[1], odds(p))
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_survival(x, p[1], odds(p))
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.call(&QUANTILE, p[0], p[1])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.call(&UPPER_QUANTILE, p[0], p[1])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::negative_binomial(stream, p[1], p[0] / p[1])
    }
}

static SUCCESSES_QUANTILE: Function = Function {
    name: "quantile of negative_binomial(successes, probability)",
    evaluate: |q, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p);
        search::quantile(&BySuccesses, q, &p, mean, sd)
    },
};

static SUCCESSES_UPPER_QUANTILE: Function = Function {
    name: "upper quantile of negative_binomial(successes, probability)",
    evaluate: |s, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p);
        search::upper_quantile(&BySuccesses, s, &p, mean, sd)
    },
};

fn moments(p: [f64; 2]) -> [f64; 2] {
    let mean = p[0] * (1.0 - p[1]) / p[1];
    [mean, maths::sqrt(mean / p[1])]
}

pub(super) struct BySuccesses;

impl Written for BySuccesses {
    const NAME: &'static str = "negative_binomial";
    const ABOUT: &'static str = "C(x + successes - 1, x) probability^successes (1 - probability)^x: failures before the last success (Johnson, Kemp & Kotz 2005, ch. 5)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new(
            "successes",
            Domain::Positive,
            "successes waited for; need not be whole",
        ),
        Parameter::new("probability", Domain::PositiveUnit, "chance of a success"),
    ];
    const SUPPORT: Support = Support::COUNTS;

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: None,
            mixed: Some(ln_ways(x, p[0]) + x.times_ln(1.0 - p[1])),
            parameters: p[0] * p[1].ln(),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        distribution(x, p[0], [1.0 - p[1], p[1]])
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        survival(x, p[0], [1.0 - p[1], p[1]])
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_distribution(x, p[0], [1.0 - p[1], p[1]])
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        ln_survival(x, p[0], [1.0 - p[1], p[1]])
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.call(&SUCCESSES_QUANTILE, p[0], p[1])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.call(&SUCCESSES_UPPER_QUANTILE, p[0], p[1])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::negative_binomial(stream, p[0], (1.0 - p[1]) / p[1])
    }
}
