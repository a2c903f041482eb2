//! Where the expressions of a law are built: the graph of a formula, or plain numbers.

use crate::maths::{Binary, Ternary, Unary};
use std::cmp::Ordering;

/// A value of an [`Algebra`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Value(pub u32);

/// A deterministic function of three numbers that is no expression of the operations: a search, such as the
/// quantile of an integer law. Functions are told apart by their names.
#[derive(Debug)]
pub struct Function {
    pub name: &'static str,
    pub evaluate: fn(f64, f64, f64) -> f64,
}

impl PartialEq for Function {
    fn eq(&self, other: &Function) -> bool {
        self.name == other.name
    }
}

impl Eq for Function {}

impl PartialOrd for Function {
    fn partial_cmp(&self, other: &Function) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Function {
    fn cmp(&self, other: &Function) -> Ordering {
        self.name.cmp(other.name)
    }
}

/// Builds expressions. Vectors and numbers mix element by element in the graph of a formula.
pub trait Algebra {
    fn constant(&mut self, value: f64) -> Value;
    fn unary(&mut self, op: Unary, a: Value) -> Value;
    fn binary(&mut self, op: Binary, a: Value, b: Value) -> Value;
    fn ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value;
    /// The function's value, element by element.
    fn call(&mut self, function: &'static Function, a: Value, b: Value, c: Value) -> Value;
}
