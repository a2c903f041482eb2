//! (b) The study and its inputs resolved anew, beside the plan that the record has.

use super::difference;
use crate::canon::Json;
use crate::course::Family;
use crate::place::{Look, show};
use crate::plan::{Closed, NUMERICS, Numerics, Plan};
use crate::reading::{self, LARGEST_STUDY};
use crate::record;
use crate::study;
use std::path::Path;

/// A larger plan or summary is refused.
pub const LARGEST_JSON: u64 = 1 << 28;

/// The plan of a record, made from its study.
pub struct Opened {
    pub plan: Plan,
    /// Where `plan.json` and the index of inputs differ from it.
    pub differences: Vec<String>,
    /// The paths under `data/inputs/` of what the study was resolved with.
    pub inputs: Vec<String>,
}

/// What stands in `plan.json` alone.
pub struct Stated {
    pub numerics: Numerics,
    pub title: String,
    json: Json,
}

/// Reads JSON of a record within bounds.
pub fn json(folder: &Path, name: &str) -> Result<Json, String> {
    record::survey::json(folder, name, LARGEST_JSON)
}

/// Reads what `plan.json` says of itself.
pub fn stated(folder: &Path) -> Result<Stated, String> {
    let json = json(folder, "data/plan.json")?;
    let version = |which: &str| {
        let found = json.get("numerics").and_then(|n| n.get(which)?.as_count());
        found.ok_or_else(|| format!("data/plan.json: numerics.{which} is no version"))
    };
    Ok(Stated {
        numerics: Numerics {
            draws: version("draws")?,
            estimates: version("estimates")?,
        },
        title: json
            .get("title")
            .and_then(Json::as_text)
            .unwrap_or_default()
            .replace(char::is_control, " "),
        json,
    })
}

impl Stated {
    /// Whether this program draws as the record's did.
    pub fn draws_alike(&self) -> bool {
        self.numerics.draws == NUMERICS.draws
    }

    /// The keys of its points.
    pub fn point_keys(&self) -> impl Iterator<Item = &str> {
        let points = self.json.get("points").map_or(&[][..], Json::items);
        let keys = points.iter().filter_map(|point| point.get("key"));
        keys.filter_map(Json::as_text)
    }

    /// Whether this program estimates as the record's did.
    pub fn estimates_alike(&self) -> bool {
        self.numerics.estimates == NUMERICS.estimates
    }
}

/// Resolves the study of a record with the inputs it keeps. Fails in words when that cannot be done.
pub fn open(
    folder: &Path,
    stated: &Stated,
    registry: &[&dyn Family],
) -> Result<Opened, Vec<String>> {
    let one = |words: String| vec![words];
    let name = "data/study.toml";
    let read = reading::read(&folder.join(name), LARGEST_STUDY);
    let bytes = read
        .map_err(|_| one(format!("{name} cannot be read")))?
        .bytes;
    let files = record::kept(folder).map_err(one)?;
    let resolved = reading::text(bytes, name)
        .map_err(|fault| vec![fault])
        .and_then(|source| study::resolve_text(source, &files, registry));
    let mut plan = resolved.map_err(|faults| {
        let look = Look {
            colour: false,
            width: None,
        };
        one(format!(
            "{name} cannot be resolved:\n{}",
            show(&faults, look)
        ))
    })?;
    let kept = |input: &crate::plan::Input| {
        let name = input.path.file_name()?.to_str()?;
        Some(format!("data/inputs/{name}"))
    };
    let inputs = plan.inputs.iter().filter_map(kept).collect();
    let unused = match &files {
        reading::Files::Kept(kept) => kept.keys(),
        reading::Files::Folder(_) => unreachable!("a record keeps its inputs"),
    };
    let unused =
        unused.filter(|written| plan.inputs.iter().all(|input| input.written != **written));
    let unused: Vec<String> = unused
        .map(|written| format!("data/inputs.json names {written:?}, which the study does not"))
        .collect();
    plan.numerics = stated.numerics;
    plan.closed = closed(&stated.json, plan.points.len()).map_err(one)?;
    let differences = difference::json(&stated.json, &plan.json(), "the study gives");
    let named = |words: String| format!("data/plan.json: {words}");
    Ok(Opened {
        plan,
        differences: differences.into_iter().map(named).chain(unused).collect(),
        inputs,
    })
}

/// Where the run was closed. It is a choice of whoever closed it, and no study says it.
fn closed(plan: &Json, points: usize) -> Result<Option<Closed>, String> {
    let wrong = || "data/plan.json: `closed` cannot be read".to_owned();
    let length = |json: &Json| match json {
        Json::Null => Ok(None),
        json => match (json.get("burn_in"), json.get("draws")) {
            (Some(Json::Count(burn_in)), Some(Json::Count(draws))) => Ok(Some((*burn_in, *draws))),
            _ => Err(wrong()),
        },
    };
    match plan.get("closed") {
        None | Some(Json::Null) => Ok(None),
        Some(json) if json.items().len() == points => {
            let lengths: Result<Vec<_>, String> = json.items().iter().map(length).collect();
            lengths.map(Some)
        }
        Some(_) => Err(wrong()),
    }
}
