//! Shapes of values: a number, a vector over a named axis, a matrix of columns.

use std::sync::Arc;

/// What a vector runs over. Two vectors go together element by element only over the same axis.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub enum Over {
    /// The rows of a data table.
    Rows { table: String },
    /// The levels of a column of labels, or the crossed levels of two.
    Levels { table: String, columns: Vec<String> },
    /// A plain count; `of` is the unknown that declared it.
    Count { of: String },
    /// The columns of a matrix of a table.
    Columns { table: String, matrix: String },
}

#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Axis {
    pub over: Over,
    pub len: usize,
    /// Names of the elements (row names, levels, column names); empty when they only have numbers from 1.
    pub labels: Vec<String>,
}

#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Shape {
    Number,
    Vector(Arc<Axis>),
}

/// What a value means: a number, or a condition held as 0 and 1.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    Number,
    Condition,
}
