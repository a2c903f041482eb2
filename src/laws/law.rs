//! What every law offers to the rooms below.

use super::algebra::{Algebra, Value};
use super::between;
use crate::random::Stream;

/// Which values a parameter may take. All are finite.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Domain {
    /// Not guarded: NaN in a real parameter gives NaN, since the formula that made it is at fault.
    Real,
    /// At least the smallest normal number, 2.2e-308, so that the reciprocal exists.
    Positive,
    NonNegative,
    /// In [0, 1].
    Unit,
    /// In (0, 1].
    PositiveUnit,
    /// A whole number, 0 or more.
    Count,
    /// Probabilities that sum to 1 (within 1e-9). Its elements, one after the other, are the last values of
    /// the parameter list; a law has at most one such parameter, its last.
    Probabilities,
}

impl Domain {
    /// Whether a number lies in the domain (for probabilities: whether one of them may have this value).
    pub fn holds(self, value: f64) -> bool {
        let finite = value.abs() < f64::INFINITY;
        finite
            && match self {
                Domain::Real => true,
                Domain::Positive => value >= f64::MIN_POSITIVE,
                Domain::NonNegative => value >= 0.0,
                Domain::Unit | Domain::Probabilities => (0.0..=1.0).contains(&value),
                Domain::PositiveUnit => (f64::MIN_POSITIVE..=1.0).contains(&value),
                Domain::Count => value >= 0.0 && value == value.floor(),
            }
    }

    /// The domain in words, for messages: "must be …".
    pub fn words(self) -> &'static str {
        match self {
            Domain::Real => "a finite number",
            Domain::Positive => "positive",
            Domain::NonNegative => "0 or positive",
            Domain::Unit => "between 0 and 1",
            Domain::PositiveUnit => "above 0 and at most 1",
            Domain::Count => "a whole number, 0 or more",
            Domain::Probabilities => "probabilities that sum to 1",
        }
    }
}

/// A named parameter of a law.
#[derive(Debug, Clone, Copy)]
pub struct Parameter {
    pub name: &'static str,
    pub domain: Domain,
    pub about: &'static str,
}

impl Parameter {
    pub(super) const fn new(name: &'static str, domain: Domain, about: &'static str) -> Parameter {
        Parameter {
            name,
            domain,
            about,
        }
    }
}

/// One end of a support.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Bound {
    Infinite,
    At(f64),
    /// The value of the law's parameter with this index.
    Parameter(usize),
    /// The number of the law's probabilities.
    Length,
}

/// Where a law puts its mass.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Support {
    pub lower: Bound,
    pub upper: Bound,
    /// The finite bounds belong to the support. Where they don't, the density counts as 0 there, whatever its
    /// limit.
    pub closed: bool,
    /// On the integers between the bounds.
    pub integer: bool,
}

impl Support {
    pub(super) const REALS: Support = Support {
        lower: Bound::Infinite,
        upper: Bound::Infinite,
        closed: false,
        integer: false,
    };
    /// (0, ∞)
    pub(super) const POSITIVE: Support = Support {
        lower: Bound::At(0.0),
        ..Support::REALS
    };
    /// [0, ∞)
    pub(super) const NON_NEGATIVE: Support = Support {
        closed: true,
        ..Support::POSITIVE
    };
    /// 0, 1, 2, …
    pub(super) const COUNTS: Support = Support {
        integer: true,
        ..Support::NON_NEGATIVE
    };

    /// The two ends for given parameters.
    pub fn ends(&self, p: &[f64]) -> (f64, f64) {
        let end = |bound: Bound, infinite: f64| match bound {
            Bound::Infinite => infinite,
            Bound::At(value) => value,
            Bound::Parameter(index) => p[index],
            Bound::Length => p.len() as f64,
        };
        (
            end(self.lower, f64::NEG_INFINITY),
            end(self.upper, f64::INFINITY),
        )
    }

    /// Whether a number lies in the support for given parameters.
    pub fn holds(&self, x: f64, p: &[f64]) -> bool {
        let (lower, upper) = self.ends(p);
        let within = if self.closed {
            lower <= x && x <= upper
        } else {
            lower < x && x < upper
        };
        within && x.abs() < f64::INFINITY && (!self.integer || x == x.floor())
    }
}

/// One law under one choice of parameters. Two choices (a bernoulli by probability or by log odds) are two
/// entries of the table with the same name.
///
/// In all functions `p` holds the parameters in the order of [`Law::parameters`]. Outside their domain, log
/// density, `ln_distribution`, `ln_survival` and `ln_between` are minus infinity (a chain steps back), and
/// distribution, survival, quantiles and draws are NaN.
pub trait Law: Sync + Send {
    /// The name in formulas.
    fn name(&self) -> &'static str;
    /// One line for the catalogue, with the formula of the density and its source.
    fn about(&self) -> &'static str;
    fn parameters(&self) -> &'static [Parameter];
    fn support(&self) -> Support;
    /// False for the flat laws, which have no finite mass.
    fn proper(&self) -> bool {
        true
    }
    /// Log density (of integer laws: log probability) at `x`; minus infinity outside the support, which for
    /// integer laws includes all numbers that are not whole.
    ///
    /// Written as a sum of a part of `x` alone, a mixed part and a part of the parameters alone, so that what
    /// depends on data only, or not on the row, can be lifted out.
    fn log_density(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Value;
    /// P(X <= x); `None` for laws without finite mass, as with all that follow.
    fn distribution(&self, _a: &mut dyn Algebra, _x: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// P(X > x), without cancellation.
    fn survival(&self, _a: &mut dyn Algebra, _x: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// ln P(X <= x), good in the far tail: a left-censored observation.
    fn ln_distribution(&self, _a: &mut dyn Algebra, _x: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// ln P(X > x), good in the far tail: a right-censored observation.
    fn ln_survival(&self, _a: &mut dyn Algebra, _x: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// ln P(lower < X <= upper), taken on the tail where it cancels least: an interval-censored observation.
    /// Minus infinity where `upper <= lower`.
    fn ln_between(
        &self,
        a: &mut dyn Algebra,
        lower: Value,
        upper: Value,
        p: &[Value],
    ) -> Option<Value> {
        let below = [
            self.ln_distribution(a, lower, p)?,
            self.ln_distribution(a, upper, p)?,
        ];
        let above = [
            self.ln_survival(a, lower, p)?,
            self.ln_survival(a, upper, p)?,
        ];
        Some(between::ln_between(a, below, above))
    }
    /// The smallest x with P(X <= x) >= q; the ends of the support for q = 0 and q = 1; NaN for q outside
    /// [0, 1].
    fn quantile(&self, _a: &mut dyn Algebra, _q: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// The smallest x with P(X > x) <= s, good for small s.
    fn upper_quantile(&self, _a: &mut dyn Algebra, _s: Value, _p: &[Value]) -> Option<Value> {
        None
    }
    /// A draw, always inside the support.
    fn draw(&self, _stream: &mut Stream, _p: &[f64]) -> Option<f64> {
        None
    }
}

impl dyn Law + '_ {
    /// How the law is written in a formula: `gamma(shape = …, rate = …)`.
    pub fn usage(&self) -> String {
        let arguments: Vec<String> = self
            .parameters()
            .iter()
            .map(|parameter| format!("{} = …", parameter.name))
            .collect();
        format!("{}({})", self.name(), arguments.join(", "))
    }
}
