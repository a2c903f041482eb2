//! The density model in canonical form: every default said, formulas as printed from their trees, names in
//! order of dependency.

use super::declared::{Declared, ObservedEntry};
use super::posterior::Posterior;
use super::start::Start;
use crate::canon::Json;
use crate::formula::Expr;
use crate::methods::Sampler;

/// The parts that decide every draw: constants, unknowns and definitions in the order taken, what was
/// observed and the terms in order of name, sampler and start. Predictions and estimands are recorded from
/// the walk and leave it as it is; they stand beside it.
pub fn of(declared: &Declared, posterior: &Posterior, sampler: &Sampler, start: &Start) -> Json {
    let text = |expr: &Expr| Json::text(expr.to_string());
    let constants = declared
        .constants
        .iter()
        .map(|(name, number)| (name.text.clone(), Json::real(*number)));
    let order = posterior.order.iter().map(|name| {
        let definition = declared
            .definitions
            .iter()
            .find(|entry| entry.name.text == *name);
        let unknown = declared
            .unknowns
            .iter()
            .find(|entry| entry.name.text == *name);
        let mut members = vec![("name", Json::text(name.clone()))];
        match (definition, unknown) {
            (Some(definition), _) => members.push(("define", text(&definition.formula))),
            (_, Some(unknown)) => members.push(("law", text(&unknown.law))),
            (None, None) => members.push(("missing", Json::Bool(true))),
        }
        if let Some(unknown) = posterior
            .unknowns
            .iter()
            .find(|unknown| unknown.name == *name)
        {
            members.push(("per", Json::text(unknown.shape.words())));
            members.push(("count", Json::Count(unknown.shape.len() as u64)));
        }
        Json::object(members)
    });
    let observed = declared.observed.iter().map(|entry| observed(entry, &text));
    let terms = declared.terms.iter().map(|entry| {
        Json::object([
            ("name", Json::text(entry.name.text.clone())),
            ("term", text(&entry.formula)),
        ])
    });
    Json::object([
        (
            "model",
            Json::object([
                ("family", Json::text("density")),
                ("constant", Json::object(constants)),
                ("order", Json::array(order)),
                ("observed", Json::array(observed)),
                ("term", Json::array(terms)),
            ]),
        ),
        ("sampler", sampler.canonical()),
        ("start", start.canonical()),
    ])
}

fn observed(entry: &ObservedEntry, text: &impl Fn(&Expr) -> Json) -> Json {
    let mut members = vec![
        ("name", Json::text(entry.name.text.clone())),
        ("of", text(&entry.of)),
        ("law", text(&entry.law)),
    ];
    let parts = [
        ("right", &entry.right),
        ("left", &entry.left),
        ("interval", &entry.interval),
        ("upper", &entry.upper),
        ("entered", &entry.entered),
        ("weight", &entry.weight),
    ];
    for (key, part) in parts {
        members.push((key, part.as_ref().map_or(Json::Null, text)));
    }
    Json::object(members)
}
