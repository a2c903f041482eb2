//! The tape: what a program does, step by step.
//!
//! All numbers stand in packs of eight doubles. With several lanes a pack is one number in each of eight
//! lanes, and a vector is one pack a row; with one lane a pack of a vector is eight consecutive rows, and a
//! number fills all eight places. So most operations are the same flat loop in both cases.

use super::super::graph::Reduction;
use super::pairs::Pair;
use crate::laws::Function;
use crate::maths::{Binary, Ternary, Unary};
use std::sync::Arc;

/// A register that holds one number a lane.
pub(super) type Scalar = usize;
/// A place for a vector: a whole one, or a block of one.
pub(super) type Store = usize;

#[derive(Debug)]
pub(super) struct Tape {
    pub inputs: usize,
    /// Slots read as numbers, and vectors from a first slot on.
    pub scalar_inputs: Vec<(usize, Scalar)>,
    pub vector_inputs: Vec<(usize, Store)>,
    pub constants: Vec<(Scalar, f64)>,
    pub scalars: usize,
    pub stores: Vec<StoreForm>,
    pub data: Vec<Arc<[f64]>>,
    pub tables: Vec<Vec<u32>>,
    pub matrices: Vec<Tiles>,
    pub steps: Vec<Step>,
    pub outputs: Vec<Output>,
    pub cost: f64,
}

/// How much a store holds, and with what it begins.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum StoreForm {
    /// A block, used again for block after block.
    Block,
    /// A block that holds a number of each lane through a loop.
    Spread,
    /// A block that holds a number from the beginning.
    Constant(f64),
    /// All rows.
    Whole(usize),
    /// All rows of an entry of the data.
    Data(usize),
}

#[derive(Debug, Clone, Copy)]
pub(super) enum Output {
    Scalar(Scalar),
    Vector(Store, usize),
}

#[derive(Debug)]
pub(super) enum Step {
    Unary(Unary, Scalar, Scalar),
    Binary(Binary, Scalar, Scalar, Scalar),
    Ternary(Ternary, Scalar, Scalar, Scalar, Scalar),
    /// Two operations, of three numbers.
    Pair(Pair, Scalar, [Scalar; 3]),
    /// An operation that takes long and knows no vectors, lane by lane: only in the lanes in use.
    Slow(Slow, Scalar, [Scalar; 3]),
    /// One element, from 0, of a whole vector.
    Element(Scalar, Store, usize),
    /// An element of a whole vector by its number from 1.
    Pick(Scalar, Store, usize, Scalar),
    Loop(Loop),
}

impl Step {
    /// The registers that it reads, as often as it does.
    pub fn reads(&self) -> Vec<Scalar> {
        match self {
            Step::Unary(_, _, a) | Step::Pick(.., a) => vec![*a],
            Step::Binary(_, _, a, b) => vec![*a, *b],
            Step::Ternary(_, _, a, b, c) => vec![*a, *b, *c],
            Step::Pair(_, _, operands) | Step::Slow(_, _, operands) => operands.to_vec(),
            Step::Element(..) => Vec::new(),
            Step::Loop(rows) => rows.spreads.iter().map(|spread| spread.1).collect(),
        }
    }
}

#[derive(Debug, Clone, Copy)]
pub(super) enum Slow {
    Unary(Unary),
    Binary(Binary),
    Ternary(Ternary),
    Call(&'static Function),
}

impl Slow {
    /// The value in the lanes in use, that of the first in the others.
    #[inline(never)]
    pub fn lanes(self, [a, b, c]: [&[f64; 8]; 3], live: usize) -> [f64; 8] {
        let mut out = [0.0; 8];
        for (lane, out) in out.iter_mut().enumerate().take(live) {
            *out = match self {
                Slow::Unary(op) => op.apply(a[lane]),
                Slow::Binary(op) => op.apply(a[lane], b[lane]),
                Slow::Ternary(op) => op.apply(a[lane], b[lane], c[lane]),
                Slow::Call(function) => (function.evaluate)(a[lane], b[lane], c[lane]),
            };
        }
        let first = out[0];
        out[live..].fill(first);
        out
    }
}

/// All rows of one axis, block after block.
#[derive(Debug)]
pub(super) struct Loop {
    pub rows: usize,
    /// Numbers written over a block before the first one.
    pub spreads: Vec<(Store, Scalar)>,
    pub body: Vec<RowStep>,
    pub reductions: Vec<(Reduction, Store, Scalar)>,
}

#[derive(Debug)]
pub(super) enum RowStep {
    Unary(Unary, Store, Store),
    Binary(Binary, Store, Store, Store),
    Ternary(Ternary, Store, Store, Store, Store),
    Call(&'static Function, Store, [Store; 3]),
    /// Data that is the same in all lanes.
    Spread(Store, usize),
    /// Elements of a whole vector by a table of positions.
    Gather(Store, Store, usize),
    /// Elements of a whole vector (of this length) by their numbers from 1.
    Pick(Store, Store, usize, Store),
    /// A matrix times a whole vector.
    Dot(Store, usize, Store),
}

/// A matrix in tiles of eight rows, column after column in each; the last tile is filled up with zeros.
#[derive(Debug)]
pub(super) struct Tiles {
    pub columns: usize,
    pub tiles: Vec<[f64; 8]>,
}

impl Tiles {
    pub fn new(rows: usize, columns: &[Arc<[f64]>]) -> Tiles {
        let mut tiles = Vec::with_capacity(rows.div_ceil(8) * columns.len());
        for first in (0..rows).step_by(8) {
            for column in columns {
                let mut tile = [0.0; 8];
                let last = rows.min(first + 8);
                tile[..last - first].copy_from_slice(&column[first..last]);
                tiles.push(tile);
            }
        }
        Tiles {
            columns: columns.len(),
            tiles,
        }
    }
}

/// The place in a table of positions that stands for no element.
pub(super) const NOWHERE: u32 = u32::MAX;

impl Tape {
    /// The most reductions of one loop.
    pub fn reductions(&self) -> usize {
        let of = |step: &Step| match step {
            Step::Loop(rows) => rows.reductions.len(),
            _ => 0,
        };
        self.steps.iter().map(of).max().unwrap_or(0)
    }
}
