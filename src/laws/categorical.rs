//! The law of a label from 1 to k.

use super::law::{Bound, Domain, Parameter, Support};
use super::term::Term;
use super::written::{Parts, Written};
use crate::random::{self, Stream};

/// The sum over the labels of what each contributes.
fn sum<'p>(
    zero: Term<'p>,
    p: &[Term<'p>],
    share: impl Fn(Term<'p>, Term<'p>) -> Term<'p>,
) -> Term<'p> {
    p.iter()
        .enumerate()
        .fold(zero, |total, (index, &probability)| {
            total + share(zero.constant((index + 1) as f64), probability)
        })
}

pub(super) struct Categorical;

impl Written for Categorical {
    const NAME: &'static str = "categorical";
    const ABOUT: &'static str =
        "the x-th probability, x = 1 … k (Johnson, Kemp & Kotz 2005, ch. 1)";
    const PARAMETERS: &'static [Parameter] = &[Parameter::new(
        "probabilities",
        Domain::Probabilities,
        "one for each label; they sum to 1",
    )];
    const SUPPORT: Support = Support {
        lower: Bound::At(1.0),
        upper: Bound::Length,
        closed: true,
        integer: true,
    };

    fn condition<'p>(&self, p: &[Term<'p>]) -> Option<Term<'p>> {
        let total = sum(p[0].constant(0.0), p, |_, probability| probability);
        Some((total - 1.0).abs().less_equal(1e-9))
    }
    fn log_density<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Parts<'p> {
        let mut chosen = p[0];
        for (index, &probability) in p.iter().enumerate().skip(1) {
            chosen = x.equals((index + 1) as f64).select(probability, chosen);
        }
        Parts {
            point: None,
            mixed: Some(chosen.ln()),
            parameters: p[0].constant(0.0),
        }
    }
    fn distribution<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        sum(x.constant(0.0), p, |label, probability| {
            label.less_equal(x).select(probability, 0.0)
        })
    }
    fn survival<'p>(&self, x: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        sum(x.constant(0.0), p, |label, probability| {
            x.less(label).select(probability, 0.0)
        })
    }
    fn quantile<'p>(&self, q: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        // One more than the labels whose distribution function falls short.
        let (mut reached, mut label) = (q.constant(0.0), q.constant(1.0));
        for &probability in &p[..p.len() - 1] {
            reached = reached + probability;
            label = label + reached.less(q);
        }
        label
    }
    fn upper_quantile<'p>(&self, s: Term<'p>, p: &[Term<'p>]) -> Term<'p> {
        let (mut left, mut label) = (s.constant(0.0), s.constant(p.len() as f64));
        for &probability in p[1..].iter().rev() {
            left = left + probability;
            label = label - left.less_equal(s);
        }
        label
    }
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> f64 {
        (random::categorical(stream, p) + 1) as f64
    }
}
