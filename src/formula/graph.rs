//! What formulas and laws are built into: operations on values, each kept once.
//!
//! Every value is made from earlier ones (single assignment, in order), by a small set of operations. What
//! depends on data alone is worked out on the spot.

use super::shape::{Axis, Shape};
use super::simplify;
use crate::laws::{Algebra, Function, Value};
use crate::maths::{self, Binary, Ternary, Unary};
use std::collections::BTreeMap;
use std::sync::Arc;

/// An operation and the values it works on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Node {
    /// The bits of a number.
    Constant(u64),
    /// The slots of the input vector from this one on.
    Input(usize),
    /// An entry of the graph's data.
    Data(usize),
    Unary(Unary, Value),
    Binary(Binary, Value, Value),
    Ternary(Ternary, Value, Value, Value),
    Reduce(Reduction, Value),
    /// Elements of a vector by their numbers from 1; NaN where there is no such element.
    Gather(Value, Value),
    /// One element of a vector, from 0.
    Element(Value, usize),
    /// A matrix of data times a vector, one number a row of the matrix.
    Dot(Matrix, Value),
    /// A function that is no expression of the operations, element by element.
    Call(&'static Function, Value, Value, Value),
}

/// One number from a vector.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Reduction {
    Sum,
    Minimum,
    Maximum,
}

impl Reduction {
    /// What partial results begin with.
    #[inline(always)]
    pub fn start(self) -> f64 {
        match self {
            Reduction::Sum => 0.0,
            Reduction::Minimum => f64::INFINITY,
            Reduction::Maximum => f64::NEG_INFINITY,
        }
    }

    #[inline(always)]
    pub fn join(self, a: f64, b: f64) -> f64 {
        match self {
            Reduction::Sum => a + b,
            Reduction::Minimum => maths::minimum(a, b),
            Reduction::Maximum => maths::maximum(a, b),
        }
    }

    /// Of a whole vector, in the shape of [`maths::sum`].
    pub fn of(self, values: &[f64]) -> f64 {
        let chunk = |chunk: &[f64]| {
            let mut partial = [self.start(); maths::PARTIALS];
            for (i, x) in chunk.iter().enumerate() {
                partial[i % maths::PARTIALS] = self.join(partial[i % maths::PARTIALS], *x);
            }
            self.partials(&partial)
        };
        let totals: Vec<f64> = values.chunks(maths::CHUNK).map(chunk).collect();
        self.chunks(&totals)
    }

    /// The result of a chunk from its interleaved partial results.
    #[inline(always)]
    pub fn partials(self, p: &[f64; maths::PARTIALS]) -> f64 {
        let join = |a, b| self.join(a, b);
        join(
            join(join(p[0], p[4]), join(p[2], p[6])),
            join(join(p[1], p[5]), join(p[3], p[7])),
        )
    }

    /// The result of all chunks from those of each.
    pub fn chunks(self, totals: &[f64]) -> f64 {
        match totals {
            [] => self.start(),
            [one] => *one,
            _ => {
                let (left, right) = totals.split_at(totals.len().next_power_of_two() / 2);
                self.join(self.chunks(left), self.chunks(right))
            }
        }
    }
}

/// A matrix of data held by a graph.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Matrix(pub(super) usize);

#[derive(Debug, Clone)]
pub(super) struct MatrixData {
    pub rows: Arc<Axis>,
    /// One slice of all rows for each column.
    pub columns: Vec<Arc<[f64]>>,
}

/// Values under construction. Numbers broadcast over vectors.
#[derive(Debug, Clone, Default)]
pub struct Graph {
    pub(super) nodes: Vec<Node>,
    shapes: Vec<Shape>,
    known: BTreeMap<(Node, usize), Value>,
    axes: Vec<Arc<Axis>>,
    pub(super) data: Vec<Arc<[f64]>>,
    known_data: BTreeMap<u64, Vec<usize>>,
    pub(super) matrices: Vec<MatrixData>,
    slots: usize,
}

impl Graph {
    pub fn new() -> Graph {
        Graph::default()
    }

    /// Length of the input vector so far.
    pub fn slots(&self) -> usize {
        self.slots
    }

    pub fn shape(&self, v: Value) -> Shape {
        self.shapes[v.0 as usize].clone()
    }

    pub(super) fn shape_of(&self, v: Value) -> &Shape {
        &self.shapes[v.0 as usize]
    }

    pub(super) fn node(&self, v: Value) -> Node {
        self.nodes[v.0 as usize]
    }

    /// The values that a value is made from.
    pub(super) fn operands(&self, v: Value) -> Vec<Value> {
        match self.node(v) {
            Node::Constant(_) | Node::Input(_) | Node::Data(_) => Vec::new(),
            Node::Unary(_, a) | Node::Reduce(_, a) | Node::Element(a, _) | Node::Dot(_, a) => {
                vec![a]
            }
            Node::Binary(_, a, b) | Node::Gather(a, b) => vec![a, b],
            Node::Ternary(_, a, b, c) | Node::Call(_, a, b, c) => vec![a, b, c],
        }
    }

    pub(super) fn is_number(&self, v: Value) -> bool {
        matches!(self.shape_of(v), Shape::Number)
    }

    /// The number that a value is known to be.
    pub fn known_number(&self, v: Value) -> Option<f64> {
        match self.node(v) {
            Node::Constant(bits) => Some(f64::from_bits(bits)),
            _ => None,
        }
    }

    /// The numbers of a value that depends on data alone.
    pub fn known_values(&self, v: Value) -> Option<Arc<[f64]>> {
        match self.node(v) {
            Node::Constant(bits) => Some(Arc::from([f64::from_bits(bits)])),
            Node::Data(at) => Some(self.data[at].clone()),
            _ => None,
        }
    }

    /// The next slots of the input vector, as many as the shape has elements.
    pub fn input(&mut self, shape: Shape) -> Value {
        let slot = self.slots;
        self.slots += shape.len();
        self.add(Node::Input(slot), shape)
    }

    /// A vector of data.
    ///
    /// # Panics
    /// When there are not as many values as elements of the axis.
    pub fn data(&mut self, axis: Arc<Axis>, values: Arc<[f64]>) -> Value {
        assert_eq!(
            axis.len,
            values.len(),
            "one value for each element of the axis"
        );
        let values = if values.iter().any(|x| x.is_nan()) {
            let canonical = |x: &f64| if x.is_nan() { f64::NAN } else { *x };
            values.iter().map(canonical).collect()
        } else {
            values
        };
        let mut hash = 0xcbf2_9ce4_8422_2325_u64;
        for x in values.iter() {
            hash = (hash ^ x.to_bits())
                .wrapping_mul(0x0000_0100_0000_01b3)
                .rotate_left(17);
        }
        let same = |other: &Arc<[f64]>| {
            other.len() == values.len()
                && other
                    .iter()
                    .zip(values.iter())
                    .all(|(a, b)| a.to_bits() == b.to_bits())
        };
        let places = self.known_data.entry(hash).or_default();
        let at = match places.iter().find(|&&at| same(&self.data[at])) {
            Some(&at) => at,
            None => {
                places.push(self.data.len());
                self.data.push(values);
                self.data.len() - 1
            }
        };
        self.add(Node::Data(at), Shape::Vector(axis))
    }

    /// A matrix of data, by columns.
    ///
    /// # Panics
    /// When a column has not as many values as there are rows.
    pub fn matrix(&mut self, rows: Arc<Axis>, columns: Vec<Arc<[f64]>>) -> Matrix {
        assert!(
            columns.iter().all(|c| c.len() == rows.len),
            "one value per row in each column"
        );
        let same = |m: &MatrixData| m.rows == rows && m.columns == columns;
        if let Some(at) = self.matrices.iter().position(same) {
            return Matrix(at);
        }
        self.matrices.push(MatrixData { rows, columns });
        Matrix(self.matrices.len() - 1)
    }

    /// A matrix times a vector with one element for each of its columns, which are taken in order.
    ///
    /// # Panics
    /// When the lengths differ.
    pub fn dot(&mut self, matrix: Matrix, vector: Value) -> Value {
        let held = &self.matrices[matrix.0];
        assert_eq!(
            held.columns.len(),
            self.shape_of(vector).len(),
            "one element a column"
        );
        let rows = held.rows.clone();
        if let Some(x) = self.known_values(vector) {
            let values = dot_rows(&self.matrices[matrix.0].columns, &x, rows.len);
            return self.data(rows, values.into());
        }
        self.add(Node::Dot(matrix, vector), Shape::Vector(rows))
    }

    /// The sum of a vector's elements; of a number, the number.
    pub fn sum(&mut self, v: Value) -> Value {
        if self.is_number(v) {
            return v;
        }
        simplify::sum(self, v)
    }

    /// The smallest element.
    pub fn minimum(&mut self, v: Value) -> Value {
        self.reduce(Reduction::Minimum, v)
    }

    /// The largest element.
    pub fn maximum(&mut self, v: Value) -> Value {
        self.reduce(Reduction::Maximum, v)
    }

    pub(super) fn reduce(&mut self, reduction: Reduction, v: Value) -> Value {
        if self.is_number(v) {
            return v;
        }
        if let Some(values) = self.known_values(v) {
            return self.constant(reduction.of(&values));
        }
        self.add(Node::Reduce(reduction, v), Shape::Number)
    }

    /// Elements of a vector by their numbers from 1, one for each element of `index` (or one, if that is a
    /// number). NaN where the index is not the number of an element.
    pub fn gather(&mut self, vector: Value, index: Value) -> Value {
        if self.is_number(vector) {
            return vector;
        }
        let shape = self.shape(index);
        if let Some(at) = self.known_values(index) {
            if let Some(values) = self.known_values(vector) {
                let out: Vec<f64> = at.iter().map(|&i| element(&values, i)).collect();
                return match shape {
                    Shape::Number => self.constant(out[0]),
                    Shape::Vector(axis) => self.data(axis, out.into()),
                };
            }
            if self.is_number(index) {
                return match position(at[0], self.shape_of(vector).len()) {
                    Some(at) => self.element(vector, at),
                    None => self.constant(f64::NAN),
                };
            }
            let whole = self.shape_of(vector) == &shape;
            if whole && at.iter().enumerate().all(|(i, &x)| x == (i + 1) as f64) {
                return vector;
            }
        }
        self.add(Node::Gather(vector, index), shape)
    }

    /// One element of a vector, from 0.
    ///
    /// # Panics
    /// When there is no such element.
    pub fn element(&mut self, vector: Value, at: usize) -> Value {
        assert!(at < self.shape_of(vector).len(), "an element of the vector");
        if self.is_number(vector) {
            return vector;
        }
        match self.node(vector) {
            Node::Input(slot) => self.add(Node::Input(slot + at), Shape::Number),
            Node::Data(data) => {
                let x = self.data[data][at];
                self.constant(x)
            }
            _ => self.add(Node::Element(vector, at), Shape::Number),
        }
    }

    /// The shape of an operation on these values.
    ///
    /// # Panics
    /// When two are vectors over different axes (formulas are checked before they are built).
    fn common_shape(&self, values: &[Value]) -> Shape {
        let mut shape = &Shape::Number;
        for &v in values {
            let other = self.shape_of(v);
            match (shape, other) {
                (Shape::Number, _) => shape = other,
                (Shape::Vector(a), Shape::Vector(b)) => {
                    assert!(Arc::ptr_eq(a, b) || a == b, "vectors over one axis");
                }
                _ => {}
            }
        }
        shape.clone()
    }

    /// The value of an operation on values that are all known.
    fn fold(
        &mut self,
        values: &[Value],
        shape: &Shape,
        f: &dyn Fn(&[f64]) -> f64,
    ) -> Option<Value> {
        let known: Vec<Arc<[f64]>> = values
            .iter()
            .map(|&v| self.known_values(v))
            .collect::<Option<_>>()?;
        let mut arguments = vec![0.0; known.len()];
        let mut at = |i: usize| {
            for (argument, values) in arguments.iter_mut().zip(&known) {
                *argument = if values.len() == 1 {
                    values[0]
                } else {
                    values[i]
                };
            }
            f(&arguments)
        };
        Some(match shape {
            Shape::Number => {
                let x = at(0);
                self.constant(x)
            }
            Shape::Vector(axis) => {
                let out: Vec<f64> = (0..axis.len).map(at).collect();
                self.data(axis.clone(), out.into())
            }
        })
    }

    /// The value of this node, made if it is new.
    pub(super) fn add(&mut self, node: Node, shape: Shape) -> Value {
        let axis = match &shape {
            Shape::Number => 0,
            Shape::Vector(axis) => {
                let known = self
                    .axes
                    .iter()
                    .position(|a| Arc::ptr_eq(a, axis) || a == axis);
                1 + known.unwrap_or_else(|| {
                    self.axes.push(axis.clone());
                    self.axes.len() - 1
                })
            }
        };
        if let Some(&v) = self.known.get(&(node, axis)) {
            return v;
        }
        let v = Value(u32::try_from(self.nodes.len()).expect("fewer than 2^32 operations"));
        let shape = match axis {
            0 => Shape::Number,
            at => Shape::Vector(self.axes[at - 1].clone()),
        };
        self.nodes.push(node);
        self.shapes.push(shape);
        self.known.insert((node, axis), v);
        v
    }

    /// An operation as it stands, without looking for a simpler one.
    pub(super) fn plain_unary(&mut self, op: Unary, a: Value) -> Value {
        let shape = self.shape(a);
        match self.fold(&[a], &shape, &|x| op.apply(x[0])) {
            Some(v) => v,
            None => self.add(Node::Unary(op, a), shape),
        }
    }

    pub(super) fn plain_binary(&mut self, op: Binary, a: Value, b: Value) -> Value {
        let shape = self.common_shape(&[a, b]);
        match self.fold(&[a, b], &shape, &|x| op.apply(x[0], x[1])) {
            Some(v) => v,
            None => self.add(Node::Binary(op, a, b), shape),
        }
    }

    pub(super) fn plain_ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value {
        let shape = self.common_shape(&[a, b, c]);
        match self.fold(&[a, b, c], &shape, &|x| op.apply(x[0], x[1], x[2])) {
            Some(v) => v,
            None => self.add(Node::Ternary(op, a, b, c), shape),
        }
    }

    pub(super) fn add_values(&mut self, a: Value, b: Value) -> Value {
        self.binary(Binary::Add, a, b)
    }
    pub(super) fn subtract(&mut self, a: Value, b: Value) -> Value {
        self.binary(Binary::Subtract, a, b)
    }
    pub(super) fn multiply(&mut self, a: Value, b: Value) -> Value {
        self.binary(Binary::Multiply, a, b)
    }
    pub(super) fn divide(&mut self, a: Value, b: Value) -> Value {
        self.binary(Binary::Divide, a, b)
    }
    pub(super) fn select(&mut self, c: Value, a: Value, b: Value) -> Value {
        self.ternary(Ternary::Select, c, a, b)
    }
}

impl Algebra for Graph {
    fn constant(&mut self, value: f64) -> Value {
        let value = if value.is_nan() { f64::NAN } else { value };
        self.add(Node::Constant(value.to_bits()), Shape::Number)
    }
    fn unary(&mut self, op: Unary, a: Value) -> Value {
        simplify::unary(self, op, a)
    }
    fn binary(&mut self, op: Binary, a: Value, b: Value) -> Value {
        simplify::binary(self, op, a, b)
    }
    fn ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value {
        simplify::ternary(self, op, a, b, c)
    }
    fn call(&mut self, function: &'static Function, a: Value, b: Value, c: Value) -> Value {
        let shape = self.common_shape(&[a, b, c]);
        let value = |x: &[f64]| (function.evaluate)(x[0], x[1], x[2]);
        match self.fold(&[a, b, c], &shape, &value) {
            Some(v) => v,
            None => self.add(Node::Call(function, a, b, c), shape),
        }
    }
}

/// The position, from 0, of the element with this number, if a vector of this length has it.
#[inline(always)]
pub(super) fn position(index: f64, len: usize) -> Option<usize> {
    if index >= 1.0 && index <= len as f64 && maths::floor(index) == index {
        Some(index as usize - 1)
    } else {
        None
    }
}

/// The element with this number; NaN if there is none.
#[inline(always)]
pub(super) fn element(values: &[f64], index: f64) -> f64 {
    match position(index, values.len()) {
        Some(at) => values[at],
        None => f64::NAN,
    }
}

/// A matrix times a vector, column after column.
pub(super) fn dot_rows(columns: &[Arc<[f64]>], x: &[f64], rows: usize) -> Vec<f64> {
    let row = |i: usize| {
        columns
            .iter()
            .zip(x)
            .fold(0.0, |sum, (column, x)| sum + column[i] * x)
    };
    (0..rows).map(row).collect()
}
