//! Shapes of values: a number, a vector over a named axis, a matrix of columns.

use crate::reading::{Matrix, Table};
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

impl Axis {
    /// The rows of a table.
    pub fn rows(table: &Table) -> Arc<Axis> {
        Arc::new(Axis {
            over: Over::Rows {
                table: table.name.clone(),
            },
            len: table.rows,
            labels: table
                .names
                .as_ref()
                .map_or_else(Vec::new, |names| names.values.clone()),
        })
    }

    /// The levels of a column of labels.
    pub fn levels(table: &Table, column: &str, levels: &[String]) -> Arc<Axis> {
        Arc::new(Axis {
            over: Over::Levels {
                table: table.name.clone(),
                columns: vec![column.into()],
            },
            len: levels.len(),
            labels: levels.to_vec(),
        })
    }

    /// The levels of two columns crossed: every pair, those of the second column running faster.
    pub fn crossed(
        table: &Table,
        first: (&str, &[String]),
        second: (&str, &[String]),
    ) -> Arc<Axis> {
        let pair = |a: &String| {
            second
                .1
                .iter()
                .map(|b| pair_label(a, b))
                .collect::<Vec<_>>()
        };
        let labels: Vec<String> = first.1.iter().flat_map(pair).collect();
        Arc::new(Axis {
            over: Over::Levels {
                table: table.name.clone(),
                columns: vec![first.0.into(), second.0.into()],
            },
            len: labels.len(),
            labels,
        })
    }

    /// A plain count, declared by an unknown.
    pub fn count(of: &str, len: usize) -> Arc<Axis> {
        Arc::new(Axis {
            over: Over::Count { of: of.into() },
            len,
            labels: Vec::new(),
        })
    }

    /// The columns of a matrix of a table.
    pub fn columns(table: &Table, matrix: &Matrix) -> Arc<Axis> {
        let labels = table.matrix_columns(matrix);
        Arc::new(Axis {
            over: Over::Columns {
                table: table.name.clone(),
                matrix: matrix.name.clone(),
            },
            len: labels.len(),
            labels,
        })
    }

    /// The element with this number from 1, in words: "row 2 of stations".
    pub fn numbered(&self, number: usize) -> String {
        let element = self.element();
        match (&self.over, element.split_once(' ')) {
            (Over::Levels { .. }, _) | (_, None) => format!("{element} no. {number}"),
            (_, Some((what, rest))) => format!("{what} {number} {rest}"),
        }
    }

    /// What its elements are, in words: "row of stations", "level of stations.site".
    pub fn element(&self) -> String {
        match &self.over {
            Over::Rows { table } => format!("row of {table}"),
            Over::Levels { table, columns } => {
                let columns: Vec<String> = columns.iter().map(|c| format!("{table}.{c}")).collect();
                match columns.as_slice() {
                    [one] => format!("level of {one}"),
                    several => format!("pair of levels of {}", several.join(" and ")),
                }
            }
            Over::Count { of } => format!("element of {of}"),
            Over::Columns { table, matrix } => format!("column of {table}.{matrix}"),
        }
    }
}

/// The name of a pair of crossed levels.
pub fn pair_label(first: &str, second: &str) -> String {
    format!("{first}, {second}")
}

impl Shape {
    pub fn len(&self) -> usize {
        match self {
            Shape::Number => 1,
            Shape::Vector(axis) => axis.len,
        }
    }

    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    pub fn axis(&self) -> Option<&Arc<Axis>> {
        match self {
            Shape::Number => None,
            Shape::Vector(axis) => Some(axis),
        }
    }

    /// "one value", "one value per row of stations".
    pub fn words(&self) -> String {
        match self {
            Shape::Number => "one value".into(),
            Shape::Vector(axis) => format!("one value per {}", axis.element()),
        }
    }
}
