//! Missing cells of an observed column as unknowns (`missing = "unknown"`), with the observed law.

use super::declared::{Declared, ObservedEntry};
use super::names::Names;
use super::unknown::{Named, Placed, put};
use super::uses::as_column;
use crate::formula::{Axis, Expr, Graph, Kind, LawTerm, Over, Shape, Term, lower_law};
use crate::laws::Algebra;
use crate::maths::Ternary;
use crate::place::{Fault, Faults};
use crate::reading::{Cells, Table};
use std::collections::BTreeMap;
use std::sync::Arc;

/// An observed column with missing cells.
pub struct Missing<'a> {
    entry: &'a ObservedEntry,
    table: Arc<Table>,
    column: String,
    /// Rows with an empty cell, from 0.
    rows: Vec<usize>,
    values: Arc<[f64]>,
}

/// The observed columns with missing cells.
pub fn find<'a>(
    declared: &'a Declared,
    tables: &BTreeMap<String, Arc<Table>>,
    faults: &mut Faults,
) -> Vec<Missing<'a>> {
    let mut found = Vec::new();
    for entry in &declared.observed {
        let Some((table, column)) = as_column(&entry.of) else {
            continue;
        };
        let Some(table) = tables.get(table) else {
            continue;
        };
        let Some(Cells::Numbers { values, missing }) =
            table.column(column).map(|column| &column.cells)
        else {
            continue;
        };
        if missing.is_empty() {
            continue;
        }
        let others = [
            &entry.right,
            &entry.left,
            &entry.interval,
            &entry.entered,
            &entry.weight,
        ];
        if others.iter().any(|part| part.is_some()) {
            let fault = Fault::at(
                entry.of.place.clone(),
                format!("`{}.{column}` has missing cells, which can't be unknowns of a censored, late-entering or weighted entry", table.name),
            )
            .label(format!("{} missing", missing.len()))
            .help(format!("leave those rows out: [data.{}] missing = \"drop rows\"", table.name));
            faults.push(fault);
            continue;
        }
        found.push(Missing {
            entry,
            table: table.clone(),
            column: column.to_string(),
            rows: missing.clone(),
            values: values.clone(),
        });
    }
    found
}

impl Missing<'_> {
    pub fn name(&self) -> String {
        format!("{}.{}", self.table.name, self.column)
    }
    pub fn column(&self) -> (String, String) {
        (self.table.name.clone(), self.column.clone())
    }
    pub fn law(&self) -> &Expr {
        &self.entry.law
    }

    /// Puts the missing cells into the graph as an unknown, and gives the completed column.
    pub fn place(
        &self,
        index: usize,
        names: &Names,
        graph: &mut Graph,
        faults: &mut Faults,
    ) -> Option<(Placed, Term)> {
        let law = lower_law(&self.entry.law, names, graph, faults)?;
        let rows = Axis::rows(&self.table);
        let labels = self.rows.iter().map(|&row| match rows.labels.get(row) {
            Some(label) => label.clone(),
            None => format!("row {}", row + 1),
        });
        let cells = Arc::new(Axis {
            over: Over::Count { of: self.name() },
            len: self.rows.len(),
            labels: labels.collect(),
        });
        let shape = Shape::Vector(cells.clone());
        let picked = self.rows.iter().map(|&row| (row + 1) as f64).collect();
        let picked = graph.data(cells.clone(), picked);
        let law = LawTerm {
            parameters: law
                .parameters
                .iter()
                .map(|&value| graph.gather(value, picked))
                .collect(),
            from: law.from.map(|value| graph.gather(value, picked)),
            to: law.to.map(|value| graph.gather(value, picked)),
            shape: shape.clone(),
            ..law
        };
        let named = Named {
            name: &self.name(),
            unit: None,
            shape,
            index,
        };
        let placed = put(named, &law, graph);

        let mut position = vec![1.0; self.table.rows];
        let mut empty = vec![0.0; self.table.rows];
        for (i, &row) in self.rows.iter().enumerate() {
            position[row] = (i + 1) as f64;
            empty[row] = 1.0;
        }
        let position = graph.data(rows.clone(), position.into());
        let filled = graph.gather(placed.term.value, position);
        let empty = graph.data(rows.clone(), empty.into());
        let known = graph.data(rows.clone(), self.values.clone());
        let value = graph.ternary(Ternary::Select, empty, filled, known);
        let completed = Term {
            value,
            shape: Shape::Vector(rows),
            kind: Kind::Number,
        };
        Some((placed, completed))
    }
}
