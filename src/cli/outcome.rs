//! From the ends of all points to the files of a finished run, and the exit status that they ask for.

use super::status::Status;
use crate::canon::{self, Json};
use crate::engine::{PointEnd, Reviewed};
use crate::estimates::Paired;
use crate::plan::Plan;
use crate::record::{self, Circumstances, JournalFile, Open, RecordFault, Sealing};
use crate::report::Outcome;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// A finished folder.
pub struct Filed {
    pub path: PathBuf,
    pub status: Status,
}

/// Why nothing was filed.
#[derive(Debug)]
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

/// Seals the record of a run that has ended, from the journal of its folder or from another's.
pub fn file(
    plan: &Plan,
    ends: &[PointEnd<Reviewed>],
    paired: Vec<Option<Paired>>,
    open: Open,
    journal: Option<&mut JournalFile>,
    mut circumstances: Circumstances,
) -> Result<Filed, NotFiled> {
    let outcome = Outcome::of(plan, ends, paired);
    if outcome.points.is_empty() {
        let words = outcome.failed.first();
        let words = words.map_or("no point to run", |(_, words)| words);
        let _ = circumstances.end(&open, words);
        return Err(NotFiled::NoStart(words.to_owned()));
    }
    circumstances.enter("kernels", kernels(plan, ends));
    let length = |end: &PointEnd<Reviewed>| {
        let ended = end.ended.as_ref().ok()?;
        Some((ended.burn_in, ended.draws))
    };
    let sealing = Sealing {
        plan,
        lengths: ends.iter().map(length).collect(),
        files: outcome.files(),
        result_digest: canon::hex(&outcome.digest()),
    };
    let path = record::seal(open, journal, &sealing, circumstances)?;
    let status = status(&path)?;
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

/// A record sealed before, if its files are those it was sealed with, and of this plan.
pub fn again(path: PathBuf, plan: &Plan) -> Result<Filed, RecordFault> {
    let differences = record::check_bag(&path)?;
    if !differences.is_empty() {
        return Err(RecordFault::Changed {
            path,
            differences: differences.join("\n"),
        });
    }
    let name = "data/summary.json";
    let summary = json(&path, name)?;
    let digest = canon::hex(&plan.digest());
    if summary.get("plan_digest").and_then(Json::as_text) != Some(&digest) {
        let words = "its summary is not that of this study";
        return Err(RecordFault::foreign(&path, words));
    }
    let status = status(&path)?;
    Ok(Filed { path, status })
}

fn json(record: &Path, name: &str) -> Result<Json, RecordFault> {
    let text = record::read(record, name)?;
    Json::read(&text).map_err(|words| RecordFault::foreign(&record.join(name), &words))
}

/// What the files of a record ask for.
fn status(record: &Path) -> Result<Status, RecordFault> {
    let name = "data/failed.json";
    let failed = if record.join(name).exists() {
        let failed = json(record, name)?;
        failed
            .get("points")
            .map_or(0, |points| points.items().len())
    } else {
        0
    };
    let summary = json(record, "data/summary.json")?;
    let grounds = json(record, "data/grounds.json")?;
    Ok(status_of(&summary, &grounds, failed))
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
