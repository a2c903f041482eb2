//! `x[3]`, `x["Cawdle"]`, `effect[stations.site]`, `cross[t.a, t.b]`, `x[k]`.

use super::super::expr::{Expr, Form};
use super::super::graph::position;
use super::super::scope::Term;
use super::super::shape::{Axis, Kind, Over, Shape, pair_label};
use super::{Lowering, near_label};
use crate::place::{Fault, Place};
use crate::reading::{Cells, Table};
use std::collections::BTreeMap;
use std::sync::Arc;

/// What a part of an index says about labels.
enum Labels {
    One(String),
    /// One for each row of a table.
    Rows(Arc<Table>, String),
}

impl Lowering<'_> {
    pub(super) fn index(&mut self, of: &Expr, at: &[Expr], place: &Place) -> Option<Term> {
        let vector = self.term(of);
        if let Some(vector) = &vector
            && self.label_without_quotes(vector, of, at)
        {
            return None;
        }
        let labels: Vec<Option<Labels>> = at.iter().map(|part| self.index_labels(part)).collect();
        let by_labels = labels.iter().all(Option::is_some);
        let number = match (by_labels, at) {
            (false, [one]) => Some(self.numbers(one)?),
            _ => None,
        };
        let vector = vector?;
        let Shape::Vector(axis) = vector.shape.clone() else {
            let mut help = format!("leave out the index: `{of}`");
            if by_labels && matches!(of.form, Form::Name(_)) {
                let per = match &at[0].form {
                    Form::Column { table, column } => format!("{table}.{column}"),
                    _ => "table.column".into(),
                };
                help.push_str(&format!(
                    ", or declare `{of}` with a value per label: {of} = {{ law = \"…\", per = \"{per}\" }}"
                ));
            }
            self.fault(
                Fault::at(
                    of.place.clone(),
                    format!("`{of}` is one value and has no elements"),
                )
                .label("not a vector")
                .help(help),
            );
            return None;
        };
        if let Some(number) = number {
            return self.index_by_number(&vector, &axis, number, of, &at[0]);
        }
        if !by_labels {
            self.fault(
                Fault::at(place.clone(), "only labels can be crossed in an index")
                    .label(format!("{} indices", at.len()))
                    .help("write one number, or two columns of labels: `cross[t.a, t.b]`"),
            );
            return None;
        }
        let labels: Vec<Labels> = labels.into_iter().flatten().collect();
        self.index_by_labels(&vector, &axis, &labels, of, at, place)
    }

    /// Whether an index is a name that means nothing here but for being a label of the vector's axis.
    fn label_without_quotes(&mut self, vector: &Term, of: &Expr, at: &[Expr]) -> bool {
        let ([part], Shape::Vector(axis)) = (at, &vector.shape) else {
            return false;
        };
        let Form::Name(name) = &part.form else {
            return false;
        };
        if self.scope.find(name).is_some() {
            return false;
        }
        let same = |label: &&String| label.eq_ignore_ascii_case(name);
        let Some(label) = axis.labels.iter().find(same) else {
            return false;
        };
        self.fault(
            Fault::at(
                part.place.clone(),
                format!("nothing is called `{name}` here"),
            )
            .label("a label stands in quotes")
            .help(format!("write `{of}[\"{label}\"]`")),
        );
        true
    }

    fn index_labels(&self, part: &Expr) -> Option<Labels> {
        if let Form::Label(label) = &part.form {
            return Some(Labels::One(label.clone()));
        }
        self.labels(part)
            .map(|(table, column)| Labels::Rows(table, column))
    }

    fn index_by_number(
        &mut self,
        vector: &Term,
        axis: &Arc<Axis>,
        at: Term,
        of: &Expr,
        part: &Expr,
    ) -> Option<Term> {
        if let Some(values) = self.graph.known_values(at.value)
            && let Some((row, wrong)) = values
                .iter()
                .enumerate()
                .find(|(_, x)| position(**x, axis.len).is_none())
        {
            let whose = match &at.shape {
                Shape::Number => format!("`{of}` has no element {wrong}"),
                Shape::Vector(rows) => format!(
                    "`{of}` has no element {wrong}, asked for by {} {}",
                    rows.element(),
                    row + 1
                ),
            };
            self.fault(
                Fault::at(part.place.clone(), whose)
                    .label("out of range")
                    .help(format!("its elements have the numbers 1 to {}", axis.len)),
            );
            return None;
        }
        let value = self.graph.gather(vector.value, at.value);
        Some(self.made(value, vector.kind))
    }

    fn index_by_labels(
        &mut self,
        vector: &Term,
        axis: &Arc<Axis>,
        labels: &[Labels],
        of: &Expr,
        at: &[Expr],
        place: &Place,
    ) -> Option<Term> {
        let crossed = matches!(&axis.over, Over::Levels { columns, .. } if columns.len() == 2);
        if labels.len() > 2 || (labels.len() == 2 && !crossed) {
            self.fault(
                Fault::at(
                    place.clone(),
                    format!(
                        "`{of}` has one value per {} and takes one index",
                        axis.element()
                    ),
                )
                .label(format!("{} indices", labels.len())),
            );
            return None;
        }
        if axis.labels.is_empty() {
            let help = match &axis.over {
                Over::Rows { table } => format!(
                    "give the rows of {table} names (`names = \"column\"` in [data.{table}]), or use their numbers from 1"
                ),
                _ => format!("use numbers from 1 to {}", axis.len),
            };
            self.fault(
                Fault::at(
                    at[0].place.clone(),
                    format!("the elements of `{of}` have numbers, not names"),
                )
                .label("a label")
                .help(help),
            );
            return None;
        }
        if crossed && labels.len() == 1 && matches!(labels[0], Labels::Rows(..)) {
            self.fault(
                Fault::at(
                    at[0].place.clone(),
                    format!("`{of}` has one value per {}", axis.element()),
                )
                .label("one column")
                .help("write two columns of labels: `cross[t.a, t.b]`"),
            );
            return None;
        }
        let mut tables = labels
            .iter()
            .zip(at)
            .filter_map(|(label, part)| match label {
                Labels::Rows(table, _) => Some((table, part)),
                Labels::One(_) => None,
            });
        let rows = tables.next();
        if let (Some((first, _)), Some((second, part))) = (rows, tables.next())
            && first.name != second.name
        {
            self.fault(
                Fault::at(
                    part.place.clone(),
                    "the two columns of a crossed index come from different tables",
                )
                .label(format!("one label a row of {}", second.name))
                .help(format!(
                    "take both from `{}` or both from `{}`",
                    first.name, second.name
                )),
            );
            return None;
        }
        let positions: BTreeMap<&str, usize> = axis
            .labels
            .iter()
            .enumerate()
            .map(|(i, l)| (l.as_str(), i))
            .collect();
        let count = rows.map_or(1, |(table, _)| table.rows);
        let mut found = Vec::with_capacity(count);
        for row in 0..count {
            let parts: Vec<&str> = labels.iter().map(|label| label_at(label, row)).collect();
            let label = match parts.as_slice() {
                [one] => (*one).to_string(),
                [a, b] => pair_label(a, b),
                _ => return None,
            };
            let Some(&at_position) = positions.get(label.as_str()) else {
                let what = match rows {
                    Some((table, _)) => format!(
                        "row {} of {} says \"{label}\", which `{of}` has no value for",
                        row + 1,
                        table.name
                    ),
                    None => format!("`{of}` has no element \"{label}\""),
                };
                let known: Vec<&str> = axis.labels.iter().map(String::as_str).collect();
                let fault = Fault::at(at[0].place.clone(), what).label("unknown label");
                self.fault(near_label(fault, &label, &known));
                return None;
            };
            found.push((at_position + 1) as f64);
        }
        let index = match rows {
            Some((table, _)) => self.graph.data(Axis::rows(table), found.into()),
            None => crate::laws::Algebra::constant(self.graph, found[0]),
        };
        let value = self.graph.gather(vector.value, index);
        let kind: Kind = vector.kind;
        Some(self.made(value, kind))
    }
}

fn label_at(label: &Labels, row: usize) -> &str {
    match label {
        Labels::One(label) => label,
        Labels::Rows(table, column) => match table.column(column).map(|c| &c.cells) {
            Some(Cells::Labels { levels, index }) => &levels[index[row]],
            _ => "",
        },
    }
}
