//! Simpler operations with the same meaning.
//!
//! Rounding may differ from the formula as written, never from one machine or lane count to another: what is
//! simplified is fixed when the graph is built. A value that is not finite as written (a density at a point
//! outside its support, a number that cannot be computed) is never made finite by leaving a guard out: guards
//! are moved, not dropped.

mod sum;

use super::graph::{Graph, Node};
use super::shape::Shape;
use crate::laws::{Algebra, Value};
use crate::maths::{Binary, Ternary, Unary};

pub(super) use sum::sum;

/// Whether a value is 0 or 1 by the way it is made.
fn is_condition(g: &Graph, v: Value) -> bool {
    match g.node(v) {
        Node::Unary(Unary::Not, _) => true,
        Node::Binary(op, ..) => matches!(
            op,
            Binary::Less
                | Binary::LessEqual
                | Binary::Equal
                | Binary::NotEqual
                | Binary::And
                | Binary::Or
        ),
        _ => g
            .known_values(v)
            .is_some_and(|values| values.iter().all(|x| *x == 0.0 || *x == 1.0)),
    }
}

/// The one number that a known value holds in all its elements.
fn uniform(g: &Graph, v: Value) -> Option<f64> {
    let values = g.known_values(v)?;
    let first = *values.first()?;
    values
        .iter()
        .all(|x| x.to_bits() == first.to_bits())
        .then_some(first)
}

fn same_shape(g: &Graph, a: Value, b: Value) -> bool {
    g.shape_of(a) == g.shape_of(b)
}

/// Vectors of one known number become that number where another operand keeps the shape.
fn narrowed(g: &mut Graph, operands: &mut [Value]) {
    for at in 0..operands.len() {
        let v = operands[at];
        let kept = operands
            .iter()
            .enumerate()
            .any(|(i, &other)| i != at && same_shape(g, other, v));
        if !g.is_number(v)
            && kept
            && let Some(x) = uniform(g, v)
        {
            operands[at] = Algebra::constant(g, x);
        }
    }
}

pub(super) fn unary(g: &mut Graph, op: Unary, a: Value) -> Value {
    if g.known_values(a).is_some() {
        return g.plain_unary(op, a);
    }
    match (op, g.node(a)) {
        (Unary::Negate, Node::Unary(Unary::Negate, x)) => return x,
        (Unary::Negate, Node::Binary(Binary::Subtract, x, y)) => return g.subtract(y, x),
        (Unary::Square, Node::Unary(Unary::Negate | Unary::Absolute, x)) => {
            return unary(g, Unary::Square, x);
        }
        (Unary::Absolute, Node::Unary(Unary::Negate, x)) => return unary(g, Unary::Absolute, x),
        (Unary::Absolute, Node::Unary(Unary::Absolute | Unary::Square | Unary::Exp, _)) => {
            return a;
        }
        (Unary::Sqrt, Node::Unary(Unary::Square, x)) => return unary(g, Unary::Absolute, x),
        (Unary::Not, Node::Unary(Unary::Not, x)) if is_condition(g, x) => return x,
        (Unary::Ln, Node::Unary(Unary::Exp, x)) => return x,
        (Unary::Ln, Node::Unary(Unary::Logistic, x)) => return minus_softplus_of_minus(g, x),
        (Unary::Ln, Node::Ternary(Ternary::Select, c, x, y))
            if falls_to_ln(g, x) && falls_to_ln(g, y) =>
        {
            let (x, y) = (unary(g, Unary::Ln, x), unary(g, Unary::Ln, y));
            return g.select(c, x, y);
        }
        (Unary::Ln, Node::Binary(Binary::Add, x, y)) => {
            if let Some(z) = one_and_exp(g, x, y).or_else(|| one_and_exp(g, y, x)) {
                return unary(g, Unary::Softplus, z);
            }
        }
        (Unary::Log1p, Node::Unary(Unary::Exp, x)) => return unary(g, Unary::Softplus, x),
        (Unary::Log1p, Node::Unary(Unary::Negate, share)) => {
            if let Node::Unary(Unary::Logistic, x) = g.node(share) {
                let softplus = unary(g, Unary::Softplus, x);
                return unary(g, Unary::Negate, softplus);
            }
        }
        _ => {}
    }
    g.plain_unary(op, a)
}

/// ln of the value is at hand.
fn falls_to_ln(g: &Graph, v: Value) -> bool {
    matches!(g.node(v), Node::Unary(Unary::Exp, _)) || g.known_values(v).is_some()
}

/// z, where the two values are 1 and e^z.
fn one_and_exp(g: &Graph, one: Value, exp: Value) -> Option<Value> {
    match g.node(exp) {
        Node::Unary(Unary::Exp, z) if g.known_number(one) == Some(1.0) => Some(z),
        _ => None,
    }
}

/// ln of the logistic function.
fn minus_softplus_of_minus(g: &mut Graph, x: Value) -> Value {
    let minus = unary(g, Unary::Negate, x);
    let softplus = unary(g, Unary::Softplus, minus);
    unary(g, Unary::Negate, softplus)
}

pub(super) fn binary(g: &mut Graph, op: Binary, a: Value, b: Value) -> Value {
    let mut operands = [a, b];
    narrowed(g, &mut operands);
    let [mut a, mut b] = operands;
    let commutes = matches!(
        op,
        Binary::Add
            | Binary::Multiply
            | Binary::And
            | Binary::Or
            | Binary::Equal
            | Binary::NotEqual
    );
    if commutes && (g.known_values(a).is_some(), a) > (g.known_values(b).is_some(), b) {
        (a, b) = (b, a);
    }
    if g.known_values(a).is_some() && g.known_values(b).is_some() {
        return g.plain_binary(op, a, b);
    }
    let simpler = match op {
        Binary::Add => add(g, a, b),
        Binary::Subtract => subtract(g, a, b),
        Binary::Multiply => multiply(g, a, b),
        Binary::Divide => divide(g, a, b),
        Binary::Power => power(g, a, b),
        Binary::And | Binary::Or => both(g, op, a, b),
        Binary::Less if inside_its_range(g, a, b) => Some(always(g, a, b)),
        _ => None,
    };
    simpler.unwrap_or_else(|| g.plain_binary(op, a, b))
}

/// 0 < e^z, 0 < logistic(z) and logistic(z) < 1, which hold for every number z, though the doubles nearest to
/// these values reach the ends. A law with infinite density at an end keeps the mass there that no double of its
/// own is left for: its log density is worked out from z.
fn inside_its_range(g: &Graph, a: Value, b: Value) -> bool {
    let number = |v: Value| g.known_number(v);
    match (g.node(a), g.node(b)) {
        (_, Node::Unary(Unary::Exp | Unary::Logistic, _)) => number(a) == Some(0.0),
        (Node::Unary(Unary::Logistic, _), _) => number(b) == Some(1.0),
        _ => false,
    }
}

/// 1, in the shape of a comparison of the two.
fn always(g: &mut Graph, a: Value, b: Value) -> Value {
    let shape = if g.is_number(a) {
        g.shape_of(b)
    } else {
        g.shape_of(a)
    };
    match shape.clone() {
        Shape::Number => Algebra::constant(g, 1.0),
        Shape::Vector(axis) => {
            let ones = vec![1.0; axis.len];
            g.data(axis, ones.into())
        }
    }
}

/// The known operand, if any, stands second.
fn add(g: &mut Graph, a: Value, b: Value) -> Option<Value> {
    if g.known_number(b) == Some(0.0) {
        return Some(a);
    }
    if let Node::Unary(Unary::Negate, x) = g.node(b) {
        return Some(g.subtract(a, x));
    }
    if let Node::Unary(Unary::Negate, x) = g.node(a) {
        return Some(g.subtract(b, x));
    }
    None
}

fn subtract(g: &mut Graph, a: Value, b: Value) -> Option<Value> {
    if g.known_number(b) == Some(0.0) {
        return Some(a);
    }
    if g.known_number(a) == Some(0.0) {
        return Some(unary(g, Unary::Negate, b));
    }
    if let Node::Unary(Unary::Negate, x) = g.node(b) {
        return Some(g.add_values(a, x));
    }
    None
}

fn multiply(g: &mut Graph, a: Value, b: Value) -> Option<Value> {
    if a == b {
        return Some(unary(g, Unary::Square, a));
    }
    if let Some(k) = g.known_number(b) {
        if k == 1.0 {
            return Some(a);
        }
        if k == -1.0 {
            return Some(unary(g, Unary::Negate, a));
        }
        if let Node::Unary(Unary::Negate, x) = g.node(a) {
            let k = Algebra::constant(g, -k);
            return Some(g.multiply(x, k));
        }
    }
    match (g.node(a), g.node(b)) {
        (Node::Unary(Unary::Negate, x), Node::Unary(Unary::Negate, y)) => {
            return Some(g.multiply(x, y));
        }
        // The sign is moved outside, where sums take it off.
        (Node::Unary(Unary::Negate, x), _) => {
            let product = g.multiply(x, b);
            return Some(unary(g, Unary::Negate, product));
        }
        (_, Node::Unary(Unary::Negate, y)) => {
            let product = g.multiply(a, y);
            return Some(unary(g, Unary::Negate, product));
        }
        _ => {}
    }
    regroup(g, Binary::Multiply, a, b).or_else(|| regroup(g, Binary::Multiply, b, a))
}

fn divide(g: &mut Graph, a: Value, b: Value) -> Option<Value> {
    if let Some(k) = g.known_number(b) {
        if k == 1.0 {
            return Some(a);
        }
        // Division by a power of two is exact either way.
        let reciprocal = 1.0 / k;
        let power_of_two =
            k.to_bits() & ((1 << 52) - 1) == 0 && k.is_normal() && reciprocal.is_normal();
        if power_of_two {
            let reciprocal = Algebra::constant(g, reciprocal);
            return Some(g.multiply(a, reciprocal));
        }
    }
    if let Node::Unary(Unary::Negate, x) = g.node(a) {
        let quotient = g.divide(x, b);
        return Some(unary(g, Unary::Negate, quotient));
    }
    regroup(g, Binary::Divide, a, b)
}

/// (x * c) * b as x * (c * b), and the like with quotients, where c and b together are known from data alone
/// or are numbers beside a vector x: worked out once, or outside the loop over rows.
fn regroup(g: &mut Graph, op: Binary, a: Value, b: Value) -> Option<Value> {
    match g.node(a) {
        Node::Binary(Binary::Multiply, x, c) => regroup_parts(g, op, Binary::Multiply, [x, c, b])
            .or_else(|| regroup_parts(g, op, Binary::Multiply, [c, x, b])),
        Node::Binary(Binary::Divide, x, c) => regroup_parts(g, op, Binary::Divide, [x, c, b]),
        _ => None,
    }
}

fn regroup_parts(g: &mut Graph, op: Binary, inner: Binary, [x, c, b]: [Value; 3]) -> Option<Value> {
    let known = |v: Value| g.known_values(v).is_some();
    let lifts = (known(c) && known(b) && !known(x))
        || (g.is_number(c) && g.is_number(b) && !g.is_number(x));
    if !lifts {
        return None;
    }
    let (outer, factor) = match (inner, op) {
        (Binary::Multiply, _) => (Binary::Multiply, g.binary(op, c, b)),
        (_, Binary::Multiply) => (Binary::Multiply, g.binary(Binary::Divide, b, c)),
        _ => (Binary::Divide, g.binary(Binary::Multiply, c, b)),
    };
    // Not where the factor alone leaves the range of numbers.
    if let Some(values) = g.known_values(factor)
        && !values.iter().all(|f| f.is_normal())
    {
        return None;
    }
    Some(g.binary(outer, x, factor))
}

fn power(g: &mut Graph, a: Value, b: Value) -> Option<Value> {
    if let Node::Unary(Unary::Exp, x) = g.node(a) {
        let product = g.multiply(x, b);
        return Some(unary(g, Unary::Exp, product));
    }
    let k = g.known_number(b)?;
    let over = |g: &mut Graph, v: Value| {
        let one = Algebra::constant(g, 1.0);
        g.divide(one, v)
    };
    Some(if k == 1.0 {
        a
    } else if k == 2.0 {
        unary(g, Unary::Square, a)
    } else if k == 3.0 {
        let square = unary(g, Unary::Square, a);
        g.multiply(a, square)
    } else if k == 4.0 {
        let square = unary(g, Unary::Square, a);
        unary(g, Unary::Square, square)
    } else if k == 0.5 {
        unary(g, Unary::Sqrt, a)
    } else if k == -0.5 {
        let root = unary(g, Unary::Sqrt, a);
        over(g, root)
    } else if k == -1.0 {
        over(g, a)
    } else if k == -2.0 {
        let square = unary(g, Unary::Square, a);
        over(g, square)
    } else {
        return None;
    })
}

/// The known operand, if any, stands second.
fn both(g: &mut Graph, op: Binary, a: Value, b: Value) -> Option<Value> {
    if a == b && is_condition(g, a) {
        return Some(a);
    }
    let k = g.known_number(b)?;
    let decides = if op == Binary::And {
        k == 0.0
    } else {
        k != 0.0
    };
    if decides && g.is_number(a) {
        return Some(Algebra::constant(
            g,
            if op == Binary::And { 0.0 } else { 1.0 },
        ));
    }
    (!decides && is_condition(g, a)).then_some(a)
}

pub(super) fn ternary(g: &mut Graph, op: Ternary, a: Value, b: Value, c: Value) -> Value {
    let mut operands = [a, b, c];
    narrowed(g, &mut operands);
    let [a, b, c] = operands;
    if op != Ternary::Select {
        return g.plain_ternary(op, a, b, c);
    }
    let widest = |g: &Graph, v: Value| {
        [a, b, c]
            .iter()
            .all(|&other| g.is_number(other) || same_shape(g, other, v))
    };
    if let Some(known) = g.known_number(a) {
        let chosen = if known != 0.0 { b } else { c };
        if widest(g, chosen) {
            return chosen;
        }
    }
    if b == c && widest(g, b) {
        return b;
    }
    if let Node::Unary(Unary::Not, condition) = g.node(a) {
        return ternary(g, op, condition, c, b);
    }
    if let Node::Ternary(Ternary::Select, condition, inner, _) = g.node(b)
        && condition == a
        && same_shape(g, inner, b)
    {
        return ternary(g, op, a, inner, c);
    }
    g.plain_ternary(op, a, b, c)
}
