//! A law with its parameters, perhaps cut to an interval.

use super::graph::Graph;
use super::shape::Shape;
use crate::laws::{Algebra, Bound, Law, Value};
use crate::maths::{Binary, Unary};
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

    /// The point below the interval: nothing of the law's mass at or below it counts.
    fn below(&self, g: &mut Graph) -> Option<Value> {
        let from = self.from?;
        if !self.law.support().integer {
            return Some(from);
        }
        let one = g.constant(1.0);
        let whole = g.unary(Unary::Ceil, from);
        Some(g.subtract(whole, one))
    }

    /// ln of the law's mass in the interval; `None` for laws without finite mass.
    fn ln_mass(&self, g: &mut Graph) -> Option<Value> {
        let p = &self.parameters;
        match (self.below(g), self.to) {
            (None, None) => Some(g.constant(0.0)),
            (Some(a), None) => self.law.ln_survival(g, a, p),
            (None, Some(b)) => self.law.ln_distribution(g, b, p),
            (Some(a), Some(b)) => self.ln_between(g, a, b),
        }
    }

    /// ln P(a < X <= b) without truncation, from the side where the logarithms do not cancel.
    fn ln_between(&self, g: &mut Graph, a: Value, b: Value) -> Option<Value> {
        let p = &self.parameters;
        let lower = (
            self.law.ln_distribution(g, b, p)?,
            self.law.ln_distribution(g, a, p)?,
        );
        let upper = (
            self.law.ln_survival(g, a, p)?,
            self.law.ln_survival(g, b, p)?,
        );
        let from_below = ln_difference(g, lower.0, lower.1);
        let from_above = ln_difference(g, upper.0, upper.1);
        let half = g.constant(-std::f64::consts::LN_2);
        let in_upper = g.binary(Binary::Less, upper.0, half);
        Some(g.select(in_upper, from_above, from_below))
    }

    /// 1 where x lies in the interval.
    fn inside(&self, g: &mut Graph, x: Value) -> Option<Value> {
        let from = self.from.map(|a| g.binary(Binary::LessEqual, a, x));
        let to = self.to.map(|b| g.binary(Binary::LessEqual, x, b));
        match (from, to) {
            (Some(a), Some(b)) => Some(g.binary(Binary::And, a, b)),
            (one, other) => one.or(other),
        }
    }

    /// Log density at `x`, over the mass of the interval; minus infinity outside.
    pub fn log_density(&self, g: &mut Graph, x: Value) -> Value {
        let plain = self.law.log_density(g, x, &self.parameters);
        let (Some(inside), Some(mass)) = (self.inside(g, x), self.ln_mass(g)) else {
            return plain;
        };
        let value = g.subtract(plain, mass);
        let nothing = g.constant(f64::NEG_INFINITY);
        g.select(inside, value, nothing)
    }

    /// P(X <= x).
    pub fn distribution(&self, g: &mut Graph, x: Value) -> Option<Value> {
        if !self.is_truncated() {
            return self.law.distribution(g, x, &self.parameters);
        }
        let ln = self.ln_distribution(g, x)?;
        Some(g.unary(Unary::Exp, ln))
    }

    /// P(X > x).
    pub fn survival(&self, g: &mut Graph, x: Value) -> Option<Value> {
        if !self.is_truncated() {
            return self.law.survival(g, x, &self.parameters);
        }
        let ln = self.ln_survival(g, x)?;
        Some(g.unary(Unary::Exp, ln))
    }

    /// ln P(X <= x).
    pub fn ln_distribution(&self, g: &mut Graph, x: Value) -> Option<Value> {
        if !self.is_truncated() {
            return self.law.ln_distribution(g, x, &self.parameters);
        }
        let below = self.below(g);
        let part = match below {
            Some(a) => self.ln_between(g, a, x)?,
            None => self.law.ln_distribution(g, x, &self.parameters)?,
        };
        let mass = self.ln_mass(g)?;
        let mut value = g.subtract(part, mass);
        if let Some(a) = below {
            let nothing = g.constant(f64::NEG_INFINITY);
            let before = g.binary(Binary::LessEqual, x, a);
            value = g.select(before, nothing, value);
        }
        if let Some(b) = self.to {
            let all = g.constant(0.0);
            let after = g.binary(Binary::LessEqual, b, x);
            value = g.select(after, all, value);
        }
        Some(value)
    }

    /// ln P(X > x).
    pub fn ln_survival(&self, g: &mut Graph, x: Value) -> Option<Value> {
        if !self.is_truncated() {
            return self.law.ln_survival(g, x, &self.parameters);
        }
        let part = match self.to {
            Some(b) => self.ln_between(g, x, b)?,
            None => self.law.ln_survival(g, x, &self.parameters)?,
        };
        let mass = self.ln_mass(g)?;
        let mut value = g.subtract(part, mass);
        if let Some(b) = self.to {
            let nothing = g.constant(f64::NEG_INFINITY);
            let after = g.binary(Binary::LessEqual, b, x);
            value = g.select(after, nothing, value);
        }
        if let Some(a) = self.below(g) {
            let all = g.constant(0.0);
            let before = g.binary(Binary::LessEqual, x, a);
            value = g.select(before, all, value);
        }
        Some(value)
    }

    /// ln P(a < X <= b).
    pub fn ln_interval(&self, g: &mut Graph, a: Value, b: Value) -> Option<Value> {
        if !self.is_truncated() {
            return self.ln_between(g, a, b);
        }
        let mut ends = [a, b];
        for end in &mut ends {
            if let Some(from) = self.below(g) {
                *end = g.binary(Binary::Maximum, *end, from);
            }
            if let Some(to) = self.to {
                *end = g.binary(Binary::Minimum, *end, to);
            }
        }
        let part = self.ln_between(g, ends[0], ends[1])?;
        let mass = self.ln_mass(g)?;
        Some(g.subtract(part, mass))
    }

    /// The smallest x with P(X <= x) >= q.
    pub fn quantile(&self, g: &mut Graph, q: Value) -> Option<Value> {
        let p = &self.parameters;
        if !self.is_truncated() {
            return self.law.quantile(g, q, p);
        }
        let start = match self.below(g) {
            Some(a) => self.law.distribution(g, a, p)?,
            None => g.constant(0.0),
        };
        let ln_mass = self.ln_mass(g)?;
        let mass = g.unary(Unary::Exp, ln_mass);
        let part = g.multiply(q, mass);
        let level = g.add_values(start, part);
        let mut x = self.law.quantile(g, level, p)?;
        if let Some(a) = self.from {
            x = g.binary(Binary::Maximum, x, a);
        }
        if let Some(b) = self.to {
            x = g.binary(Binary::Minimum, x, b);
        }
        Some(x)
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
        const TRIES: usize = 100_000;
        let (parameters, ends) = numbers.split_at(self.parameters.len());
        let mut ends = ends.iter().copied();
        let from = self
            .from
            .and_then(|_| ends.next())
            .unwrap_or(f64::NEG_INFINITY);
        let to = self.to.and_then(|_| ends.next()).unwrap_or(f64::INFINITY);
        for _ in 0..TRIES {
            let x = self.law.draw(stream, parameters)?;
            if (from <= x && x <= to) || x.is_nan() {
                return Some(x);
            }
        }
        Some(f64::NAN)
    }
}

/// ln(e^a - e^b) for b <= a.
fn ln_difference(g: &mut Graph, a: Value, b: Value) -> Value {
    let gap = g.subtract(b, a);
    let expm1 = g.unary(Unary::Expm1, gap);
    let part = g.unary(Unary::Negate, expm1);
    let ln = g.unary(Unary::Ln, part);
    g.add_values(a, ln)
}
