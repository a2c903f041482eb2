//! What can be said of a density model before any draw.

use super::declared::Declared;
use super::posterior::Posterior;
use super::start::Start;
use crate::course::{Condition, EstimandSpec, Standing};
use crate::methods::Sampler;
use std::collections::BTreeMap;

/// Conditions of the model, then those of the sampler.
pub fn of(
    declared: &Declared,
    posterior: &Posterior,
    sampler: &Sampler,
    start: &Start,
    estimands: &[EstimandSpec],
) -> Vec<Condition> {
    let mut conditions = vec![finite_mass(declared, posterior), irreducible(posterior)];
    conditions.extend(one_start(posterior, start));
    conditions.extend(super::ratio::means(declared, posterior, estimands));
    conditions.extend(sampler.conditions());
    conditions
}

fn finite_mass(declared: &Declared, posterior: &Posterior) -> Condition {
    let flat: Vec<&str> = posterior
        .unknowns
        .iter()
        .filter(|unknown| !unknown.proper)
        .map(|unknown| unknown.name.as_str())
        .collect();
    let (standing, evidence) = if !flat.is_empty() {
        let names = flat.join("`, `");
        (
            Standing::Assumed,
            format!(
                "`{names}` has a flat law of infinite mass: that the data make the posterior proper is not shown"
            ),
        )
    } else if !declared.terms.is_empty() {
        (
            Standing::Assumed,
            "every law has mass 1, but a further term of the log density need not be bounded"
                .to_string(),
        )
    } else {
        // With laws of mass 1 the posterior's mass is the prior predictive density of the data, finite for
        // almost all data (continuous observations may make it infinite on a set of probability 0).
        (Standing::ByConstruction, "every unknown has a law of mass 1 and the data enter by laws alone (finite for almost all data)".to_string())
    };
    let mut evidence = evidence;
    for sentence in super::narrowed::narrowed(declared, posterior) {
        evidence.push_str("; ");
        evidence.push_str(&sentence);
    }
    Condition {
        name: "finite mass",
        standing,
        evidence,
    }
}

fn irreducible(posterior: &Posterior) -> Condition {
    let integers = posterior.unknowns.iter().any(|unknown| unknown.integer);
    let evidence = if integers {
        "continuous moves reach every neighbourhood, integer moves every value, unless the density is 0 between parts of its support; a mode that no chain visited cannot be seen"
    } else {
        "the moves reach every neighbourhood of a connected support; that the support is connected is not shown, and a mode that no chain visited cannot be seen"
    };
    Condition {
        name: "irreducible",
        standing: Standing::Assumed,
        evidence: evidence.to_string(),
    }
}

/// Where every chain starts at the same point, that they agree cannot show that the start is forgotten.
fn one_start(posterior: &Posterior, start: &Start) -> Option<Condition> {
    let whole = |stated: &BTreeMap<String, Vec<f64>>| stated.len() == posterior.unknowns.len();
    let same = match start {
        Start::At(stated) => whole(stated),
        Start::File { rows, .. } => rows
            .split_first()
            .is_some_and(|(first, others)| whole(first) && others.iter().all(|row| row == first)),
        Start::Spread | Start::Prior => false,
    };
    same.then(|| Condition {
        name: "start forgotten",
        standing: Standing::NotKnown,
        evidence: "all chains start at one point, so that they agree shows nothing about it: state no start, or a start \
                   file with a row of its own for each chain"
            .into(),
    })
}
