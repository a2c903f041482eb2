//! Sums: what is linear is taken apart, so that the loop over rows holds only what must be done row by row.

use super::super::graph::{Graph, Node, Reduction, position};
use super::{is_condition, uniform};
use crate::laws::{Algebra, Value};
use crate::maths::{self, Binary, Ternary, Unary};
use std::sync::Arc;

/// Operations looked at before what is left is summed as it stands.
const STEPS: usize = 500;

/// The sum of a vector.
pub(crate) fn sum(g: &mut Graph, v: Value) -> Value {
    sum_within(g, v, &mut { STEPS })
}

fn sum_within(g: &mut Graph, v: Value, steps: &mut usize) -> Value {
    if g.known_values(v).is_some() || g.shape_of(v).is_empty() || *steps == 0 {
        return g.reduce(Reduction::Sum, v);
    }
    let parts = linear(g, v, None, steps);
    match parts {
        (Some(number), None) => number,
        (number, Some(rows)) => {
            let rest = peeled(g, rows, steps).unwrap_or_else(|| g.reduce(Reduction::Sum, rows));
            match number {
                Some(number) => g.add_values(number, rest),
                None => rest,
            }
        }
        (None, None) => g.constant(0.0),
    }
}

/// The sum of v (times a weight known from data) as a number, and a vector that still has to be summed.
type Parts = (Option<Value>, Option<Value>);

fn weighted(g: &mut Graph, v: Value, weight: Option<Value>) -> Value {
    match weight {
        Some(w) => g.multiply(v, w),
        None => v,
    }
}

fn linear(g: &mut Graph, v: Value, weight: Option<Value>, steps: &mut usize) -> Parts {
    let as_it_stands = |g: &mut Graph| (None, Some(weighted(g, v, weight)));
    if *steps == 0 {
        return as_it_stands(g);
    }
    *steps -= 1;
    if g.known_values(v).is_some() {
        let all = weighted(g, v, weight);
        return (Some(g.reduce(Reduction::Sum, all)), None);
    }
    match g.node(v) {
        Node::Unary(Unary::Negate, a) => {
            let negate =
                |g: &mut Graph, part: Option<Value>| part.map(|p| g.unary(Unary::Negate, p));
            let (number, rows) = linear(g, a, weight, steps);
            (negate(g, number), negate(g, rows))
        }
        Node::Binary(op @ (Binary::Add | Binary::Subtract), a, b) => {
            let (a_shape, b_shape) = (g.shape(a), g.shape(b));
            let whole = if a_shape.axis().is_some() {
                a_shape
            } else {
                b_shape
            };
            let a = side(g, a, weight, whole.len(), steps);
            let b = side(g, b, weight, whole.len(), steps);
            (joined(g, op, a.0, b.0), joined(g, op, a.1, b.1))
        }
        Node::Binary(Binary::Multiply, a, b) => {
            let (a, b) = if g.is_number(a) || g.known_values(a).is_some() {
                (b, a)
            } else {
                (a, b)
            };
            if g.is_number(b) {
                return scaled(g, Binary::Multiply, v, a, b, weight, steps);
            }
            if g.known_values(b).is_some() {
                let weight = weighted(g, b, weight);
                return linear(g, a, Some(weight), steps);
            }
            as_it_stands(g)
        }
        Node::Binary(Binary::Divide, a, b) if g.is_number(b) => {
            scaled(g, Binary::Divide, v, a, b, weight, steps)
        }
        Node::Dot(matrix, x) => {
            let weights = weight.map(|w| g.known_values(w).unwrap_or_default());
            let columns: Vec<Arc<[f64]>> = g.matrices[matrix.0].columns.clone();
            let column = |c: &Arc<[f64]>| match &weights {
                Some(w) => maths::sum(
                    &c.iter()
                        .zip(spread(w, c.len()))
                        .map(|(x, w)| x * w)
                        .collect::<Vec<_>>(),
                ),
                None => maths::sum(c),
            };
            let totals: Vec<f64> = columns.iter().map(column).collect();
            folded(g, x, totals).map_or_else(|| as_it_stands(g), |number| (Some(number), None))
        }
        Node::Gather(x, index) if !g.is_number(index) && g.known_values(index).is_some() => {
            let at = g.known_values(index).unwrap_or_default();
            let weights = weight.map(|w| g.known_values(w).unwrap_or_default());
            let mut totals = vec![0.0; g.shape_of(x).len()];
            let len = totals.len();
            for (row, &index) in at.iter().enumerate() {
                let Some(element) = position(index, len) else {
                    return as_it_stands(g);
                };
                totals[element] += match &weights {
                    Some(w) if w.len() == 1 => w[0],
                    Some(w) => w[row],
                    None => 1.0,
                };
            }
            folded(g, x, totals).map_or_else(|| as_it_stands(g), |number| (Some(number), None))
        }
        _ => as_it_stands(g),
    }
}

fn spread(w: &[f64], len: usize) -> impl Iterator<Item = f64> + '_ {
    (0..len).map(move |i| if w.len() == 1 { w[0] } else { w[i] })
}

/// The sum over the elements of x, each times its total weight.
fn folded(g: &mut Graph, x: Value, totals: Vec<f64>) -> Option<Value> {
    if !totals.iter().all(|t| t.is_finite()) {
        return None;
    }
    let Some(axis) = g.shape_of(x).axis().cloned() else {
        let total = g.constant(totals[0]);
        return Some(g.multiply(x, total));
    };
    let totals = g.data(axis, totals.into());
    let product = g.multiply(x, totals);
    Some(g.reduce(Reduction::Sum, product))
}

/// One side of a sum of two, which may be a number.
fn side(g: &mut Graph, v: Value, weight: Option<Value>, rows: usize, steps: &mut usize) -> Parts {
    if g.is_number(v) {
        let count = match weight.and_then(|w| g.known_values(w)) {
            Some(w) if w.len() == 1 => w[0] * rows as f64,
            Some(w) => maths::sum(&w),
            None => rows as f64,
        };
        let count = g.constant(count);
        return (Some(g.multiply(v, count)), None);
    }
    let (number, rows) = linear(g, v, weight, steps);
    let Some(rows) = rows else {
        return (number, None);
    };
    match peeled(g, rows, steps) {
        Some(rest) => (joined(g, Binary::Add, number, Some(rest)), None),
        None => (number, Some(rows)),
    }
}

fn joined(g: &mut Graph, op: Binary, a: Option<Value>, b: Option<Value>) -> Option<Value> {
    match (a, b) {
        (Some(a), Some(b)) => Some(g.binary(op, a, b)),
        (Some(a), None) => Some(a),
        (None, Some(b)) if op == Binary::Subtract => Some(g.unary(Unary::Negate, b)),
        (None, b) => b,
    }
}

/// v = a times (or over) the number b.
fn scaled(
    g: &mut Graph,
    op: Binary,
    v: Value,
    a: Value,
    b: Value,
    weight: Option<Value>,
    steps: &mut usize,
) -> Parts {
    let (number, rows) = linear(g, a, weight, steps);
    if number.is_none() {
        return (None, Some(weighted(g, v, weight)));
    }
    let scale = |g: &mut Graph, part: Option<Value>| part.map(|p| g.binary(op, p, b));
    (scale(g, number), scale(g, rows))
}

/// The sum of a vector whose outermost operation can be done once after a simpler sum.
fn peeled(g: &mut Graph, v: Value, steps: &mut usize) -> Option<Value> {
    if *steps == 0 {
        return None;
    }
    *steps -= 1;
    let mut inner = |g: &mut Graph, v: Value| sum_within(g, v, steps);
    match g.node(v) {
        Node::Unary(Unary::Negate, a) => {
            let total = inner(g, a);
            Some(g.unary(Unary::Negate, total))
        }
        Node::Binary(Binary::Multiply, a, b) if g.is_number(b) || g.is_number(a) => {
            let (a, b) = if g.is_number(b) { (a, b) } else { (b, a) };
            let total = inner(g, a);
            Some(g.multiply(total, b))
        }
        Node::Binary(Binary::Divide, a, b) if g.is_number(b) => {
            let total = inner(g, a);
            Some(g.divide(total, b))
        }
        Node::Unary(Unary::Square, a) => squares(g, a, steps),
        Node::Ternary(Ternary::Select, c, a, b) => selected(g, v, [c, a, b], steps),
        _ => None,
    }
}

/// A guard moves out of the sum: whether it holds for all rows decides whether the sum counts.
fn selected(g: &mut Graph, v: Value, [c, a, b]: [Value; 3], steps: &mut usize) -> Option<Value> {
    let rows = g.shape(v);
    let mut whole = |g: &mut Graph, part: Value| {
        if g.is_number(part) {
            let count = g.constant(rows.len() as f64);
            g.multiply(part, count)
        } else {
            sum_within(g, part, steps)
        }
    };
    let nothing = uniform(g, b) == Some(f64::NEG_INFINITY);
    let cheap = [a, b]
        .iter()
        .any(|&part| g.is_number(part) || g.known_values(part).is_some());
    if g.is_number(c) {
        if !cheap {
            return None;
        }
        let (x, y) = (whole(g, a), whole(g, b));
        return Some(g.select(c, x, y));
    }
    if !nothing || !is_condition(g, c) {
        return None;
    }
    let all = g.reduce(Reduction::Minimum, c);
    let (x, y) = (whole(g, a), g.constant(f64::NEG_INFINITY));
    Some(g.select(all, x, y))
}

/// The sum of squares of a.
fn squares(g: &mut Graph, a: Value, steps: &mut usize) -> Option<Value> {
    match g.node(a) {
        Node::Binary(op @ (Binary::Multiply | Binary::Divide), x, s) => {
            let (x, s) = if op == Binary::Multiply && g.is_number(x) {
                (s, x)
            } else {
                (x, s)
            };
            if !g.is_number(s) {
                return None;
            }
            let square = g.unary(Unary::Square, x);
            let total = sum_within(g, square, steps);
            let scale = g.unary(Unary::Square, s);
            Some(g.binary(op, total, scale))
        }
        Node::Binary(Binary::Subtract, x, y) => {
            let (data, number) = if g.is_number(y) { (x, y) } else { (y, x) };
            if !g.is_number(number) || g.is_number(data) {
                return None;
            }
            let values = g.known_values(data)?;
            about_a_number(g, &values, number)
        }
        _ => None,
    }
}

/// The sum of (x - m)^2 over data x with a number m, by the mean of the data: S + n ((c - m) + d)^2, where c
/// is near the mean, d the mean of x - c, and S the sum of squares about the mean. c - m does not cancel
/// more than x - m does.
fn about_a_number(g: &mut Graph, values: &[f64], m: Value) -> Option<Value> {
    let n = values.len() as f64;
    let c = values[0];
    let about: Vec<f64> = values.iter().map(|x| x - c).collect();
    let d = maths::mean(&about);
    let squares: Vec<f64> = about.iter().map(|x| (x - d) * (x - d)).collect();
    let total = maths::sum(&squares);
    if !(total.is_finite() && d.is_finite()) {
        return None;
    }
    let (c, d, total, n) = (
        g.constant(c),
        g.constant(d),
        g.constant(total),
        g.constant(n),
    );
    let from = g.subtract(c, m);
    let from = g.add_values(from, d);
    let square = g.unary(Unary::Square, from);
    let moved = g.multiply(square, n);
    Some(g.add_values(moved, total))
}
