//! From the tree of a formula to operations: names are looked up, shapes and kinds are checked.

use super::expr::{Call, Expr, Form, Infix, Prefix};
use super::function::{self, Action, Extreme};
use super::graph::Graph;
use super::law_term::LawTerm;
use super::scope::{Entity, Scope, Term};
use super::shape::{Axis, Kind, Shape};
use crate::laws::{self, Algebra, Value};
use crate::maths::{Binary, Unary};
use crate::place::{Fault, Faults, Place, nearest};
use crate::reading::{Cells, Table};
use std::sync::Arc;

/// Builds a formula's operations in the graph.
pub fn lower(
    expr: &Expr,
    scope: &dyn Scope,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<Term> {
    Lowering {
        scope,
        graph,
        faults,
        infinite: Vec::new(),
        choosing: false,
    }
    .term(expr)
}

/// Builds the parameters of a law (`gamma(shape = 2, rate = b)`, or a law wrapped in `truncated`).
pub fn lower_law(
    expr: &Expr,
    scope: &dyn Scope,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<LawTerm> {
    Lowering {
        scope,
        graph,
        faults,
        infinite: Vec::new(),
        choosing: false,
    }
    .law(expr)
}

pub(super) struct Lowering<'a> {
    pub scope: &'a dyn Scope,
    pub graph: &'a mut Graph,
    pub faults: &'a mut Faults,
    /// Vectors of data that are not finite throughout, with the text and place that made them.
    infinite: Vec<(Value, String, Place)>,
    /// Inside an `if`.
    choosing: bool,
}

impl Lowering<'_> {
    pub fn fault(&mut self, fault: Fault) {
        self.faults.push(fault);
    }

    fn number(&mut self, value: Value) -> Term {
        self.made(value, Kind::Number)
    }

    fn made(&mut self, value: Value, kind: Kind) -> Term {
        let shape = self.graph.shape(value);
        Term { value, shape, kind }
    }

    pub fn term(&mut self, expr: &Expr) -> Option<Term> {
        let term = self.part(expr)?;
        self.remember(&term, expr);
        Some(term)
    }

    fn part(&mut self, expr: &Expr) -> Option<Term> {
        match &expr.form {
            Form::Number(value) => {
                let value = self.graph.constant(*value);
                Some(self.number(value))
            }
            Form::Name(name) => self.name(name, &expr.place),
            Form::Column { table, column } => self.column(table, column, &expr.place),
            Form::Label(label) => {
                self.fault(
                    Fault::at(expr.place.clone(), format!("the label \"{label}\" is not a value"))
                        .label("a label")
                        .help("labels stand in an index, `rate[\"Cawdle\"]`, or are compared with a column of labels, `t.site == \"north\"`"),
                );
                None
            }
            Form::Prefix(Prefix::Negate, a) => {
                let a = self.numbers(a)?;
                let value = self.graph.unary(Unary::Negate, a.value);
                Some(self.number(value))
            }
            Form::Prefix(Prefix::Not, a) => {
                let a = self.condition(a)?;
                let value = self.graph.unary(Unary::Not, a.value);
                Some(self.made(value, Kind::Condition))
            }
            Form::Infix(infix, a, b) => self.infix(*infix, a, b),
            Form::Index { of, at } => self.index(of, at, &expr.place),
            Form::Call(call) => self.call(call, expr),
            Form::List(_) => {
                self.fault(
                    Fault::at(expr.place.clone(), "a list of values cannot stand here")
                        .label("a list")
                        .help("lists are the probabilities of `categorical(probabilities = [0.2, 0.8])`; other vectors come from data or from an unknown with `per`"),
                );
                None
            }
        }
    }

    /// A value that must be numbers.
    pub fn numbers(&mut self, expr: &Expr) -> Option<Term> {
        self.of_kind(expr, Kind::Number, |fault| {
            fault
                .label("true or false")
                .help(format!("write `if({expr}, 1, 0)` for a number"))
        })
    }

    /// A value that must be a condition.
    fn condition(&mut self, expr: &Expr) -> Option<Term> {
        self.of_kind(expr, Kind::Condition, |fault| {
            fault
                .label("a condition is needed")
                .help(format!("compare it with something: `{expr} > 0`"))
        })
    }

    /// A value of one kind; of the other, a fault with what `remedy` adds to it.
    fn of_kind(
        &mut self,
        expr: &Expr,
        kind: Kind,
        remedy: impl FnOnce(Fault) -> Fault,
    ) -> Option<Term> {
        let term = self.term(expr)?;
        if term.kind == kind {
            return Some(term);
        }
        let (is, wanted) = match kind {
            Kind::Number => ("a condition", "a number"),
            Kind::Condition => ("a number", "a condition"),
        };
        let fault = Fault::at(
            expr.place.clone(),
            format!("`{expr}` is {is}, not {wanted}"),
        );
        self.fault(remedy(fault));
        None
    }

    fn name(&mut self, name: &str, place: &Place) -> Option<Term> {
        match self.scope.find(name) {
            Some(Entity::Term(term)) => Some(term),
            Some(Entity::Table(table)) => {
                let columns: Vec<&str> = table.columns.iter().map(|c| c.name.as_str()).collect();
                self.fault(
                    Fault::at(place.clone(), format!("`{name}` is a table, not a value"))
                        .label("a column is needed")
                        .help(format!("write `{name}.` and one of {}", listed(&columns))),
                );
                None
            }
            None => {
                let fault = Fault::at(place.clone(), format!("nothing is called `{name}` here"))
                    .label("unknown name");
                let called = function::find(name).map(|f| f.usage.to_string());
                let law = laws::table().iter().find(|law| law.name() == name);
                let names = self.scope.names();
                let columns = self.columns_called(name);
                let help = match (called, law, nearest(name, names.iter().map(String::as_str))) {
                    _ if !columns.is_empty() => {
                        Some(format!("did you mean `{}`?", columns.join("` or `")))
                    }
                    (Some(usage), ..) => Some(format!("the function is called like `{usage}`")),
                    (_, Some(_), _) => Some(format!(
                        "`{name}` is a law; its functions are `log_density({name}(…), x)` and the like"
                    )),
                    (.., Some(near)) => Some(format!("did you mean `{near}`?")),
                    _ if names.is_empty() => None,
                    _ => Some(format!(
                        "known here: {}",
                        listed(&names.iter().map(String::as_str).collect::<Vec<_>>())
                    )),
                };
                self.fault(Fault { help, ..fault });
                None
            }
        }
    }

    /// Columns and matrices of tables here that have this name, as `table.column`.
    fn columns_called(&self, name: &str) -> Vec<String> {
        let mut found = Vec::new();
        for known in self.scope.names() {
            if let Some(Entity::Table(table)) = self.scope.find(&known)
                && (table.column(name).is_some() || table.matrix(name).is_some())
            {
                found.push(format!("{known}.{name}"));
            }
        }
        found
    }

    /// The table called so.
    fn table(&mut self, name: &str, place: &Place) -> Option<Arc<Table>> {
        let fault = match self.scope.find(name) {
            Some(Entity::Table(table)) => return Some(table),
            Some(Entity::Term(_)) => Fault::at(place.clone(), format!("`{name}` is not a table"))
                .label("has no columns")
                .help("a dot stands between a table and one of its columns"),
            None => {
                let fault = Fault::at(place.clone(), format!("no table is called `{name}`"))
                    .label("unknown table");
                let names = self.scope.names();
                let tables: Vec<&str> = names
                    .iter()
                    .map(String::as_str)
                    .filter(|name| matches!(self.scope.find(name), Some(Entity::Table(_))))
                    .collect();
                match nearest(name, tables.iter().copied()) {
                    Some(near) => fault.help(format!("did you mean `{near}`?")),
                    None if tables.is_empty() => fault.help("tables are declared as [data.NAME]"),
                    None => fault.help(format!("tables here: {}", listed(&tables))),
                }
            }
        };
        self.fault(fault);
        None
    }

    fn unknown_column(&mut self, table: &Table, column: &str, place: &Place) {
        let known: Vec<&str> = table
            .columns
            .iter()
            .map(|c| c.name.as_str())
            .chain(table.matrices.iter().map(|m| m.name.as_str()))
            .collect();
        let help = match nearest(column, known.iter().copied()) {
            Some(near) => format!("did you mean `{}.{near}`?", table.name),
            None => format!("its columns are {}", listed(&known)),
        };
        self.fault(
            Fault::at(
                place.clone(),
                format!("table `{}` has no column `{column}`", table.name),
            )
            .label("unknown column")
            .help(help),
        );
    }

    fn column(&mut self, table: &str, column: &str, place: &Place) -> Option<Term> {
        if let Some(term) = self.scope.column(table, column) {
            return Some(term);
        }
        let table = self.table(table, place)?;
        let Some(found) = table.column(column) else {
            if table.matrix(column).is_some() {
                self.fault(
                    Fault::at(
                        place.clone(),
                        format!("`{}.{column}` is a matrix of columns", table.name),
                    )
                    .label("not one value per row")
                    .help(format!(
                        "a matrix stands in a product: `dot({}.{column}, beta)`",
                        table.name
                    )),
                );
            } else {
                self.unknown_column(&table, column, place);
            }
            return None;
        };
        match &found.cells {
            Cells::Numbers { values, missing } if missing.is_empty() => {
                let value = self.graph.data(Axis::rows(&table), values.clone());
                Some(self.number(value))
            }
            Cells::Numbers { missing, .. } => {
                let empty = match missing.len() {
                    1 => "an empty cell".to_owned(),
                    count => format!("{count} empty cells"),
                };
                self.fault(
                    Fault::at(
                        place.clone(),
                        format!("column `{column}` of table `{}` has {empty}", table.name),
                    )
                    .label("cells are missing")
                    .help(format!(
                        "cells that are unknown need a law for their column, with unknowns of its own or without: \
                         [model.observed] {column} = {{ of = \"{}.{column}\", law = \"normal(mean = …, sd = …)\" }}; \
                         or leave the rows out: [data.{}] missing = \"drop rows\"",
                        table.name, table.name
                    )),
                );
                None
            }
            Cells::Labels { .. } => {
                self.fault(
                    Fault::at(place.clone(), format!("column `{column}` of table `{}` holds labels, not numbers", table.name))
                        .label("labels")
                        .help(format!(
                            "labels stand in an index, `effect[{}.{column}]`, or are compared, `{}.{column} == \"…\"`",
                            table.name, table.name
                        )),
                );
                None
            }
        }
    }

    /// The column of labels that an expression names, if it names one.
    fn labels(&self, expr: &Expr) -> Option<(Arc<Table>, String)> {
        let Form::Column { table, column } = &expr.form else {
            return None;
        };
        let Some(Entity::Table(table)) = self.scope.find(table) else {
            return None;
        };
        let labels = matches!(table.column(column)?.cells, Cells::Labels { .. });
        labels.then(|| (table.clone(), column.clone()))
    }

    fn infix(&mut self, infix: Infix, a: &Expr, b: &Expr) -> Option<Term> {
        let op = match infix {
            Infix::Add => Binary::Add,
            Infix::Subtract => Binary::Subtract,
            Infix::Multiply => Binary::Multiply,
            Infix::Divide => Binary::Divide,
            Infix::Power => Binary::Power,
            Infix::Equal => Binary::Equal,
            Infix::NotEqual => Binary::NotEqual,
            Infix::Less | Infix::Greater => Binary::Less,
            Infix::LessEqual | Infix::GreaterEqual => Binary::LessEqual,
            Infix::And => Binary::And,
            Infix::Or => Binary::Or,
        };
        let kind = match infix {
            Infix::Add | Infix::Subtract | Infix::Multiply | Infix::Divide | Infix::Power => {
                Kind::Number
            }
            _ => Kind::Condition,
        };
        if matches!(infix, Infix::Equal | Infix::NotEqual)
            && let Some(value) = self.compare_labels(infix, a, b)
        {
            return value;
        }
        let (x, y) = if matches!(infix, Infix::And | Infix::Or) {
            (self.condition(a), self.condition(b))
        } else {
            (self.numbers(a), self.numbers(b))
        };
        let (x, y) = (x?, y?);
        self.agree(&[(&x, a), (&y, b)])?;
        let (first, second) = match infix {
            Infix::Greater | Infix::GreaterEqual => (y.value, x.value),
            _ => (x.value, y.value),
        };
        let value = self.graph.binary(op, first, second);
        Some(self.made(value, kind))
    }

    /// `t.site == "north"`: a condition for each row. `None` when neither side has to do with labels.
    fn compare_labels(&mut self, infix: Infix, a: &Expr, b: &Expr) -> Option<Option<Term>> {
        let (column, label, column_side) = match (&a.form, &b.form) {
            (_, Form::Label(label)) => (self.labels(a)?, label, b),
            (Form::Label(label), _) => (self.labels(b)?, label, a),
            _ => return None,
        };
        let (table, name) = column;
        let Cells::Labels { levels, index } = &table.column(&name)?.cells else {
            return None;
        };
        let Some(level) = levels.iter().position(|l| l == label) else {
            let known: Vec<&str> = levels.iter().map(String::as_str).collect();
            let fault = Fault::at(
                column_side.place.clone(),
                format!("no cell of `{}.{name}` is \"{label}\"", table.name),
            )
            .label("unknown label");
            self.fault(near_label(fault, label, &known));
            return Some(None);
        };
        let wanted = infix == Infix::Equal;
        let holds: Vec<f64> = index
            .iter()
            .map(|&i| if (i == level) == wanted { 1.0 } else { 0.0 })
            .collect();
        let value = self.graph.data(Axis::rows(&table), holds.into());
        Some(Some(self.made(value, Kind::Condition)))
    }

    /// Checks that the vectors among these run over one axis.
    pub fn agree(&mut self, terms: &[(&Term, &Expr)]) -> Option<()> {
        let mut first: Option<(&Arc<Axis>, &Expr)> = None;
        for (term, expr) in terms {
            let Shape::Vector(axis) = &term.shape else {
                continue;
            };
            let Some((other, other_expr)) = first else {
                first = Some((axis, expr));
                continue;
            };
            if Arc::ptr_eq(axis, other) || axis == other {
                continue;
            }
            let what = format!(
                "`{other_expr}` has one value per {}, `{expr}` one per {}",
                other.element(),
                axis.element()
            );
            let mut fault = Fault::at(expr.place.clone(), what)
                .label(format!("one value per {}", axis.element()))
                .related(
                    other_expr.place.clone(),
                    format!("one value per {}", other.element()),
                );
            fault.help = spread_advice(other_expr, other, axis)
                .or_else(|| spread_advice(expr, axis, other))
                .or_else(|| Some("values go together element by element only where they run over the same elements".into()));
            self.fault(fault);
            return None;
        }
        Some(())
    }
}

/// "write `effect[stations.site]`", where levels of a column meet rows of its table.
fn spread_advice(expr: &Expr, axis: &Axis, rows: &Axis) -> Option<String> {
    use super::shape::Over;
    let (Over::Levels { table, columns }, Over::Rows { table: of }) = (&axis.over, &rows.over)
    else {
        return None;
    };
    if table != of || !matches!(expr.form, Form::Name(_) | Form::Column { .. }) {
        return None;
    }
    let columns: Vec<String> = columns.iter().map(|c| format!("{table}.{c}")).collect();
    Some(format!("write `{expr}[{}]`", columns.join(", ")))
}

/// Some names in one sentence.
pub(super) fn listed(names: &[&str]) -> String {
    const SHOWN: usize = 12;
    let mut out: Vec<String> = names
        .iter()
        .take(SHOWN)
        .map(|name| format!("`{name}`"))
        .collect();
    if names.len() > SHOWN {
        out.push(format!("and {} more", names.len() - SHOWN));
    }
    out.join(", ")
}

/// The nearest known label, or the labels there are.
fn near_label(fault: Fault, label: &str, known: &[&str]) -> Fault {
    match nearest(label, known.iter().copied()) {
        Some(near) => fault.help(format!("did you mean \"{near}\"?")),
        None => {
            let shown: Vec<String> = known.iter().take(12).map(|l| format!("\"{l}\"")).collect();
            let more = if known.len() > 12 { ", …" } else { "" };
            fault.help(format!("known are {}{more}", shown.join(", ")))
        }
    }
}

mod calls;
mod finite;
mod indexing;
mod law;
