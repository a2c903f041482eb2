//! The log density of all unknowns given what was observed, built from the declared sections.

use super::declared::{Declared, FormulaEntry, LawEntry};
use super::missing::{self, Missing};
use super::names::Names;
use super::observed::observe;
use super::order::by_dependency;
use super::unknown::{self, Unknown, plus};
use super::uses::uses;
use crate::course::Coordinate;
use crate::formula::{Expr, Graph, Kind, Program, Shape, Term, lower};
use crate::laws::{Algebra, Value};
use crate::place::{Fault, Faults, Place, Text};
use crate::reading::Table;
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

/// The resolved posterior, with the graph that predictions and estimands go on building.
pub struct Posterior {
    pub unknowns: Vec<Unknown>,
    pub coordinates: Vec<Coordinate>,
    /// From all coordinates to the log density.
    pub target: Program,
    /// From all coordinates to each part of the log density, and what the parts are called.
    pub parts: Program,
    pub part_names: Vec<String>,
    pub names: Names,
    pub graph: Graph,
    /// Names of unknowns and definitions in the order they were taken.
    pub order: Vec<String>,
    /// Names whose own entry has a fault: what uses them is not looked at, for the fault is elsewhere.
    pub undefined: BTreeSet<String>,
}

/// What a name of the model stands for.
enum Entry<'a> {
    Unknown(&'a LawEntry),
    Definition(&'a FormulaEntry),
    Missing(Missing<'a>),
}

impl Posterior {
    /// Builds it, after a fault as far as that can show others: with a fault recorded it is fit for looking
    /// at further formulas and for nothing else. `None` only with a fault recorded.
    pub fn build(
        declared: &Declared,
        tables: &BTreeMap<String, Arc<Table>>,
        model: &Place,
        faults: &mut Faults,
    ) -> Option<Posterior> {
        unique_names(declared, tables, faults);
        if declared.none_named {
            let fault = Fault::at(model.clone(), "the model has no unknown")
                .label("nothing to draw")
                .help("declare at least one under [model.unknown], such as a = { law = \"normal(mean = 0, sd = 1)\" }");
            faults.push(fault);
        }
        if declared.unknowns.is_empty() {
            return None;
        }
        let mut entries: BTreeMap<String, Entry> = BTreeMap::new();
        for entry in &declared.unknowns {
            entries.insert(entry.name.text.clone(), Entry::Unknown(entry));
        }
        for entry in &declared.definitions {
            entries.insert(entry.name.text.clone(), Entry::Definition(entry));
        }
        for gap in missing::find(declared, tables, faults) {
            entries.insert(gap.name(), Entry::Missing(gap));
        }
        let order = ordered(&entries, faults)?;
        super::improper::check(declared, faults);

        let mut build = Build {
            tables,
            graph: Graph::new(),
            names: Names::new(tables),
            unknowns: Vec::new(),
            coordinates: Vec::new(),
            parts: Vec::new(),
            undefined: declared.broken.clone(),
        };
        build.constants(declared);
        for name in &order {
            build.entry(name, &entries[name], faults);
        }
        build.likelihood(declared, faults);
        Some(build.finish(order))
    }
}

struct Build<'a> {
    tables: &'a BTreeMap<String, Arc<Table>>,
    graph: Graph,
    names: Names,
    unknowns: Vec<Unknown>,
    coordinates: Vec<Coordinate>,
    /// Parts of the log density with their names.
    parts: Vec<(String, Value)>,
    /// Names whose own entry has a fault: what uses them is not looked at, for the fault is elsewhere.
    undefined: BTreeSet<String>,
}

impl Build<'_> {
    fn constants(&mut self, declared: &Declared) {
        for (name, number) in &declared.constants {
            let value = self.graph.constant(*number);
            self.names.terms.insert(
                name.text.clone(),
                Term {
                    value,
                    shape: Shape::Number,
                    kind: Kind::Number,
                },
            );
        }
    }

    /// False if a formula uses a name that has a fault of its own.
    fn defined(&self, formulas: &[&Expr]) -> bool {
        formulas
            .iter()
            .all(|formula| uses(formula).is_disjoint(&self.undefined))
    }

    fn entry(&mut self, name: &str, entry: &Entry, faults: &mut Faults) {
        let done = match entry {
            Entry::Unknown(entry) => self.defined(&[&entry.law]) && self.unknown(entry, faults),
            Entry::Definition(entry) => {
                self.defined(&[&entry.formula]) && self.definition(entry, faults)
            }
            Entry::Missing(gap) => self.defined(&[gap.law()]) && self.missing(gap, faults),
        };
        if !done {
            self.undefined.insert(name.to_string());
        }
    }

    fn unknown(&mut self, entry: &LawEntry, faults: &mut Faults) -> bool {
        let index = self.unknowns.len();
        let placed = unknown::place(
            entry,
            index,
            &self.names,
            self.tables,
            &mut self.graph,
            faults,
        );
        let Some(placed) = placed else {
            return false;
        };
        let prior = plus(&mut self.graph, placed.prior, placed.jacobian);
        self.parts
            .push((format!("the law of `{}`", entry.name.text), prior));
        self.names
            .terms
            .insert(entry.name.text.clone(), placed.term);
        self.unknowns.push(placed.unknown);
        self.coordinates.extend(placed.coordinates);
        true
    }

    fn definition(&mut self, entry: &FormulaEntry, faults: &mut Faults) -> bool {
        let Some(term) = lower(&entry.formula, &self.names, &mut self.graph, faults) else {
            return false;
        };
        self.names.terms.insert(entry.name.text.clone(), term);
        true
    }

    fn missing(&mut self, gap: &Missing, faults: &mut Faults) -> bool {
        let index = self.unknowns.len();
        let Some((placed, completed)) = gap.place(index, &self.names, &mut self.graph, faults)
        else {
            return false;
        };
        // The law itself enters with the observed entry, whose column is completed.
        if let Some(jacobian) = placed.jacobian {
            self.parts
                .push((format!("the missing cells of `{}`", gap.name()), jacobian));
        }
        self.names.completed.insert(gap.column(), completed);
        self.unknowns.push(placed.unknown);
        self.coordinates.extend(placed.coordinates);
        true
    }

    fn likelihood(&mut self, declared: &Declared, faults: &mut Faults) {
        for entry in &declared.observed {
            if self.defined(&[&entry.of, &entry.law])
                && let Some(value) = observe(entry, &self.names, &mut self.graph, faults)
            {
                self.parts
                    .push((format!("the observed `{}`", entry.name.text), value));
            }
        }
        for entry in &declared.terms {
            if !self.defined(&[&entry.formula]) {
                continue;
            }
            if let Some(term) = lower(&entry.formula, &self.names, &mut self.graph, faults) {
                if term.shape != Shape::Number {
                    let fault = Fault::at(
                        entry.formula.place.clone(),
                        format!(
                            "a term of the log density is one number, this has {}",
                            term.shape.words()
                        ),
                    )
                    .label(term.shape.words())
                    .help("sum it: sum(…)");
                    faults.push(fault);
                }
                self.parts
                    .push((format!("the term `{}`", entry.name.text), term.value));
            }
        }
    }

    fn finish(mut self, order: Vec<String>) -> Posterior {
        let values: Vec<Value> = self.parts.iter().map(|(_, value)| *value).collect();
        let total = match values.split_first() {
            Some((first, others)) => {
                let add = |total, value: &Value| plus(&mut self.graph, total, Some(*value));
                others.iter().fold(*first, add)
            }
            // Every unknown has a fault.
            None => self.graph.constant(0.0),
        };
        Posterior {
            unknowns: self.unknowns,
            coordinates: self.coordinates,
            target: Program::compile(&self.graph, &[total]),
            parts: Program::compile(&self.graph, &values),
            part_names: self.parts.into_iter().map(|(name, _)| name).collect(),
            names: self.names,
            graph: self.graph,
            order,
            undefined: self.undefined,
        }
    }
}

/// The order by dependency, or the fault of a cycle.
fn ordered(entries: &BTreeMap<String, Entry>, faults: &mut Faults) -> Option<Vec<String>> {
    let uses = entries
        .iter()
        .map(|(name, entry)| {
            let uses = match entry {
                Entry::Unknown(entry) => uses(&entry.law),
                Entry::Definition(entry) => uses(&entry.formula),
                Entry::Missing(gap) => uses(gap.law()),
            };
            (name.clone(), uses)
        })
        .collect();
    let cycle = match by_dependency(&uses) {
        Ok(order) => return Some(order),
        Err(cycle) => cycle,
    };
    let place = |name: &str| match &entries[name] {
        Entry::Unknown(entry) => entry.law.place.clone(),
        Entry::Definition(entry) => entry.formula.place.clone(),
        Entry::Missing(gap) => gap.law().place.clone(),
    };
    let mut fault = match cycle.as_slice() {
        [alone] => Fault::at(place(alone), format!("`{alone}` is defined by itself"))
            .label("uses its own name"),
        _ => {
            let round: Vec<String> = cycle
                .iter()
                .chain(cycle.first())
                .map(|name| format!("`{name}`"))
                .collect();
            Fault::at(
                place(&cycle[0]),
                format!(
                    "these names are defined by each other: {}",
                    round.join(" needs ")
                ),
            )
            .label(format!("`{}` needs `{}`", cycle[0], cycle[1]))
        }
    };
    for (i, name) in cycle.iter().enumerate().skip(1) {
        let next = &cycle[(i + 1) % cycle.len()];
        fault = fault.related(place(name), format!("`{name}` needs `{next}`"));
    }
    faults.push(fault.help("one of them must not use the others"));
    None
}

/// One name, one meaning: constants, unknowns, definitions, predictions and tables share their names.
fn unique_names(declared: &Declared, tables: &BTreeMap<String, Arc<Table>>, faults: &mut Faults) {
    let mut seen: BTreeMap<&str, (&Text, &str)> = BTreeMap::new();
    let names = (declared
        .constants
        .iter()
        .map(|(name, _)| (name, "a constant")))
    .chain(declared.unknowns.iter().map(|e| (&e.name, "an unknown")))
    .chain(
        declared
            .definitions
            .iter()
            .map(|e| (&e.name, "a definition")),
    )
    .chain(
        declared
            .predictions
            .iter()
            .map(|e| (&e.name, "a prediction")),
    );
    for (name, what) in names {
        if tables.contains_key(&name.text) {
            let fault = Fault::at(
                name.place.clone(),
                format!("`{}` is {what} and a data table", name.text),
            )
            .label("a table is called so")
            .help("give one of them another name");
            faults.push(fault);
        } else if let Some((first, first_what)) = seen.get(name.text.as_str()) {
            let fault = Fault::at(
                name.place.clone(),
                format!("`{}` is {what} and {first_what}", name.text),
            )
            .label("used twice")
            .related(first.place.clone(), "first here")
            .help("give one of them another name");
            faults.push(fault);
        } else {
            seen.insert(&name.text, (name, what));
        }
    }
}
