//! Improper posteriors that can be seen from the study alone.

use super::declared::Declared;
use super::uses::uses;
use crate::formula::{Expr, Form};
use crate::place::{Fault, Faults};
use std::collections::{BTreeMap, BTreeSet};

/// Faults for flat unknowns that no data can make proper:
/// - nothing observed and no term depends on one, through any definition or law;
/// - a `log_flat` scale of the law of other unknowns alone: as it goes to 0 the density of the data tends to
///   a positive number, and 1/x has infinite mass there (common knowledge on hierarchical models; Gelman
///   2006, section 3.2, from memory).
pub fn check(declared: &Declared, faults: &mut Faults) {
    let mut used: BTreeMap<&str, BTreeSet<String>> = BTreeMap::new();
    for entry in &declared.unknowns {
        used.insert(&entry.name.text, uses(&entry.law));
    }
    for entry in &declared.definitions {
        used.insert(&entry.name.text, uses(&entry.formula));
    }
    let informed = informed(declared, &used);
    for entry in &declared.unknowns {
        let name = entry.name.text.as_str();
        let Form::Call(call) = &entry.law.form else {
            continue;
        };
        let law = call.name.as_str();
        if !matches!(law, "flat" | "flat_positive" | "log_flat") {
            continue;
        }
        if !informed.contains(name) {
            let fault = Fault::at(
                entry.law.place.clone(),
                format!("the posterior is improper: nothing observed depends on `{name}`"),
            )
            .label(format!("`{law}` has infinite mass"))
            .related(entry.name.place.clone(), "this unknown")
            .help("give it a law with finite mass, or let it enter the law of something observed");
            faults.push(fault);
        } else if law == "log_flat" && scales_unknowns_alone(declared, name) {
            let fault = Fault::at(
                entry.law.place.clone(),
                format!("the posterior is improper: `{name}` is the scale of unknowns alone, and `log_flat` has infinite mass near 0"),
            )
            .label("infinite mass near 0")
            .help("give it a law with finite mass near 0, such as half_cauchy(scale = …) or flat_positive()");
            faults.push(fault);
        }
    }
}

/// Everything that an observed entry or a term depends on.
fn informed(declared: &Declared, all_uses: &BTreeMap<&str, BTreeSet<String>>) -> BTreeSet<String> {
    let mut reached: BTreeSet<String> = BTreeSet::new();
    let mut open: Vec<String> = Vec::new();
    for entry in &declared.observed {
        let parts = [
            &entry.right,
            &entry.left,
            &entry.interval,
            &entry.upper,
            &entry.entered,
            &entry.weight,
        ];
        let all = [&entry.of, &entry.law]
            .into_iter()
            .chain(parts.into_iter().flatten());
        open.extend(all.flat_map(uses));
    }
    open.extend(declared.terms.iter().flat_map(|entry| uses(&entry.formula)));
    while let Some(name) = open.pop() {
        if reached.insert(name.clone())
            && let Some(used) = all_uses.get(name.as_str())
        {
            open.extend(used.iter().cloned());
        }
    }
    reached
}

/// True if every use of the unknown is, bare, the scale of a law of another unknown, at least once.
fn scales_unknowns_alone(declared: &Declared, name: &str) -> bool {
    let mut scales = false;
    for entry in &declared.unknowns {
        if !uses(&entry.law).contains(name) {
            continue;
        }
        let Form::Call(call) = &entry.law.form else {
            return false;
        };
        let located = matches!(
            call.name.as_str(),
            "normal" | "student" | "cauchy" | "laplace" | "logistic" | "gumbel"
        );
        let bare = |parameter: &str, value: &Expr| {
            matches!(parameter, "sd" | "scale") && value.form == Form::Name(name.to_string())
        };
        let elsewhere = call
            .named
            .iter()
            .any(|(p, _, value)| !bare(p, value) && uses(value).contains(name));
        if !located || elsewhere {
            return false;
        }
        scales = true;
    }
    let used = |formula: &Expr| uses(formula).contains(name);
    scales
        && !declared
            .definitions
            .iter()
            .any(|entry| used(&entry.formula))
        && !declared.terms.iter().any(|entry| used(&entry.formula))
        && !declared.observed.iter().any(|entry| {
            let parts = [
                &entry.right,
                &entry.left,
                &entry.interval,
                &entry.upper,
                &entry.entered,
                &entry.weight,
            ];
            [&entry.of, &entry.law]
                .into_iter()
                .chain(parts.into_iter().flatten())
                .any(used)
        })
}
