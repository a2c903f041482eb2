//! Laws: support, log density, distribution function, quantile, draw; one law a file, one table.
//!
//! What a formula may need of a law is written once, on an [`Algebra`]: the formula compiler runs it to
//! get operations of its tape, [`Plain`] runs it to get a number.

use crate::maths::{Binary, Ternary, Unary};
use crate::random::Stream;

/// A value of an [`Algebra`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Value(pub u32);

/// Where the expressions of a law are built: the graph of a formula, or plain numbers.
pub trait Algebra {
    fn constant(&mut self, value: f64) -> Value;
    fn unary(&mut self, op: Unary, a: Value) -> Value;
    fn binary(&mut self, op: Binary, a: Value, b: Value) -> Value;
    fn ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value;
}

/// Which values a parameter may take.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Domain {
    Real,
    Positive,
    NonNegative,
    /// In [0, 1].
    Unit,
    /// A whole number, 0 or more.
    Count,
    /// A vector of probabilities that sum to 1 (categorical only).
    Probabilities,
}

/// A named parameter of a law.
#[derive(Debug, Clone, Copy)]
pub struct Parameter {
    pub name: &'static str,
    pub domain: Domain,
    pub about: &'static str,
}

/// One end of a support.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Bound {
    Infinite,
    At(f64),
    /// The value of the law's parameter with this index.
    Parameter(usize),
}

/// Where a law puts its mass.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Support {
    pub lower: Bound,
    pub upper: Bound,
    /// On the integers between the bounds.
    pub integer: bool,
}

/// One law under one choice of parameters. Two choices (a bernoulli by probability or by log odds) are two
/// entries of the table with the same name.
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
    /// Log density (of integer laws: log probability) at `x`; minus infinity outside the support and for
    /// parameters outside their domain.
    fn log_density(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Value;
    /// P(X <= x); `None` for laws without one.
    fn distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value>;
    /// P(X > x), without cancellation.
    fn survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value>;
    /// ln P(X <= x), good in the far tail.
    fn ln_distribution(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value>;
    /// ln P(X > x), good in the far tail.
    fn ln_survival(&self, a: &mut dyn Algebra, x: Value, p: &[Value]) -> Option<Value>;
    /// The smallest x with P(X <= x) >= q.
    fn quantile(&self, a: &mut dyn Algebra, q: Value, p: &[Value]) -> Option<Value>;
    /// A draw; `None` for laws without finite mass. NaN for parameters outside their domain.
    fn draw(&self, stream: &mut Stream, p: &[f64]) -> Option<f64>;
}

/// The table of laws, in order of name.
pub fn table() -> &'static [&'static dyn Law] {
    &[]
}
