//! What an unknown's `per` runs over, and what its elements are called.

use super::declared::Per;
use crate::formula::{Axis, Shape};
use crate::place::{Fault, Faults, Text, nearest};
use crate::reading::{Cells, Column, Table};
use std::collections::BTreeMap;
use std::sync::Arc;

/// The shape of an unknown or prediction `name` with this `per`.
pub fn shape_of(
    name: &Text,
    per: Option<&Per>,
    tables: &BTreeMap<String, Arc<Table>>,
    faults: &mut Faults,
) -> Option<Shape> {
    let axis = match per {
        None => return Some(Shape::Number),
        Some(Per::Count(count)) => Axis::count(&name.text, *count),
        Some(Per::Rows(text)) => Axis::rows(table(text, &text.text, tables, faults)?),
        Some(Per::Levels(texts)) => levels(texts, tables, faults)?,
    };
    Some(Shape::Vector(axis))
}

fn levels(
    texts: &[Text],
    tables: &BTreeMap<String, Arc<Table>>,
    faults: &mut Faults,
) -> Option<Arc<Axis>> {
    let mut columns = Vec::new();
    for text in texts {
        let (of, column) = text
            .text
            .split_once('.')
            .expect("levels are written table.column");
        let table = table(text, of, tables, faults)?;
        if let ([_], Some(matrix)) = (texts, table.matrix(column)) {
            return Some(Axis::columns(table, matrix));
        }
        columns.push((table, column, labels(text, column, table, faults)?));
    }
    match columns.as_slice() {
        [(table, column, levels)] => Some(Axis::levels(table, column, levels)),
        [(table, a, a_levels), (other, b, b_levels)] if table.name == other.name => {
            Some(Axis::crossed(table, (a, a_levels), (b, b_levels)))
        }
        _ => {
            let fault = Fault::at(
                texts[1].place.clone(),
                "two crossed columns must stand in one table",
            )
            .label("of another table");
            faults.push(fault);
            None
        }
    }
}

fn table<'t>(
    text: &Text,
    name: &str,
    tables: &'t BTreeMap<String, Arc<Table>>,
    faults: &mut Faults,
) -> Option<&'t Table> {
    let found = tables.get(name);
    if found.is_none() {
        let mut fault = Fault::at(text.place.clone(), format!("there is no table `{name}`"))
            .label("unknown table");
        if let Some(near) = nearest(name, tables.keys().map(String::as_str)) {
            fault = fault.help(format!("did you mean `{near}`?"));
        } else {
            fault = fault.help(format!("declare it as [data.{name}]"));
        }
        faults.push(fault);
    }
    found.map(Arc::as_ref)
}

fn labels<'t>(
    text: &Text,
    column: &str,
    table: &'t Table,
    faults: &mut Faults,
) -> Option<&'t [String]> {
    let fault = match table.column(column) {
        Some(Column {
            cells: Cells::Labels { levels, .. },
            ..
        }) => return Some(levels),
        Some(_) => Fault::at(
            text.place.clone(),
            format!("`{}` holds numbers, not labels", text.text),
        )
        .label("a column of numbers")
        .help("levels are the different labels of a column of text"),
        None => {
            let names = table.columns.iter().map(|column| column.name.as_str());
            let fault = Fault::at(
                text.place.clone(),
                format!("`{}` has no column `{column}`", table.name),
            )
            .label("unknown column");
            match nearest(column, names) {
                Some(near) => fault.help(format!("did you mean `{}.{near}`?", table.name)),
                None => fault,
            }
        }
    };
    faults.push(fault);
    None
}

/// What element `i` (from 0) of a value called `name` is called: `rate["Cawdle"]`, `beta[2]`, or `name`.
pub fn element_name(name: &str, shape: &Shape, i: usize) -> String {
    match shape {
        Shape::Number => name.to_string(),
        Shape::Vector(axis) => match axis.labels.get(i) {
            Some(label) => format!("{name}[\"{label}\"]"),
            None => format!("{name}[{}]", i + 1),
        },
    }
}
