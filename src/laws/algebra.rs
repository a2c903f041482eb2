//! Where the expressions of a law are built: the graph of a formula, or plain numbers.

use crate::maths::{Binary, Ternary, Unary};

/// A value of an [`Algebra`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Value(pub u32);

/// A deterministic function of numbers that is no expression of the operations: a search, such as the
/// quantile of an integer law. Two functions with the same name are the same function.
#[derive(Debug)]
pub struct Function {
    pub name: &'static str,
    pub evaluate: fn(&[f64]) -> f64,
}

/// Builds expressions. Vectors and numbers mix element by element in the graph of a formula.
pub trait Algebra {
    fn constant(&mut self, value: f64) -> Value;
    fn unary(&mut self, op: Unary, a: Value) -> Value;
    fn binary(&mut self, op: Binary, a: Value, b: Value) -> Value;
    fn ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value;
    /// The function's value at the arguments, element by element.
    fn call(&mut self, function: &'static Function, arguments: &[Value]) -> Value;
}
