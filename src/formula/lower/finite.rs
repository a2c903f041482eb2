//! Data that is no finite number before any unknown enters: `ln(t.dose - 0.5)` in a row of small dose.

use super::super::graph::Node;
use super::*;
use std::collections::BTreeSet;

impl Lowering<'_> {
    /// Keeps which part of a formula made a vector of data that is not finite throughout.
    pub(super) fn remember(&mut self, term: &Term, expr: &Expr) {
        let known = self.infinite.iter().any(|(value, ..)| *value == term.value);
        if !known && self.first_infinite(term.value).is_some() {
            let text = expr.to_string();
            self.infinite.push((term.value, text, expr.place.clone()));
        }
    }

    /// The row, from 0, and the number where a vector of data is not finite for the first time.
    fn first_infinite(&self, value: Value) -> Option<(usize, f64)> {
        if self.graph.is_number(value) {
            return None;
        }
        let values = self.graph.known_values(value)?;
        let row = values.iter().position(|x| !x.is_finite())?;
        Some((row, values[row]))
    }

    /// A fault where such data is added to or multiplied by an unknown on its way into a parameter. What
    /// stands in an `if` is let be: its condition may be there to select these rows away.
    pub(super) fn finite_parts(&mut self, name: &str, term: &Term, expr: &Expr) -> Option<()> {
        if self.choosing {
            return Some(());
        }
        let Some(spoiled) = self.spoiled(term.value) else {
            return Some(());
        };
        let (row, x) = self.first_infinite(spoiled)?;
        let found = self.infinite.iter().find(|(value, ..)| *value == spoiled);
        let (what, place) = match found {
            Some((_, text, place)) => (format!("`{text}`"), place.clone()),
            None => (format!("a part of `{expr}`"), expr.place.clone()),
        };
        let element = match self.graph.shape(spoiled) {
            Shape::Vector(axis) => axis.numbered(row + 1),
            Shape::Number => String::new(),
        };
        self.fault(
            Fault::at(
                place,
                format!(
                    "{what} depends on data alone and is {x} for {element}; so `{name}` is no number there"
                ),
            )
            .label("not finite")
            .help("leave such rows out of the data, or guard them with `if(…, …, …)`"),
        );
        None
    }

    /// Data, not finite in some row, that arithmetic with an unknown takes up.
    fn spoiled(&self, from: Value) -> Option<Value> {
        let mut seen = BTreeSet::new();
        // With each value, whether infinities added to it come out finite in the end: exp(a - ∞) is 0.
        let mut left = vec![(from, false)];
        while let Some((value, bounded)) = left.pop() {
            if !seen.insert((value, bounded)) {
                continue;
            }
            match self.graph.node(value) {
                Node::Binary(op, a, b) => {
                    let (sides, counts): (&[Value], bool) = match op {
                        Binary::Add | Binary::Subtract => (&[a, b], !bounded),
                        Binary::Multiply => (&[a, b], true),
                        Binary::Divide => (&[a], true),
                        _ => continue,
                    };
                    for &side in sides {
                        if counts && self.first_infinite(side).is_some() {
                            return Some(side);
                        }
                        let product = matches!(op, Binary::Multiply | Binary::Divide);
                        left.push((side, bounded && !product));
                    }
                }
                Node::Unary(op, a) => {
                    let bounds = matches!(
                        op,
                        Unary::Exp | Unary::Expm1 | Unary::Logistic | Unary::Softplus
                    );
                    let kept = bounded && op == Unary::Negate;
                    left.push((a, bounds || kept));
                }
                Node::Reduce(_, a) | Node::Dot(_, a) | Node::Element(a, _) => left.push((a, false)),
                _ => {}
            }
        }
        None
    }
}
