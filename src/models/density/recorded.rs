//! What is recorded at every draw: predictions are drawn from their laws, then the estimands computed.

use super::axis::{element_name, shape_of};
use super::declared::{Declared, LawEntry};
use super::names::Names;
use super::posterior::Posterior;
use super::unknown::fits;
use super::uses::uses;
use crate::course::{EstimandSpec, Quantity};
use crate::formula::{Graph, Kind, LawTerm, Program, Shape, Term, lower, lower_law, parse};
use crate::laws::Value;
use crate::place::{Fault, Faults};
use crate::reading::Table;
use sha2::{Digest, Sha256};
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

/// The predictions and estimands of a model.
pub struct Recorded {
    pub predictions: Vec<Prediction>,
    /// From all coordinates, then the predictions in order, to the recorded quantities.
    pub program: Program,
    pub quantities: Vec<Quantity>,
}

/// A quantity drawn from a law given the unknowns (`[predict]`).
pub struct Prediction {
    /// Seeds its streams: the first 8 bytes of the SHA-256 of its name, so that a further prediction does not
    /// shift the draws of this one.
    pub key: u64,
    pub law: LawTerm,
    pub len: usize,
    /// From all coordinates to the law's parameters, the elements of each together.
    pub parameters: Program,
    /// Elements of each parameter: 1, or as many as the prediction has.
    pub widths: Vec<usize>,
}

/// Resolves `[predict]` and the estimands; with none of these every unknown is one.
pub fn resolve(
    declared: &Declared,
    estimands: &[EstimandSpec],
    posterior: &Posterior,
    tables: &BTreeMap<String, Arc<Table>>,
    faults: &mut Faults,
) -> Option<Recorded> {
    let before = faults.count();
    let mut graph = posterior.graph.clone();
    let mut names = posterior.names.clone();
    let mut predictions = Vec::new();
    let mut units: BTreeMap<String, String> = posterior
        .unknowns
        .iter()
        .filter_map(|unknown| Some((unknown.name.clone(), unknown.unit.clone()?)))
        .collect();
    let mut undefined = posterior.undefined.clone();
    for entry in &declared.predictions {
        let predicted = uses(&entry.law)
            .is_disjoint(&undefined)
            .then(|| predict(entry, posterior, tables, &mut graph, faults));
        if predicted.as_ref().is_none_or(Option::is_none) {
            undefined.insert(entry.name.text.clone());
        }
        if let Some((prediction, term)) = predicted.flatten() {
            predictions.push(prediction);
            names.terms.insert(entry.name.text.clone(), term);
            units.extend(
                entry
                    .unit
                    .clone()
                    .map(|unit| (entry.name.text.clone(), unit)),
            );
        }
    }
    let mut quantities = Vec::new();
    let mut values: Vec<Value> = Vec::new();
    if estimands.is_empty() {
        // A completed column is recorded as a whole only where it is asked for.
        let unknowns = posterior.unknowns.iter();
        let unknowns = unknowns.filter(|unknown| !unknown.name.contains('.'));
        for (i, unknown) in unknowns.enumerate() {
            values.push(names.terms[&unknown.name].value);
            quantities.extend(elements(
                &unknown.name,
                &unknown.shape,
                unknown.unit.as_deref(),
                Kind::Number,
                i,
            ));
        }
    }
    for (i, spec) in estimands.iter().enumerate() {
        let Some(term) = estimand(spec, &names, &undefined, &mut graph, faults) else {
            continue;
        };
        let own = units.get(&spec.name.text).filter(|_| spec.of.is_none());
        let unit = spec
            .unit
            .as_ref()
            .map(|unit| unit.text.as_str())
            .or(own.map(String::as_str));
        values.push(term.value);
        quantities.extend(elements(&spec.name.text, &term.shape, unit, term.kind, i));
    }
    let program = (faults.count() == before).then(|| Program::compile(&graph, &values))?;
    Some(Recorded {
        predictions,
        program,
        quantities,
    })
}

fn estimand(
    spec: &EstimandSpec,
    names: &Names,
    undefined: &BTreeSet<String>,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<Term> {
    let expr = parse(spec.of.as_ref().unwrap_or(&spec.name), faults)?;
    if !uses(&expr).is_disjoint(undefined) {
        return None;
    }
    lower(&expr, names, graph, faults)
}

fn elements<'a>(
    name: &'a str,
    shape: &'a Shape,
    unit: Option<&'a str>,
    kind: Kind,
    estimand: usize,
) -> impl Iterator<Item = Quantity> + 'a {
    (0..shape.len()).map(move |i| Quantity {
        name: element_name(name, shape, i),
        unit: unit.map(str::to_string),
        condition: kind == Kind::Condition,
        estimand,
    })
}

fn predict(
    entry: &LawEntry,
    posterior: &Posterior,
    tables: &BTreeMap<String, Arc<Table>>,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<(Prediction, Term)> {
    // Predictions are drawn given unknowns and definitions: they do not see one another.
    let mut base = posterior.graph.clone();
    let law = lower_law(&entry.law, &posterior.names, &mut base, faults)?;
    let shape = match &entry.per {
        Some(per) => shape_of(&entry.name, Some(per), tables, faults)?,
        None => law.shape.clone(),
    };
    let fault = if !law.law.proper() {
        Some(Fault::at(
            law.place.clone(),
            format!(
                "`{}` can't be predicted: `{}` has infinite mass",
                entry.name.text,
                law.law.name()
            ),
        ))
    } else if !fits(&law.shape, &shape) {
        Some(
            Fault::at(
                law.place.clone(),
                format!(
                    "the parameters of this law have {}, `{}` has {}",
                    law.shape.words(),
                    entry.name.text,
                    shape.words()
                ),
            )
            .related(entry.name.place.clone(), "this prediction"),
        )
    } else {
        None
    };
    if let Some(fault) = fault {
        faults.push(fault);
        return None;
    }
    let values = law.numbers();
    let widths = values
        .iter()
        .map(|&value| base.shape(value).len())
        .collect();
    let parameters = Program::compile(&base, &values);
    let value = graph.input(shape.clone());
    let digest = Sha256::digest(entry.name.text.as_bytes());
    let prediction = Prediction {
        key: u64::from_le_bytes(digest[..8].try_into().expect("8 bytes")),
        law,
        len: shape.len(),
        parameters,
        widths,
    };
    Some((
        prediction,
        Term {
            value,
            shape,
            kind: Kind::Number,
        },
    ))
}
