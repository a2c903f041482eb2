//! A law with its parameters, perhaps cut to an interval.

use super::graph::Graph;
use super::shape::Shape;
use crate::laws::{Algebra, Bound, Law, Truncated, Value};
use crate::maths::Binary;
use crate::place::Place;
use crate::random::Stream;

/// A law whose parameters are values of a graph.
#[derive(Clone)]
pub struct LawTerm {
    pub law: &'static dyn Law,
    /// In the order of the law's parameters; of a vector of probabilities, its elements.
    pub parameters: Vec<Value>,
    /// Ends of the interval that a truncated law is cut to; both belong to it.
    pub from: Option<Value>,
    pub to: Option<Value>,
    /// Of one draw: a number, or one number for each element of the parameters' axis.
    pub shape: Shape,
    pub place: Place,
}

impl std::fmt::Debug for LawTerm {
    fn fmt(&self, f: &mut std::fmt::Formatter) -> std::fmt::Result {
        f.debug_struct("LawTerm")
            .field("law", &self.law.name())
            .field("parameters", &self.parameters)
            .field("from", &self.from)
            .field("to", &self.to)
            .finish_non_exhaustive()
    }
}

impl LawTerm {
    pub fn is_truncated(&self) -> bool {
        self.from.is_some() || self.to.is_some()
    }

    /// The law as cut, if it has finite mass.
    fn proper(&self) -> Option<Truncated<'static>> {
        Truncated::new(self.law, self.from, self.to)
    }

    /// Log density at `x`, over the mass of the interval; minus infinity outside.
    pub fn log_density(&self, g: &mut Graph, x: Value) -> Value {
        match self.proper() {
            Some(law) => law.log_density(g, x, &self.parameters),
            None => self.law.log_density(g, x, &self.parameters),
        }
    }

    /// P(X <= x); `None` for laws without finite mass, as with all that follow.
    pub fn distribution(&self, g: &mut Graph, x: Value) -> Option<Value> {
        self.proper()?.distribution(g, x, &self.parameters)
    }

    /// P(X > x).
    pub fn survival(&self, g: &mut Graph, x: Value) -> Option<Value> {
        self.proper()?.survival(g, x, &self.parameters)
    }

    /// ln P(X <= x): a left-censored observation.
    pub fn ln_distribution(&self, g: &mut Graph, x: Value) -> Option<Value> {
        self.proper()?.ln_distribution(g, x, &self.parameters)
    }

    /// ln P(X > x): a right-censored observation, or (negated) delayed entry.
    pub fn ln_survival(&self, g: &mut Graph, x: Value) -> Option<Value> {
        self.proper()?.ln_survival(g, x, &self.parameters)
    }

    /// ln P(lower < X <= upper): an interval-censored observation.
    pub fn ln_interval(&self, g: &mut Graph, lower: Value, upper: Value) -> Option<Value> {
        self.proper()?.ln_between(g, lower, upper, &self.parameters)
    }

    /// The smallest x with P(X <= x) >= q.
    pub fn quantile(&self, g: &mut Graph, q: Value) -> Option<Value> {
        self.proper()?.quantile(g, q, &self.parameters)
    }

    /// Ends of the support, truncation included; infinite where it has none.
    pub fn support(&self, g: &mut Graph) -> (Value, Value) {
        let support = self.law.support();
        let mut end = |bound: Bound, infinite: f64| match bound {
            Bound::Infinite => g.constant(infinite),
            Bound::At(value) => g.constant(value),
            Bound::Parameter(at) => self.parameters[at],
            Bound::Length => g.constant(self.parameters.len() as f64),
        };
        let lower = end(support.lower, f64::NEG_INFINITY);
        let upper = end(support.upper, f64::INFINITY);
        let lower = match self.from {
            Some(a) => g.binary(Binary::Maximum, lower, a),
            None => lower,
        };
        let upper = match self.to {
            Some(b) => g.binary(Binary::Minimum, upper, b),
            None => upper,
        };
        (lower, upper)
    }

    /// The values that [`LawTerm::draw`] needs as numbers, in order.
    pub fn numbers(&self) -> Vec<Value> {
        let ends = [self.from, self.to].into_iter().flatten();
        self.parameters.iter().copied().chain(ends).collect()
    }

    /// A draw from the law with these numbers, those of [`LawTerm::numbers`]; `None` for laws without finite
    /// mass, NaN where the numbers leave no law.
    pub fn draw(&self, stream: &mut Stream, numbers: &[f64]) -> Option<f64> {
        let (parameters, ends) = numbers.split_at(self.parameters.len());
        let mut ends = ends.iter().copied();
        let from = self.from.and_then(|_| ends.next());
        let to = self.to.and_then(|_| ends.next());
        self.law.at(parameters).truncated(from, to).draw(stream)
    }
}
