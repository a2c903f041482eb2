//! Reads `[ensemble] start`.

use super::posterior::Posterior;
use super::start::Start;
use super::unknown::Unknown;
use crate::course::StartSpec;
use crate::place::{Fault, Faults, Place, nearest};
use crate::reading::{Cells, Content, Section, Table, Value};
use std::collections::BTreeMap;

/// The start, resolved: what a stated start does not give must have a law of finite mass.
pub fn read(spec: &StartSpec, posterior: &Posterior, faults: &mut Faults) -> Option<Start> {
    let before = faults.count();
    let start = match spec {
        StartSpec::Spread => Start::Spread,
        StartSpec::Prior => Start::Prior,
        StartSpec::At(section) => Start::At(at(section, posterior, faults)),
        StartSpec::File { path, table } => {
            let rows = file(&path.place, table, posterior, faults);
            Start::File {
                sha256: table.sha256.clone(),
                rows,
            }
        }
    };
    let stated: Vec<&str> = match &start {
        Start::Spread | Start::Prior => Vec::new(),
        Start::At(values) => values.keys().map(String::as_str).collect(),
        Start::File { rows, .. } => rows
            .first()
            .map(|row| row.keys().map(String::as_str).collect())
            .unwrap_or_default(),
    };
    let flat: Vec<&Unknown> = (posterior.unknowns.iter())
        .filter(|unknown| !unknown.proper && !stated.contains(&unknown.name.as_str()))
        .collect();
    if let Some((first, others)) = flat.split_first() {
        let values: Vec<String> = flat.iter().map(|u| format!("{} = …", u.name)).collect();
        let names: Vec<&str> = flat.iter().map(|u| u.name.as_str()).collect();
        let what = match others {
            [] => format!(
                "`{}` has a flat law, from which no start can be drawn",
                first.name
            ),
            _ => format!(
                "`{}` have flat laws, from which no start can be drawn",
                names.join("`, `")
            ),
        };
        let mut fault = Fault::at(first.place.clone(), what)
            .label("a law of infinite mass")
            .help(format!(
                "state one: [ensemble] start = {{ at = {{ {} }} }}",
                values.join(", ")
            ));
        for other in others {
            fault = fault.related(other.place.clone(), "another");
        }
        faults.push(fault);
    }
    (faults.count() == before).then_some(start)
}

fn at(section: &Section, posterior: &Posterior, faults: &mut Faults) -> BTreeMap<String, Vec<f64>> {
    let mut values = BTreeMap::new();
    for (name, value) in section.entries() {
        let Some(unknown) = find(&name.text, &name.place, posterior, faults) else {
            continue;
        };
        if let Some(numbers) = numbers(&value, unknown, faults) {
            values.insert(name.text.clone(), numbers);
        }
    }
    values
}

fn find<'p>(
    name: &str,
    place: &Place,
    posterior: &'p Posterior,
    faults: &mut Faults,
) -> Option<&'p Unknown> {
    let found = posterior
        .unknowns
        .iter()
        .find(|unknown| unknown.name == name);
    if found.is_none() {
        let mut fault = Fault::at(
            place.clone(),
            format!("`{name}` is not an unknown of the model"),
        )
        .label("unknown name");
        if let Some(near) = nearest(
            name,
            posterior
                .unknowns
                .iter()
                .map(|unknown| unknown.name.as_str()),
        ) {
            fault = fault.help(format!("did you mean `{near}`?"));
        }
        faults.push(fault);
    }
    found
}

/// One number for all elements, or a list with one for each.
fn numbers(value: &Value, unknown: &Unknown, faults: &mut Faults) -> Option<Vec<f64>> {
    if !matches!(value.content, Content::List(_)) {
        return value
            .number(faults)
            .map(|number| vec![number; unknown.len()]);
    }
    let numbers = value.numbers(faults)?;
    if numbers.len() != unknown.len() {
        let fault = Fault::at(
            value.place.clone(),
            format!(
                "`{}` has {} values, the start gives {}",
                unknown.name,
                unknown.len(),
                numbers.len()
            ),
        )
        .label(format!("{} numbers", numbers.len()))
        .help("give one number for all, or a list with one for each");
        faults.push(fault);
        return None;
    }
    Some(numbers)
}

/// Columns are called as the unknowns' elements are: `a`, `rate["Cawdle"]`, `beta[2]`.
fn file(
    place: &Place,
    table: &Table,
    posterior: &Posterior,
    faults: &mut Faults,
) -> Vec<BTreeMap<String, Vec<f64>>> {
    let known: Vec<String> = posterior
        .coordinates
        .iter()
        .map(|coordinate| coordinate.name.clone())
        .collect();
    for column in &table.columns {
        if column.name == "chain" || known.contains(&column.name) {
            continue;
        }
        let mut fault = Fault::at(
            column.place.clone(),
            format!("column `{}` is not an unknown of the model", column.name),
        )
        .label("unknown name");
        if let Some(near) = nearest(&column.name, known.iter().map(String::as_str)) {
            fault = fault.help(format!("did you mean `{near}`?"));
        }
        faults.push(fault);
    }
    let mut rows = vec![BTreeMap::new(); table.rows];
    for unknown in &posterior.unknowns {
        let columns: Vec<Option<&[f64]>> = (0..unknown.len())
            .map(|i| match &table.column(&unknown.element_name(i))?.cells {
                Cells::Numbers { values, .. } => Some(values.as_ref()),
                Cells::Labels { .. } => None,
            })
            .collect();
        if columns.iter().all(Option::is_none) {
            continue;
        }
        if let Some(i) = columns.iter().position(Option::is_none) {
            let fault = Fault::at(
                place.clone(),
                format!(
                    "the start file has no numbers for `{}`",
                    unknown.element_name(i)
                ),
            )
            .label("a column is missing or holds text")
            .help("give every element of an unknown a column of numbers, or none");
            faults.push(fault);
            continue;
        }
        for (row, values) in rows.iter_mut().enumerate() {
            values.insert(
                unknown.name.clone(),
                columns.iter().flatten().map(|column| column[row]).collect(),
            );
        }
    }
    rows
}
