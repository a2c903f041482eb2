//! Calls of functions.

use super::*;
use crate::maths::Ternary;

impl Lowering<'_> {
    pub(super) fn call(&mut self, call: &Call, expr: &Expr) -> Option<Term> {
        let Some(function) = function::find(&call.name) else {
            self.not_a_function(call);
            return None;
        };
        if function.action == Action::Truncated {
            self.fault(
                Fault::at(expr.place.clone(), "a law is not a value")
                    .label("a law")
                    .help("use one of its functions: `log_density(law, x)`, `distribution(law, x)`, `survival(law, x)`, `quantile(law, p)`"),
            );
            return None;
        }
        if let Some((name, place, _)) = call.named.first() {
            self.fault(
                Fault::at(
                    place.clone(),
                    format!("`{}` takes its arguments by position", call.name),
                )
                .label(format!("leave out `{name} =`"))
                .help(format!(
                    "it is called like `{}`; to compare, write `==`",
                    function.usage
                )),
            );
            return None;
        }
        match (function.action, call.arguments.as_slice()) {
            (Action::Unary(op), [x]) => {
                let x = self.numbers(x)?;
                let value = self.graph.unary(op, x.value);
                Some(self.number(value))
            }
            (Action::Binary(op), [a, b]) => {
                let (x, y) = self.two(a, b)?;
                let value = self.graph.binary(op, x, y);
                Some(self.number(value))
            }
            (Action::Log10, [x]) => {
                let x = self.numbers(x)?;
                let ln = self.graph.unary(Unary::Ln, x.value);
                let ten = self.graph.constant(std::f64::consts::LN_10);
                let value = self.graph.divide(ln, ten);
                Some(self.number(value))
            }
            (Action::LogOdds, [p]) => {
                let p = self.numbers(p)?.value;
                let ln = self.graph.unary(Unary::Ln, p);
                let minus = self.graph.unary(Unary::Negate, p);
                let rest = self.graph.unary(Unary::Log1p, minus);
                let value = self.graph.subtract(ln, rest);
                Some(self.number(value))
            }
            (Action::LnChoose, [n, k]) => {
                let (n, k) = self.two(n, k)?;
                let value = ln_choose(self.graph, n, k);
                Some(self.number(value))
            }
            (
                Action::Sum | Action::Mean | Action::Variance | Action::Sd | Action::LnSumExp,
                [x],
            ) => {
                let x = self.numbers(x)?;
                let value = self.summary(function.action, x.value);
                Some(self.number(value))
            }
            (Action::Length, [x]) => {
                let x = self.term(x)?;
                let value = self.graph.constant(x.shape.len() as f64);
                Some(self.number(value))
            }
            (Action::Extreme(which), [x]) => {
                let x = self.numbers(x)?;
                let value = match which {
                    Extreme::Least => self.graph.minimum(x.value),
                    Extreme::Greatest => self.graph.maximum(x.value),
                };
                Some(self.number(value))
            }
            (Action::Extreme(which), several @ [_, _, ..]) => {
                let terms: Vec<Option<Term>> = several.iter().map(|x| self.numbers(x)).collect();
                let terms: Vec<Term> = terms.into_iter().collect::<Option<_>>()?;
                let pairs: Vec<(&Term, &Expr)> = terms.iter().zip(several).collect();
                self.agree(&pairs)?;
                let op = match which {
                    Extreme::Least => Binary::Minimum,
                    Extreme::Greatest => Binary::Maximum,
                };
                let mut value = terms[0].value;
                for term in &terms[1..] {
                    value = self.graph.binary(op, value, term.value);
                }
                Some(self.number(value))
            }
            (Action::Any, [c]) => {
                let c = self.condition(c)?;
                let value = self.graph.maximum(c.value);
                Some(self.made(value, Kind::Condition))
            }
            (Action::All, [c]) => {
                let c = self.condition(c)?;
                let value = self.graph.minimum(c.value);
                Some(self.made(value, Kind::Condition))
            }
            (Action::Count, [c]) => {
                let c = self.condition(c)?;
                let value = self.graph.sum(c.value);
                Some(self.number(value))
            }
            (Action::Dot, [a, b]) => self.dot(a, b),
            (Action::If, [c, a, b]) => {
                let outside = std::mem::replace(&mut self.choosing, true);
                let (condition, x, y) = (self.condition(c), self.term(a), self.term(b));
                self.choosing = outside;
                let (condition, x, y) = (condition?, x?, y?);
                if x.kind != y.kind {
                    self.fault(
                        Fault::at(
                            expr.place.clone(),
                            "the two values of `if` are a number and a condition",
                        )
                        .label("not of one kind")
                        .help("make both numbers or both conditions"),
                    );
                    return None;
                }
                self.agree(&[(&condition, c), (&x, a), (&y, b)])?;
                let value = self
                    .graph
                    .ternary(Ternary::Select, condition.value, x.value, y.value);
                Some(self.made(value, x.kind))
            }
            (
                Action::LogDensity | Action::Distribution | Action::Survival | Action::Quantile,
                [law, x],
            ) => self.law_function(function.action, law, x),
            _ => {
                let given = call.arguments.len();
                self.fault(
                    Fault::at(
                        expr.place.clone(),
                        format!("`{}` is given {given} arguments", call.name),
                    )
                    .label("wrong number of arguments")
                    .help(format!("it is called like `{}`", function.usage)),
                );
                None
            }
        }
    }

    fn not_a_function(&mut self, call: &Call) {
        if let Some(law) = laws::table().iter().find(|law| law.name() == call.name) {
            self.fault(
                Fault::at(
                    call.name_place.clone(),
                    format!("`{}` is a law, not a value", law.name()),
                )
                .label("a law")
                .help(format!(
                    "use one of its functions: `log_density({}(…), x)` and the like",
                    law.name()
                )),
            );
            return;
        }
        let fault = Fault::at(
            call.name_place.clone(),
            format!("no function is called `{}`", call.name),
        )
        .label("unknown function");
        let is_value = self.scope.find(&call.name).is_some();
        let help = match nearest(&call.name, function::functions().iter().map(|f| f.name)) {
            _ if is_value => Some(format!(
                "`{0}` is a value; multiply with `{0} * (…)`, take an element with `{0}[…]`",
                call.name
            )),
            _ if ["log", "log_e"].contains(&call.name.as_str()) => Some(
                "write `ln(x)` for the natural logarithm, `log10(x)` for the one to base 10".into(),
            ),
            Some(near) => {
                function::find(near).map(|f| format!("did you mean `{}`, {}?", f.usage, f.about))
            }
            None => Some("`odograph catalogue` lists the functions".into()),
        };
        self.fault(Fault { help, ..fault });
    }

    /// Two arguments that go together element by element.
    fn two(&mut self, a: &Expr, b: &Expr) -> Option<(Value, Value)> {
        let (x, y) = (self.numbers(a), self.numbers(b));
        let (x, y) = (x?, y?);
        self.agree(&[(&x, a), (&y, b)])?;
        Some((x.value, y.value))
    }

    fn summary(&mut self, action: Action, x: Value) -> Value {
        let g = &mut *self.graph;
        let count = g.shape(x).len() as f64;
        match action {
            Action::Sum => g.sum(x),
            Action::Mean => mean(g, x),
            Action::Variance | Action::Sd => {
                let centre = mean(g, x);
                let deviation = g.subtract(x, centre);
                let square = g.unary(Unary::Square, deviation);
                let total = g.sum(square);
                let rest = g.constant(count - 1.0);
                let variance = g.divide(total, rest);
                if action == Action::Sd {
                    g.unary(Unary::Sqrt, variance)
                } else {
                    variance
                }
            }
            _ => {
                let top = g.maximum(x);
                let below = g.subtract(x, top);
                let exp = g.unary(Unary::Exp, below);
                let total = g.sum(exp);
                let ln = g.unary(Unary::Ln, total);
                let value = g.add_values(top, ln);
                let infinite = [f64::NEG_INFINITY, f64::INFINITY].map(|end| {
                    let end = g.constant(end);
                    g.binary(Binary::Equal, top, end)
                });
                let infinite = g.binary(Binary::Or, infinite[0], infinite[1]);
                g.select(infinite, top, value)
            }
        }
    }

    fn dot(&mut self, a: &Expr, b: &Expr) -> Option<Term> {
        let Some((table, name)) = self.matrix(a) else {
            if self.matrix(b).is_some() {
                self.fault(
                    Fault::at(
                        b.place.clone(),
                        "a matrix of columns is the first argument of `dot`",
                    )
                    .label("a matrix")
                    .help(format!("write `dot({b}, {a})`")),
                );
                return None;
            }
            let (x, y) = (self.numbers(a), self.numbers(b));
            let (x, y) = (x?, y?);
            for (term, expr) in [(&x, a), (&y, b)] {
                if term.shape == Shape::Number {
                    self.fault(
                        Fault::at(expr.place.clone(), format!("`{expr}` is one value"))
                            .label("a vector is needed")
                            .help("`dot` takes two vectors, or a matrix of columns and a vector"),
                    );
                    return None;
                }
            }
            self.agree(&[(&x, a), (&y, b)])?;
            let product = self.graph.multiply(x.value, y.value);
            let value = self.graph.sum(product);
            return Some(self.number(value));
        };
        let vector = self.numbers(b)?;
        let matrix = table.matrix(&name)?;
        if vector.shape.len() != matrix.columns.len() || vector.shape == Shape::Number {
            self.fault(
                Fault::at(
                    b.place.clone(),
                    format!(
                        "`{b}` has {}, but `{a}` has {} columns",
                        values(vector.shape.len()),
                        matrix.columns.len()
                    ),
                )
                .label(vector.shape.words())
                .help(format!(
                    "an unknown declared with `per = \"{a}\"` has one value per column"
                )),
            );
            return None;
        }
        let mut columns = Vec::new();
        for &at in &matrix.columns {
            let Cells::Numbers { values, .. } = &table.columns[at].cells else {
                self.fault(
                    Fault::at(
                        a.place.clone(),
                        format!("column `{}` of `{a}` holds labels", table.columns[at].name),
                    )
                    .label("a matrix of numbers is needed"),
                );
                return None;
            };
            columns.push(values.clone());
        }
        let matrix = self.graph.matrix(Axis::rows(&table), columns);
        let value = self.graph.dot(matrix, vector.value);
        Some(self.number(value))
    }

    /// The matrix that an expression names, if it names one.
    fn matrix(&self, expr: &Expr) -> Option<(Arc<Table>, String)> {
        let Form::Column { table, column } = &expr.form else {
            return None;
        };
        let Some(Entity::Table(table)) = self.scope.find(table) else {
            return None;
        };
        table.matrix(column)?;
        Some((table, column.clone()))
    }
}

fn values(count: usize) -> String {
    match count {
        1 => "one value".into(),
        n => format!("{n} values"),
    }
}

fn mean(g: &mut Graph, x: Value) -> Value {
    let count = g.shape(x).len() as f64;
    let total = g.sum(x);
    let count = g.constant(count);
    g.divide(total, count)
}

/// ln Γ(n + 1) - ln Γ(k + 1) - ln Γ(n - k + 1), by the beta function, which does not cancel:
/// -ln(n + 1) - ln B(k + 1, n - k + 1).
fn ln_choose(g: &mut Graph, n: Value, k: Value) -> Value {
    let one = g.constant(1.0);
    let n1 = g.add_values(n, one);
    let k1 = g.add_values(k, one);
    let rest = g.subtract(n, k);
    let rest1 = g.add_values(rest, one);
    let ln_beta = g.binary(Binary::LnBeta, k1, rest1);
    let ln = g.unary(Unary::Ln, n1);
    let total = g.add_values(ln, ln_beta);
    g.unary(Unary::Negate, total)
}
