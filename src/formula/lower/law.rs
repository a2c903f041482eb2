//! Laws with their parameters, and functions of them.

use super::*;
use crate::laws::{Domain, Law, Parameter};

impl Lowering<'_> {
    pub(super) fn law(&mut self, expr: &Expr) -> Option<LawTerm> {
        let law = self.law_as_written(expr)?;
        self.leaves_room(&law).then_some(law)
    }

    /// A law whose support is known to be empty has no value to take.
    fn leaves_room(&mut self, law: &LawTerm) -> bool {
        let (lower, upper) = law.support(self.graph);
        let known = (
            self.graph.known_values(lower),
            self.graph.known_values(upper),
        );
        let (Some(lower), Some(upper)) = known else {
            return true;
        };
        let at = |ends: &[f64], i: usize| ends.get(i).or(ends.first()).copied();
        let integer = law.law.support().integer;
        let empty = (0..lower.len().max(upper.len())).find_map(|i| {
            let (low, high) = (at(&lower, i)?, at(&upper, i)?);
            (low > high || (low == high && !integer)).then_some((low, high))
        });
        if let Some((low, high)) = empty {
            self.fault(
                Fault::at(
                    law.place.clone(),
                    format!("this law has no value: none lies between {low} and {high}"),
                )
                .label("nothing between its ends")
                .help(
                    "the lower end must lie below the upper one, and both where the law has mass",
                ),
            );
        }
        empty.is_none()
    }

    fn law_as_written(&mut self, expr: &Expr) -> Option<LawTerm> {
        let Form::Call(call) = &expr.form else {
            let mut fault = Fault::at(expr.place.clone(), format!("`{expr}` is not a law"))
                .label("a law is needed")
                .help("laws are written like `normal(mean = 0, sd = 1)`");
            if let Form::Name(name) = &expr.form
                && let Some(law) = laws::table().iter().find(|law| law.name() == name)
            {
                fault = fault.help(format!("write `{}`", law.usage()));
            }
            self.fault(fault);
            return None;
        };
        if call.name == "truncated" {
            return self.truncated(call, expr);
        }
        let entries: Vec<&'static dyn Law> = laws::table()
            .iter()
            .copied()
            .filter(|law| law.name() == call.name)
            .collect();
        if entries.is_empty() {
            self.unknown_law(call);
            return None;
        }
        let lists = |name: &str| {
            let listed = |p: &Parameter| p.name == name && p.domain == Domain::Probabilities;
            entries
                .iter()
                .any(|law| law.parameters().iter().any(listed))
        };
        let values: Vec<Option<Vec<Term>>> = call
            .named
            .iter()
            .map(|(name, _, value)| match &value.form {
                Form::List(items) if lists(name) => self.list(items),
                _ => self.numbers(value).map(|term| vec![term]),
            })
            .collect();
        if let Some(first) = call.arguments.first() {
            self.fault(
                Fault::at(
                    first.place.clone(),
                    format!("the arguments of `{}` are named", call.name),
                )
                .label("needs a name")
                .help(format!("write {}", usages(&entries))),
            );
            return None;
        }
        let law = self.entry(call, &entries)?;
        let values: Vec<Vec<Term>> = values.into_iter().collect::<Option<_>>()?;
        let mut parameters = Vec::new();
        let mut pairs: Vec<(&Term, &Expr)> = Vec::new();
        let mut good = true;
        for parameter in law.parameters() {
            let at = call
                .named
                .iter()
                .position(|(name, ..)| name == parameter.name)?;
            let value = &call.named[at].2;
            if let Form::List(items) = &value.form {
                good &= self
                    .listed_probabilities(law, parameter.name, &values[at], items, value)
                    .is_some();
                parameters.extend(values[at].iter().map(|term| term.value));
                continue;
            }
            let term = &values[at][0];
            good &= self
                .in_domain(law, parameter.name, parameter.domain, term, value)
                .and_then(|()| self.finite_parts(parameter.name, term, value))
                .is_some();
            if parameter.domain == Domain::Probabilities {
                for element in 0..term.shape.len() {
                    parameters.push(self.graph.element(term.value, element));
                }
            } else {
                parameters.push(term.value);
                pairs.push((term, value));
            }
        }
        self.agree(&pairs)?;
        let shape = common_shape(pairs.iter().map(|(term, _)| *term));
        good.then_some(LawTerm {
            law,
            parameters,
            from: None,
            to: None,
            shape,
            place: expr.place.clone(),
        })
    }

    /// The entry of the table whose parameters are the ones named.
    fn entry(&mut self, call: &Call, entries: &[&'static dyn Law]) -> Option<&'static dyn Law> {
        let given = |name: &str| call.named.iter().any(|(other, ..)| other == name);
        let fits = |law: &&&'static dyn Law| {
            law.parameters().len() == call.named.len()
                && law.parameters().iter().all(|p| given(p.name))
        };
        if let Some(law) = entries.iter().find(fits) {
            return Some(*law);
        }
        let known: Vec<&str> = entries
            .iter()
            .flat_map(|law| law.parameters().iter().map(|p| p.name))
            .collect();
        let mut unknown = false;
        for (name, place, _) in call
            .named
            .iter()
            .filter(|(name, ..)| !known.contains(&name.as_str()))
        {
            unknown = true;
            let help = match nearest(name, known.iter().copied()) {
                Some(near) => format!(
                    "did you mean `{near}`? {} is written {}",
                    call.name,
                    usages(entries)
                ),
                None => format!("write {}", usages(entries)),
            };
            self.fault(
                Fault::at(
                    place.clone(),
                    format!("`{}` has no parameter `{name}`", call.name),
                )
                .label("unknown parameter")
                .help(help),
            );
        }
        if !unknown {
            let shared =
                |law: &&&'static dyn Law| law.parameters().iter().filter(|p| given(p.name)).count();
            // Of several that fit as well, the first of the table.
            let closest = entries.iter().rev().max_by_key(shared)?;
            let missing: Vec<&str> = closest
                .parameters()
                .iter()
                .map(|p| p.name)
                .filter(|name| !given(name))
                .collect();
            let what = if missing.is_empty() {
                format!("these parameters of `{}` do not go together", call.name)
            } else {
                format!("`{}` is not given {}", call.name, listed(&missing))
            };
            self.fault(
                Fault::at(call.name_place.clone(), what)
                    .label("parameters")
                    .help(format!("write {}", usages(entries))),
            );
        }
        None
    }

    fn unknown_law(&mut self, call: &Call) {
        let fault = Fault::at(
            call.name_place.clone(),
            format!("no law is called `{}`", call.name),
        )
        .label("unknown law");
        let fault = match nearest(
            &call.name,
            laws::table()
                .iter()
                .map(|law| law.name())
                .chain(["truncated"]),
        ) {
            Some(near) => fault.help(format!("did you mean `{near}`?")),
            None => fault.help("`odograph catalogue` lists the laws"),
        };
        self.fault(fault);
    }

    /// The elements of a list, each one number.
    fn list(&mut self, items: &[Expr]) -> Option<Vec<Term>> {
        let terms: Vec<Option<Term>> = items
            .iter()
            .map(|item| {
                let term = self.numbers(item)?;
                if term.shape == Shape::Number {
                    return Some(term);
                }
                self.fault(
                    Fault::at(item.place.clone(), format!("`{item}` is not one number"))
                        .label(term.shape.words())
                        .help("each element of a list is one number"),
                );
                None
            })
            .collect();
        terms.into_iter().collect()
    }

    /// Checks the elements of a list of probabilities, as far as they are known.
    fn listed_probabilities(
        &mut self,
        law: &dyn Law,
        name: &str,
        terms: &[Term],
        items: &[Expr],
        list: &Expr,
    ) -> Option<()> {
        let mut known = Vec::new();
        let mut good = true;
        for (term, item) in terms.iter().zip(items) {
            good &= self
                .in_domain(law, name, Domain::Unit, term, item)
                .is_some();
            known.extend(self.graph.known_number(term.value));
        }
        if !good {
            return None;
        }
        if known.len() < terms.len() {
            return Some(());
        }
        self.sum_to_one(law, name, &known, list)
    }

    fn sum_to_one(&mut self, law: &dyn Law, name: &str, known: &[f64], value: &Expr) -> Option<()> {
        let total = crate::maths::sum(known);
        if (total - 1.0).abs() <= 1e-9 {
            return Some(());
        }
        self.fault(
            Fault::at(
                value.place.clone(),
                format!(
                    "`{name}` of `{}` must sum to 1; the sum is {total}",
                    law.name()
                ),
            )
            .label("probabilities"),
        );
        None
    }

    /// Checks what is known of a parameter before any draw.
    fn in_domain(
        &mut self,
        law: &dyn Law,
        name: &str,
        domain: Domain,
        term: &Term,
        value: &Expr,
    ) -> Option<()> {
        if domain == Domain::Probabilities && term.shape == Shape::Number {
            self.fault(
                Fault::at(
                    value.place.clone(),
                    format!("`{name}` of `{}` is a vector of probabilities", law.name()),
                )
                .label("one value")
                .help("give one probability for each category: `[0.2, 0.3, 0.5]`, or an unknown with `per`"),
            );
            return None;
        }
        let Some(known) = self.graph.known_values(term.value) else {
            return Some(());
        };
        let wrong = known.iter().enumerate().find(|(_, x)| !domain.holds(**x));
        if let Some((row, x)) = wrong {
            let whose = match &term.shape {
                Shape::Number => format!("it is {x}"),
                Shape::Vector(axis) => format!("it is {x} for {}", axis.numbered(row + 1)),
            };
            self.fault(
                Fault::at(
                    value.place.clone(),
                    format!(
                        "`{name}` of `{}` must be {}; {whose}",
                        law.name(),
                        domain.words()
                    ),
                )
                .label("outside its domain"),
            );
            return None;
        }
        if domain == Domain::Probabilities {
            return self.sum_to_one(law, name, &known, value);
        }
        Some(())
    }

    fn truncated(&mut self, call: &Call, expr: &Expr) -> Option<LawTerm> {
        let form = "`truncated(law, from = a, to = b)`; either end may be left out";
        let [inner] = call.arguments.as_slice() else {
            self.fault(
                Fault::at(expr.place.clone(), "`truncated` takes one law and its ends")
                    .label("wrong arguments")
                    .help(format!("it is written {form}")),
            );
            return None;
        };
        let law = self.law(inner);
        let mut ends = [None, None];
        let mut good = !call.named.is_empty();
        if !good {
            self.fault(
                Fault::at(expr.place.clone(), "`truncated` is given no end")
                    .label("`from` or `to` is needed")
                    .help(format!("it is written {form}")),
            );
        }
        for (name, place, value) in &call.named {
            let at = match name.as_str() {
                "from" => 0,
                "to" => 1,
                _ => {
                    self.fault(
                        Fault::at(
                            place.clone(),
                            format!("`truncated` has no argument `{name}`"),
                        )
                        .label("unknown argument")
                        .help(format!("it is written {form}")),
                    );
                    good = false;
                    continue;
                }
            };
            match self.numbers(value) {
                Some(term) => ends[at] = Some((term, value)),
                None => good = false,
            }
        }
        let law = law?;
        if law.from.is_some() || law.to.is_some() {
            self.fault(
                Fault::at(expr.place.clone(), "a truncated law is truncated again")
                    .label("second truncation")
                    .help("give both ends to one `truncated`"),
            );
            return None;
        }
        if !law.law.proper() {
            self.fault(
                Fault::at(
                    inner.place.clone(),
                    format!(
                        "`{}` has no finite mass and cannot be truncated",
                        law.law.name()
                    ),
                )
                .label("an improper law")
                .help("a flat law on an interval is `uniform(from = a, to = b)`"),
            );
            return None;
        }
        if !good {
            return None;
        }
        let whole = Term {
            value: law.parameters.first().copied().unwrap_or(Value(0)),
            shape: law.shape.clone(),
            kind: Kind::Number,
        };
        let mut pairs = vec![(&whole, inner)];
        pairs.extend(ends.iter().flatten().map(|(term, value)| (term, *value)));
        self.agree(&pairs)?;
        let shape = common_shape(pairs.iter().map(|(term, _)| *term));
        let [from, to] = [&ends[0], &ends[1]].map(|end| end.as_ref().map(|(term, _)| term.value));
        if let (Some(a), Some(b)) = (from, to)
            && let (Some(low), Some(high)) =
                (self.graph.known_number(a), self.graph.known_number(b))
            && (low > high || (low == high && !law.law.support().integer))
        {
            self.fault(
                Fault::at(
                    expr.place.clone(),
                    format!("the interval from {low} to {high} is empty"),
                )
                .label("nothing between the ends")
                .help("`from` must lie below `to`"),
            );
            return None;
        }
        Some(LawTerm {
            from,
            to,
            shape,
            place: expr.place.clone(),
            ..law
        })
    }

    pub(super) fn law_function(&mut self, action: Action, law: &Expr, x: &Expr) -> Option<Term> {
        let (term, at) = (self.law(law), self.numbers(x));
        let (term, at) = (term?, at?);
        let whole = Term {
            shape: term.shape.clone(),
            ..at.clone()
        };
        self.agree(&[(&whole, law), (&at, x)])?;
        let value = match action {
            Action::LogDensity => Some(term.log_density(self.graph, at.value)),
            Action::Distribution => term.distribution(self.graph, at.value),
            Action::Survival => term.survival(self.graph, at.value),
            _ => term.quantile(self.graph, at.value),
        };
        let Some(value) = value else {
            self.fault(
                Fault::at(
                    law.place.clone(),
                    format!(
                        "`{}` has no distribution function or quantiles",
                        term.law.name()
                    ),
                )
                .label("an improper law"),
            );
            return None;
        };
        Some(self.number(value))
    }
}

fn common_shape<'a>(terms: impl Iterator<Item = &'a Term>) -> Shape {
    terms
        .map(|term| &term.shape)
        .find(|shape| **shape != Shape::Number)
        .cloned()
        .unwrap_or(Shape::Number)
}

fn usages(entries: &[&'static dyn Law]) -> String {
    let all: Vec<String> = entries
        .iter()
        .map(|law| format!("`{}`", law.usage()))
        .collect();
    all.join(" or ")
}
