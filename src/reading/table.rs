//! A data file as read: columns of numbers and of labels, with row names, units and matrices of columns.

use crate::place::{Faults, Place, Source, Text};
use crate::reading::csv::Rows;
use crate::reading::load::{How, load};
use std::sync::Arc;

/// A data file (`[data.NAME]`).
#[derive(Debug, Clone, PartialEq)]
pub struct Table {
    /// As the study calls it.
    pub name: String,
    pub rows: usize,
    pub names: Option<RowNames>,
    /// In the order of the file.
    pub columns: Vec<Column>,
    pub matrices: Vec<Matrix>,
    /// Of the bytes of the file, in lower-case hexadecimal.
    pub sha256: String,
    /// Empty cells found, those of dropped rows included.
    pub missing: usize,
    /// Rows left out because a cell was empty (`missing = "drop rows"`), numbered as in the file from 1.
    pub dropped: Vec<usize>,
    pub source: Arc<Source>,
    /// Where each row begins in the source.
    pub(super) starts: Vec<usize>,
}

/// The rows are called by the cells of a column, each of which occurs once.
#[derive(Debug, Clone, PartialEq)]
pub struct RowNames {
    pub column: String,
    pub values: Vec<String>,
}

#[derive(Debug, Clone, PartialEq)]
pub struct Column {
    pub name: String,
    pub unit: Option<String>,
    /// Its name in the header of the data file.
    pub place: Place,
    /// Its position in a row of the file, from 0.
    pub position: usize,
    pub cells: Cells,
}

#[derive(Debug, Clone, PartialEq)]
pub enum Cells {
    /// `values[row]` is 0 where the cell is empty; `missing` lists those rows (from 0), in order. Empty
    /// unless the study says `missing = "unknown"`.
    Numbers {
        values: Arc<[f64]>,
        missing: Vec<usize>,
    },
    /// `index[row]` is the position in `levels`, which stand in the order of their first appearance.
    Labels {
        levels: Vec<String>,
        index: Vec<usize>,
    },
}

/// Columns taken together under one name (`[data.t.matrix] x = "x*"`), in the order of the file.
#[derive(Debug, Clone, PartialEq)]
pub struct Matrix {
    pub name: String,
    /// Positions in `Table::columns`; all are numbers without missing cells.
    pub columns: Vec<usize>,
}

impl Table {
    pub fn column(&self, name: &str) -> Option<&Column> {
        self.columns.iter().find(|column| column.name == name)
    }

    pub fn matrix(&self, name: &str) -> Option<&Matrix> {
        self.matrices.iter().find(|matrix| matrix.name == name)
    }

    /// Names of the columns of a matrix, in order.
    pub fn matrix_columns(&self, matrix: &Matrix) -> Vec<String> {
        let name = |&at: &usize| self.columns[at].name.clone();
        matrix.columns.iter().map(name).collect()
    }

    /// The row called so, from 0.
    pub fn row(&self, name: &str) -> Option<usize> {
        let names = self.names.as_ref()?;
        names.values.iter().position(|value| value == name)
    }

    /// The cell of a row (from 0) in the data file, for faults found in its value.
    pub fn cell(&self, row: usize, column: &Column) -> Place {
        let mut cells = Vec::new();
        let read = self
            .starts
            .get(row)
            .map(|&start| Rows::starting(&self.source.text, start).next(&mut cells));
        let span = match (read, cells.get(column.position)) {
            (Some(Ok(true)), Some(cell)) => cell.span.clone(),
            _ => return column.place.clone(),
        };
        Place {
            source: self.source.clone(),
            span,
        }
    }

    /// A table from text that stands in no file (tests), without names, units and matrices.
    pub fn bare(name: &str, text: &str) -> Result<Table, Faults> {
        let mut faults = Faults::default();
        let source = Text::bare(text).place.source;
        match load(name, source, String::new(), &How::default(), &mut faults) {
            Some(table) if faults.is_empty() => Ok(table),
            _ => Err(faults),
        }
    }
}
