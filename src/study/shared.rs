//! With shared streams: what all points have in common, so that their chains are driven by the same random
//! numbers.
//!
//! It is the study as written, without the swept values: how a point resolves may depend on them. So under
//! shared streams a default that is spelt out counts as a change, though the writing of formulas does not.

use crate::canon::Json;
use crate::plan::Point;
use crate::reading::{Content, Section, Tree, Value};
use crate::study::estimand::printed;
use crate::study::sweep::{Sweep, json};

/// Any of the points will do: of its resolved parts, only those are taken that no axis touches.
pub(super) fn shared_content(root: &Section, sweep: &Sweep, point: &Point) -> Json {
    let tree = sweep.removed(root);
    let written = |key: &str| {
        tree.get(key)
            .map_or(Json::Null, |entry| spelt(&entry.value))
    };
    let start = match tree.get("ensemble").map(|entry| &entry.value.content) {
        Some(Content::Tree(ensemble)) => start(ensemble, point),
        _ => Json::text("spread"),
    };
    let resolved = point.shared_parts(
        !sweep.touches(&["data"]),
        !sweep.touches(&["ensemble", "burn_in"]),
        !sweep.touches(&["ensemble", "every"]),
    );
    Json::object([
        ("model", written("model")),
        ("sampler", written("sampler")),
        ("start", start),
        ("resolved", resolved),
    ])
}

/// The start as written, but a file by its bytes, never by its path.
fn start(ensemble: &Tree, point: &Point) -> Json {
    let Some(entry) = ensemble.get("start") else {
        return Json::text("spread");
    };
    match &entry.value.content {
        Content::Tree(tree) if tree.get("file").is_some() => {
            let canonical = point.model.canonical();
            canonical.get("start").cloned().unwrap_or(Json::Null)
        }
        _ => spelt(&entry.value),
    }
}

/// A value as written, each formula as printed from its tree.
fn spelt(value: &Value) -> Json {
    match &value.content {
        Content::Text(text) => Json::text(printed(text)),
        Content::List(list) => Json::array(list.iter().map(spelt)),
        Content::Tree(tree) => {
            let entries = tree.entries.iter();
            Json::object(entries.map(|e| (e.key.text.clone(), spelt(&e.value))))
        }
        _ => json(value),
    }
}
