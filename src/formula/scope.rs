//! What the names in a formula stand for.

use super::shape::{Kind, Shape};
use crate::laws::Value;
use crate::reading::Table;
use std::sync::Arc;

/// A value with its shape and meaning.
#[derive(Debug, Clone, PartialEq)]
pub struct Term {
    pub value: Value,
    pub shape: Shape,
    pub kind: Kind,
}

/// What a name stands for.
#[derive(Debug, Clone)]
pub enum Entity {
    Term(Term),
    Table(Arc<Table>),
}

/// The names that formulas of one place may use.
pub trait Scope {
    fn find(&self, name: &str) -> Option<Entity>;
    /// All names, for "did you mean".
    fn names(&self) -> Vec<String>;
    /// The value of a column that is more than its numbers in the file (some of its cells are unknowns).
    /// Asked before the file's numbers are used.
    fn column(&self, _table: &str, _column: &str) -> Option<Term> {
        None
    }
}
