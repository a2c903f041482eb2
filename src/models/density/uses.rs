//! What a formula uses, read from its tree.

use crate::formula::{Expr, Form};
use std::collections::BTreeSet;

/// The names used, columns as `table.column`.
pub fn uses(expr: &Expr) -> BTreeSet<String> {
    let mut used = BTreeSet::new();
    expr.visit(&mut |part| match &part.form {
        Form::Name(name) => {
            used.insert(name.clone());
        }
        Form::Column { table, column } => {
            used.insert(format!("{table}.{column}"));
        }
        _ => {}
    });
    used
}

/// The table and column of a formula that is a column and nothing else.
pub fn as_column(expr: &Expr) -> Option<(&str, &str)> {
    match &expr.form {
        Form::Column { table, column } => Some((table, column)),
        _ => None,
    }
}
