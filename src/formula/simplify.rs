//! Simpler operations with the same meaning.

use super::graph::{Graph, Reduction};
use crate::laws::Value;
use crate::maths::{Binary, Ternary, Unary};

pub(super) fn unary(g: &mut Graph, op: Unary, a: Value) -> Value {
    g.plain_unary(op, a)
}

pub(super) fn binary(g: &mut Graph, op: Binary, a: Value, b: Value) -> Value {
    g.plain_binary(op, a, b)
}

pub(super) fn ternary(g: &mut Graph, op: Ternary, a: Value, b: Value, c: Value) -> Value {
    g.plain_ternary(op, a, b, c)
}

pub(super) fn sum(g: &mut Graph, v: Value) -> Value {
    g.reduce(Reduction::Sum, v)
}
