//! Quantities whose mean need not exist: those that divide by something unknown that may come near 0.

use super::declared::Declared;
use super::posterior::Posterior;
use super::uses::uses;
use crate::course::{Condition, EstimandSpec, Standing};
use crate::formula::{Expr, Form, Infix, Prefix, parse};
use crate::place::Faults;

/// `integrable` is not known where an estimand divides by an unknown expression whose range includes or touches 0:
/// with a density above 0 there, 1/x has no mean, and no draw shows it. Estimands that are conditions are bounded.
/// That a mean exists all the same (a gamma law of a shape above 1, say) is not looked for.
pub fn means(
    declared: &Declared,
    posterior: &Posterior,
    estimands: &[EstimandSpec],
) -> Option<Condition> {
    let look = Look {
        declared,
        posterior,
    };
    let mut found = Vec::new();
    for spec in estimands {
        let text = spec.of.as_ref().unwrap_or(&spec.name);
        let Some(expr) = parse(text, &mut Faults::default()) else {
            continue;
        };
        if let Some(below) = look.divisor(&expr) {
            found.push(format!(
                "`{}` divides by `{below}`, which may come arbitrarily near 0",
                spec.name.text
            ));
        }
    }
    (!found.is_empty()).then(|| Condition {
        name: "integrable",
        standing: Standing::NotKnown,
        evidence: format!(
            "{}: a mean need not exist, and draws would not show it; the median does, so give that",
            found.join("; ")
        ),
    })
}

struct Look<'a> {
    declared: &'a Declared,
    posterior: &'a Posterior,
}

impl Look<'_> {
    /// The formula of a definition.
    fn defined(&self, name: &str) -> Option<&Expr> {
        let mut entries = self.declared.definitions.iter();
        let entry = entries.find(|entry| entry.name.text == name)?;
        Some(&entry.formula)
    }

    /// Does it depend on an unknown or a prediction? Definitions have no cycle here.
    fn random(&self, expr: &Expr) -> bool {
        uses(expr).iter().any(|name| {
            self.declared.unknowns.iter().any(|u| u.name.text == *name)
                || self
                    .declared
                    .predictions
                    .iter()
                    .any(|p| p.name.text == *name)
                || self.posterior.unknowns.iter().any(|u| u.name == *name)
                || self
                    .defined(name)
                    .is_some_and(|formula| self.random(formula))
        })
    }

    /// The first unknown divisor that may come near 0 in a value that is not a condition.
    fn divisor(&self, expr: &Expr) -> Option<String> {
        match &expr.form {
            Form::Name(name) => self.divisor(self.defined(name)?),
            Form::Prefix(Prefix::Negate, a) => self.divisor(a),
            Form::Infix(Infix::Divide, a, b) => {
                if self.random(b) && self.touches_zero(b) && !self.is_share(a, b) {
                    return Some(b.to_string());
                }
                self.divisor(a).or_else(|| self.divisor(b))
            }
            Form::Infix(Infix::Power, a, b) => {
                let (lower, _) = self.range(b);
                if lower < 0.0 && self.random(a) && self.touches_zero(a) {
                    return Some(a.to_string());
                }
                self.divisor(a).or_else(|| self.divisor(b))
            }
            Form::Infix(Infix::Add | Infix::Subtract | Infix::Multiply, a, b) => {
                self.divisor(a).or_else(|| self.divisor(b))
            }
            Form::Index { of, .. } => self.divisor(of),
            Form::List(items) => items.iter().find_map(|item| self.divisor(item)),
            Form::Call(call) if matches!(call.name.as_str(), "if") => call
                .arguments
                .iter()
                .skip(1)
                .find_map(|part| self.divisor(part)),
            Form::Call(call)
                if matches!(
                    call.name.as_str(),
                    "sum" | "mean" | "max" | "min" | "abs" | "sqrt" | "exp" | "dot"
                ) =>
            {
                call.arguments.iter().find_map(|part| self.divisor(part))
            }
            _ => None,
        }
    }

    fn touches_zero(&self, expr: &Expr) -> bool {
        let (lower, upper) = self.range(expr);
        lower <= 0.0 && upper >= 0.0
    }

    /// A part over a sum of parts that are not negative lies between 0 and 1.
    fn is_share(&self, part: &Expr, of: &Expr) -> bool {
        let positive = |expr: &Expr| self.range(expr).0 >= 0.0;
        match &of.form {
            Form::Infix(Infix::Add, a, b) => {
                positive(a) && positive(b) && (self.is_share(part, a) || self.is_share(part, b))
            }
            Form::Call(call) if call.name == "sum" => call.arguments.iter().all(|all| {
                let element = matches!(&part.form, Form::Index { of, .. } if **of == *all);
                positive(all) && (element || part == all)
            }),
            _ => part == of,
        }
    }

    /// A range that the values lie in, as far as it is seen.
    fn range(&self, expr: &Expr) -> (f64, f64) {
        const ALL: (f64, f64) = (f64::NEG_INFINITY, f64::INFINITY);
        match &expr.form {
            Form::Number(x) => (*x, *x),
            Form::Name(name) => {
                let constants = &self.declared.constants;
                if let Some((_, x)) = constants.iter().find(|(n, _)| n.text == *name) {
                    return (*x, *x);
                }
                let unknowns = &self.posterior.unknowns;
                if let Some(unknown) = unknowns.iter().find(|u| u.name == *name) {
                    return unknown.ends;
                }
                self.defined(name)
                    .map_or(ALL, |formula| self.range(formula))
            }
            Form::Prefix(Prefix::Negate, a) => {
                let (lower, upper) = self.range(a);
                (-upper, -lower)
            }
            Form::Infix(Infix::Add, a, b) => {
                let ((a, b), (c, d)) = (self.range(a), self.range(b));
                (a + c, b + d)
            }
            Form::Infix(Infix::Subtract, a, b) => {
                let ((a, b), (c, d)) = (self.range(a), self.range(b));
                (a - d, b - c)
            }
            Form::Infix(Infix::Multiply, a, b) => {
                let ((a, b), (c, d)) = (self.range(a), self.range(b));
                match a > 0.0 && c > 0.0 {
                    true => (a * c, b * d),
                    false if a >= 0.0 && c >= 0.0 => (0.0, f64::INFINITY),
                    false => ALL,
                }
            }
            Form::Infix(Infix::Divide, a, b) => {
                match self.range(a).0 >= 0.0 && self.range(b).0 >= 0.0 {
                    true => (0.0, f64::INFINITY),
                    false => ALL,
                }
            }
            Form::Infix(Infix::Power, a, b) => match (&b.form, self.range(a)) {
                (Form::Number(2.0), (lower, _)) if lower < 0.0 => (0.0, f64::INFINITY),
                (_, (lower, _)) if lower >= 1.0 && self.range(b).0 >= 0.0 => (1.0, f64::INFINITY),
                (_, (lower, _)) if lower >= 0.0 => (0.0, f64::INFINITY),
                _ => ALL,
            },
            Form::Index { of, .. } => self.range(of),
            Form::Call(call) => match (call.name.as_str(), &call.arguments[..]) {
                // What falls below every number is no pole of the quantity: exp(-x) is not told either.
                ("exp", _) => (f64::MIN_POSITIVE, f64::INFINITY),
                ("abs" | "sqrt", _) => (0.0, f64::INFINITY),
                ("mean" | "max" | "min", [one]) => self.range(one),
                ("sum", [one]) if self.range(one).0 >= 0.0 => (self.range(one).0, f64::INFINITY),
                _ => ALL,
            },
            _ => ALL,
        }
    }
}
