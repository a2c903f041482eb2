//! From the ends of all points to the files of a finished run, and the exit status that they ask for.

use super::status::Status;
use super::study::grounds_of;
use crate::canon::{self, Json};
use crate::engine::{PointEnd, Reviewed, summary};
use crate::estimates::{Paired, Summary};
use crate::grounds::Grounds;
use crate::plan::{NUMERICS, Plan};
use crate::record::{self, Circumstances, Open, RecordFault};
use crate::report;
use std::collections::BTreeMap;
use std::path::PathBuf;

/// A finished folder.
pub struct Filed {
    pub path: PathBuf,
    pub status: Status,
}

/// Why nothing was filed.
pub enum NotFiled {
    /// No point found a start.
    NoStart(String),
    Record(RecordFault),
}

impl From<RecordFault> for NotFiled {
    fn from(fault: RecordFault) -> NotFiled {
        NotFiled::Record(fault)
    }
}

/// Writes summaries, grounds and failed points, and gives the folder its name.
pub fn file(
    plan: &Plan,
    ends: &[PointEnd<Reviewed>],
    paired: Vec<Option<Paired>>,
    open: Open,
    mut circumstances: Circumstances,
) -> Result<Filed, NotFiled> {
    let failed: Vec<(usize, &str)> = ends
        .iter()
        .filter_map(|end| Some((end.point, end.ended.as_ref().err()?.as_str())))
        .collect();
    if failed.len() == ends.len() {
        let words = failed.first().map_or("no point to run", |(_, words)| words);
        let _ = circumstances.end(&open, words);
        return Err(NotFiled::NoStart(words.to_owned()));
    }
    let points: Vec<(Summary, Grounds)> = ends
        .iter()
        .zip(paired)
        .filter_map(|(end, paired)| {
            let summary = summary(plan, end, paired)?;
            let grounds = grounds_of(plan, end.point, Some(&summary));
            Some((summary, grounds))
        })
        .collect();
    let summaries: Vec<Summary> = points.iter().map(|(summary, _)| summary.clone()).collect();
    let digest = canon::hex(&plan.digest());
    let json = report::summary_json(NUMERICS, &digest, None, &summaries);
    open.write("data/summary.json", json.pretty().as_bytes())?;
    open.write(
        "data/summary.csv",
        report::summary_csv(&summaries).as_bytes(),
    )?;
    let keyed: Vec<(String, Grounds)> = points
        .iter()
        .map(|(summary, grounds)| (summary.key.clone(), grounds.clone()))
        .collect();
    let grounds = report::grounds_json(&keyed);
    open.write("data/grounds.json", grounds.pretty().as_bytes())?;
    let mut text = report::run_text(&plan.title, &plan.question, &points, report::WIDTH);
    if !failed.is_empty() {
        let json = failed_json(plan, &failed);
        open.write("data/failed.json", json.pretty().as_bytes())?;
        text.push_str(&failed_text(plan, &failed));
    }
    open.write("data/summary.txt", text.as_bytes())?;
    let status = status_of(&json, &grounds, failed.len());
    circumstances.enter("kernels", kernels(plan, ends));
    circumstances.end(&open, "done")?;
    let path = open.finish()?;
    Ok(Filed { path, status })
}

/// Points whose kernels are entered in the circumstances.
const KERNELS: usize = 100;

/// Counts and rates of the kernels over the draws, a list over the chains for each: acceptance rates and the
/// like. How they are told is no part of a result, so they are circumstances.
fn kernels(plan: &Plan, ends: &[PointEnd<Reviewed>]) -> Json {
    let point = |end: &PointEnd<Reviewed>| {
        let ended = end.ended.as_ref().ok()?;
        let mut by_name: BTreeMap<String, Json> = BTreeMap::new();
        for (name, value) in ended.notes.iter().flatten() {
            let value = if value.is_nan() {
                Json::Null
            } else {
                Json::real(*value)
            };
            let list = by_name.entry(name.clone());
            if let Json::Array(list) = list.or_insert(Json::Array(Vec::new())) {
                list.push(value);
            }
        }
        Some(Json::object([
            ("key", Json::text(canon::hex(&plan.point_key(end.point)))),
            ("notes", Json::Object(by_name)),
        ]))
    };
    Json::array(ends.iter().take(KERNELS).filter_map(point))
}

fn values_text(plan: &Plan, point: usize) -> String {
    let values = plan.points[point].values.iter();
    let values = values.map(|(path, value)| format!("{path} = {}", value.canonical()));
    values.collect::<Vec<_>>().join(", ")
}

fn failed_text(plan: &Plan, failed: &[(usize, &str)]) -> String {
    let mut text = format!("\nPoints that found no start: {}\n", failed.len());
    for (point, words) in failed {
        text.push_str(&format!("  {}: {words}\n", values_text(plan, *point)));
    }
    text
}

fn failed_json(plan: &Plan, failed: &[(usize, &str)]) -> Json {
    let point = |(point, words): &(usize, &str)| {
        let values = plan.points[*point].values.clone();
        Json::object([
            ("key", Json::text(canon::hex(&plan.point_key(*point)))),
            ("values", Json::object(values)),
            ("reason", Json::text(*words)),
        ])
    };
    Json::object([("points", Json::array(failed.iter().map(point)))])
}

/// A folder that was finished before, if its files are those it ended with, and of this plan.
pub fn again(path: PathBuf, plan: &Plan) -> Result<Filed, RecordFault> {
    record::check_seal(&path)?;
    let json = |name: &str| {
        let text = record::read(&path, name)?;
        Json::read(&text).map_err(|words| RecordFault::foreign(&path.join(name), &words))
    };
    let summary = json("data/summary.json")?;
    let digest = canon::hex(&plan.digest());
    if summary.get("plan_digest").and_then(Json::as_text) != Some(&digest) {
        let words = "its summary is not that of this study";
        return Err(RecordFault::foreign(&path, words));
    }
    let failed = if path.join("data/failed.json").exists() {
        json("data/failed.json")?
            .get("points")
            .map_or(0, |points| points.items().len())
    } else {
        0
    };
    let status = status_of(&summary, &json("data/grounds.json")?, failed);
    Ok(Filed { path, status })
}

/// What the files of a finished run ask for.
fn status_of(summary: &Json, grounds: &Json, failed_points: usize) -> Status {
    let points = |json: &Json| {
        json.get("points")
            .map_or(Vec::new(), |p| p.items().to_vec())
    };
    let missed = points(summary)
        .iter()
        .any(|point| point.get("goal").and_then(Json::as_text) == Some("missed"));
    let fallen = points(grounds).iter().any(has_failed);
    if failed_points > 0 || missed || fallen {
        Status::Missed
    } else {
        Status::Done
    }
}

fn has_failed(point: &Json) -> bool {
    let failed = point
        .get("grounds")
        .and_then(|grounds| grounds.get("failed"));
    failed.is_some_and(|failed| !failed.items().is_empty())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn status(summary: &str, grounds: &str, failed: usize) -> Status {
        let read = |text| Json::read(text).unwrap();
        status_of(&read(summary), &read(grounds), failed)
    }

    #[test]
    fn files_ask_for_a_status() {
        let (met, missed) = (
            r#"{"points":[{"goal":"met"},{"goal":"none"}]}"#,
            r#"{"points":[{"goal":"met"},{"goal":"missed"}]}"#,
        );
        let (stands, fell) = (
            r#"{"points":[{"grounds":{"failed":[]}}]}"#,
            r#"{"points":[{"grounds":{"failed":["irreducible"]}}]}"#,
        );
        assert_eq!(status(met, stands, 0), Status::Done);
        assert_eq!(status(missed, stands, 0), Status::Missed);
        assert_eq!(status(met, fell, 0), Status::Missed);
        assert_eq!(status(missed, fell, 1), Status::Missed);
        assert_eq!(status(met, stands, 1), Status::Missed);
    }
}
