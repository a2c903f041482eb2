//! What the names in a density model's formulas mean.

use crate::formula::{Entity, Scope, Term};
use crate::reading::Table;
use std::collections::BTreeMap;
use std::sync::Arc;

/// The names that a formula may use: those defined so far, and the tables.
#[derive(Clone)]
pub struct Names {
    pub terms: BTreeMap<String, Term>,
    /// Columns with missing cells that are unknown: (table, column) and the completed column.
    pub completed: BTreeMap<(String, String), Term>,
    tables: BTreeMap<String, Arc<Table>>,
}

impl Names {
    pub fn new(tables: &BTreeMap<String, Arc<Table>>) -> Names {
        Names {
            terms: BTreeMap::new(),
            completed: BTreeMap::new(),
            tables: tables.clone(),
        }
    }
}

impl Scope for Names {
    fn find(&self, name: &str) -> Option<Entity> {
        match self.terms.get(name) {
            Some(term) => Some(Entity::Term(term.clone())),
            None => self
                .tables
                .get(name)
                .map(|table| Entity::Table(table.clone())),
        }
    }

    fn names(&self) -> Vec<String> {
        self.terms
            .keys()
            .chain(self.tables.keys())
            .cloned()
            .collect()
    }

    fn column(&self, table: &str, column: &str) -> Option<Term> {
        self.completed
            .get(&(table.to_string(), column.to_string()))
            .cloned()
    }
}
