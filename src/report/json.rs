//! `summary.json` and `grounds.json`.

use crate::canon::Json;
use crate::estimates::{Difference, Estimate, Figure, Note, Paired, Summary};
use crate::grounds::Grounds;
use crate::plan::Numerics;

/// The layout of both files.
const SCHEMA: u64 = 1;

/// All figures of all points. A figure that does not exist is null, with the reason in the notes. The result
/// digest is null while a run is not sealed.
pub fn summary_json(
    numerics: Numerics,
    plan_digest: &str,
    result_digest: Option<&str>,
    points: &[Summary],
) -> Json {
    Json::object([
        ("schema", Json::Count(SCHEMA)),
        (
            "numerics",
            Json::object([
                ("draws", Json::Count(numerics.draws)),
                ("estimates", Json::Count(numerics.estimates)),
            ]),
        ),
        ("plan_digest", Json::text(plan_digest)),
        (
            "result_digest",
            result_digest.map_or(Json::Null, Json::text),
        ),
        ("points", Json::array(points.iter().map(point_json))),
    ])
}

fn point_json(point: &Summary) -> Json {
    let mut fields = vec![
        ("key", Json::text(point.key.clone())),
        ("values", Json::object(point.values.iter().cloned())),
        ("draws_per_chain", Json::Count(point.draws_per_chain)),
        ("burn_in", Json::Count(point.burn_in)),
        ("goal", Json::text(point.goal.word())),
        (
            "estimands",
            Json::array(point.figures.iter().map(figure_json)),
        ),
    ];
    fields.extend(point.paired.as_ref().map(|paired| {
        let json = paired_json(paired, &point.figures);
        ("differences", json)
    }));
    Json::object(fields)
}

/// The differences from the first point of a sweep with shared streams; an empty list has its reason.
fn paired_json(paired: &Paired, figures: &[Figure]) -> Json {
    let none = Vec::new();
    let (differences, reason) = match &paired.differences {
        Ok(differences) => (differences, Json::Null),
        Err(reason) => (&none, Json::text(reason.clone())),
    };
    let both = figures.iter().zip(differences);
    let estimands = both.filter_map(|(f, d)| Some(difference_json(f, d.as_ref()?)));
    Json::object([
        ("from", Json::text(paired.first.clone())),
        ("estimands", Json::array(estimands)),
        ("reason", reason),
    ])
}

fn difference_json(f: &Figure, d: &Difference) -> Json {
    Json::object([
        ("name", Json::text(f.name.clone())),
        ("unit", unit_json(f)),
        ("value", real(d.value)),
        ("mcse", real(d.mcse)),
        ("notes", notes_json(&d.notes)),
    ])
}

fn unit_json(f: &Figure) -> Json {
    f.unit.clone().map_or(Json::Null, Json::text)
}

fn notes_json(notes: &[Note]) -> Json {
    Json::array(notes.iter().map(|n| Json::text(n.to_string())))
}

fn figure_json(f: &Figure) -> Json {
    let e: &Estimate = &f.estimate;
    let quantiles = e.quantiles.iter().map(|q| {
        let figure = Json::object([("value", real(q.value)), ("mcse", real(q.mcse))]);
        (q.level.to_string(), figure)
    });
    Json::object([
        ("name", Json::text(f.name.clone())),
        ("unit", unit_json(f)),
        ("value", real(e.value)),
        ("mcse", real(e.mcse)),
        ("sd", real(e.sd)),
        ("quantiles", Json::object(quantiles)),
        ("r_hat", real(e.r_hat)),
        ("effective_bulk", real(e.effective_bulk)),
        ("effective_tail", real(e.effective_tail)),
        ("notes", notes_json(&e.notes)),
    ])
}

fn real(x: Option<f64>) -> Json {
    x.filter(|x| !x.is_nan()).map_or(Json::Null, Json::real)
}

/// The grounds of all points, each under its key.
pub fn grounds_json(points: &[(String, Grounds)]) -> Json {
    let points = points.iter().map(|(key, grounds)| {
        Json::object([
            ("key", Json::text(key.clone())),
            ("grounds", grounds.json()),
        ])
    });
    Json::object([
        ("schema", Json::Count(SCHEMA)),
        ("points", Json::array(points)),
    ])
}
