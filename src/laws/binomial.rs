//! The binomial law, by probability or by log odds.

use super::algebra::Function;
use super::law::{Bound, Domain, Parameter, Support};
use super::search;
use super::term::Term;
use super::written::{Parts, Written};
use crate::maths;
use crate::random::{self, Stream};

static QUANTILE: Function = Function {
    name: "quantile of binomial(trials, probability)",
    evaluate: |q, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p[0], p[1]);
        search::quantile(&ByProbability, q, &p, mean, sd)
    },
};

static UPPER_QUANTILE: Function = Function {
    name: "upper quantile of binomial(trials, probability)",
    evaluate: |s, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p[0], p[1]);
        search::upper_quantile(&ByProbability, s, &p, mean, sd)
    },
};

fn moments(trials: f64, probability: f64) -> [f64; 2] {
    let mean = trials * probability;
    [mean, maths::sqrt(mean * (1.0 - probability))]
}

/// ln C(n, x), without cancellation for large n.
fn ln_choose<'p>(n: Term<'p>, x: Term<'p>) -> Term<'p> {
    -(n + 1.0).ln() - (x + 1.0).ln_beta(n - x + 1.0)
}

pub(super) struct ByProbability;

impl Written for ByProbability {
    const NAME: &'static str = "binomial";
    const ABOUT: &'static str = "C(trials, x) probability^x (1 - probability)^(trials - x) (Johnson, Kemp & Kotz 2005, ch. 3)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("trials", Domain::Count, "number of trials"),
        Parameter::new("probability", Domain::Unit, "chance of one trial"),
    ];
    const SUPPORT: Support = Support {
        upper: Bound::Parameter(0),
        ..Support::COUNTS
    };

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        Parts {
            point: Some(ln_choose(p[0], x)),
            mixed: Some(x.times_ln(p[1]) + (p[0] - x).times_ln(1.0 - p[1])),
            parameters: p[1].constant(0.0),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1].beta_ic(x + 1.0, p[0] - x)
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1].beta_i(x + 1.0, p[0] - x)
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1].ln_beta_ic(x + 1.0, p[0] - x)
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        p[1].ln_beta_i(x + 1.0, p[0] - x)
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.call(&QUANTILE, p[0], p[1])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.call(&UPPER_QUANTILE, p[0], p[1])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        random::binomial(stream, p[0], p[1])
    }
}

static ODDS_QUANTILE: Function = Function {
    name: "quantile of binomial(trials, log_odds)",
    evaluate: |q, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p[0], maths::logistic(p[1]));
        search::quantile(&ByLogOdds, q, &p, mean, sd)
    },
};

static ODDS_UPPER_QUANTILE: Function = Function {
    name: "upper quantile of binomial(trials, log_odds)",
    evaluate: |s, first, second| {
        let p = [first, second];
        let [mean, sd] = moments(p[0], maths::logistic(p[1]));
        search::upper_quantile(&ByLogOdds, s, &p, mean, sd)
    },
};

/// Log odds whose products with counts of trials are doubles still.
const MOST_ODDS: f64 = 1e290;

/// Probability of success and of failure, the larger one not from the smaller.
fn chances<'p>(p: &[Term<'p>]) -> [Term<'p>; 2] {
    [p[1].logistic(), (-p[1]).logistic()]
}

pub(super) struct ByLogOdds;

impl Written for ByLogOdds {
    const NAME: &'static str = "binomial";
    const ABOUT: &'static str = "C(trials, x) p^x (1 - p)^(trials - x), p = 1 / (1 + exp(-log_odds)) (Johnson, Kemp & Kotz 2005, ch. 3)";
    const PARAMETERS: &'static [Parameter] = &[
        Parameter::new("trials", Domain::Count, "number of trials"),
        Parameter::new("log_odds", Domain::Real, "ln(p / (1 - p))"),
    ];
    const SUPPORT: Support = Support {
        upper: Bound::Parameter(0),
        ..Support::COUNTS
    };

    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        // Held to finite numbers: infinite odds times no trial would be no number. Beyond, the one outcome
        // that is left is taken for certain.
        let odds = p[1].at_least(-MOST_ODDS).at_most(MOST_ODDS);
        let certain = p[1].less(0.0).select(0.0, p[0]);
        let impossible = p[1]
            .constant(MOST_ODDS)
            .less(p[1].abs())
            .and(1.0 - x.equals(certain));
        let beyond = impossible.select(f64::NEG_INFINITY, 0.0);
        Parts {
            point: Some(ln_choose(p[0], x)),
            mixed: Some(x * odds - p[0] * odds.softplus() + beyond),
            parameters: p[1].constant(0.0),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let [success, failure] = chances(p);
        success.less_equal(0.5).select(
            success.beta_ic(x + 1.0, p[0] - x),
            failure.beta_i(p[0] - x, x + 1.0),
        )
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let [success, failure] = chances(p);
        success.less_equal(0.5).select(
            success.beta_i(x + 1.0, p[0] - x),
            failure.beta_ic(p[0] - x, x + 1.0),
        )
    }
    fn ln_distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let [success, failure] = chances(p);
        success.less_equal(0.5).select(
            success.ln_beta_ic(x + 1.0, p[0] - x),
            failure.ln_beta_i(p[0] - x, x + 1.0),
        )
    }
    fn ln_survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let [success, failure] = chances(p);
        success.less_equal(0.5).select(
            success.ln_beta_i(x + 1.0, p[0] - x),
            failure.ln_beta_ic(p[0] - x, x + 1.0),
        )
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        q.call(&ODDS_QUANTILE, p[0], p[1])
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        s.call(&ODDS_UPPER_QUANTILE, p[0], p[1])
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        // The rarer of the two outcomes is counted, whose chance is the exact one.
        if p[1] <= 0.0 {
            random::binomial(stream, p[0], maths::logistic(p[1]))
        } else {
            p[0] - random::binomial(stream, p[0], maths::logistic(-p[1]))
        }
    }
}
