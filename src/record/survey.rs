//! What records lie under a folder: a glance at each, without checking it.

use super::bag::CIRCUMSTANCES;
use crate::canon::Json;
use crate::reading;
use std::fs;
use std::path::{Path, PathBuf};
use std::time::UNIX_EPOCH;

/// Folders looked into, and how deep they may lie.
const MOST_FOLDERS: usize = 200_000;
const DEEPEST: usize = 6;
/// A larger file is not read for a glance.
const LARGEST: u64 = 1 << 26;
/// Headline figures kept of a record.
const FIGURES: usize = 3;

/// How far a record is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum State {
    Sealed,
    /// Being worked on, or interrupted.
    Open,
    /// It has the name of a record, and its files cannot be read.
    Unreadable,
}

impl State {
    pub fn word(self) -> &'static str {
        match self {
            State::Sealed => "sealed",
            State::Open => "open",
            State::Unreadable => "unreadable",
        }
    }
}

/// A figure of a record's first point.
#[derive(Debug, Clone, PartialEq)]
pub struct Headline {
    pub name: String,
    pub unit: Option<String>,
    pub value: Option<f64>,
    pub mcse: Option<f64>,
}

/// A record at a glance. What does not exist is empty.
#[derive(Debug, Clone, PartialEq)]
pub struct Glance {
    /// From the folder that was surveyed, with `/` between.
    pub path: String,
    pub state: State,
    /// Why it is unreadable.
    pub words: String,
    pub title: String,
    pub question: String,
    pub plan_digest: String,
    pub result_digest: String,
    /// `met`, `missed` or `none`: of all points the worst.
    pub goal: String,
    pub points: u64,
    /// Estimands of the first point, and the first of them.
    pub estimands: u64,
    pub headlines: Vec<Headline>,
}

/// A folder that looks like a record, and what changes when the record does.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Found {
    pub path: String,
    pub at: PathBuf,
    pub state: State,
    pub fingerprint: String,
}

/// Every folder under `top` that looks like a record, in order of path. Links are not followed; what cannot be read
/// is passed over.
pub fn survey(top: &Path) -> Vec<Found> {
    let mut found = Vec::new();
    let mut folders = vec![(String::new(), top.to_owned(), 0)];
    let mut seen = 0;
    while let Some((name, path, depth)) = folders.pop() {
        seen += 1;
        if seen > MOST_FOLDERS {
            break;
        }
        if let Some(state) = state_of(&path) {
            found.push(Found {
                fingerprint: fingerprint(&path),
                path: if name.is_empty() { ".".into() } else { name },
                at: path,
                state,
            });
            continue;
        }
        let Ok(entries) = fs::read_dir(&path) else {
            continue;
        };
        for entry in entries.flatten() {
            let own = entry.file_name().to_string_lossy().into_owned();
            let folder = entry.file_type().is_ok_and(|kind| kind.is_dir());
            if folder && depth < DEEPEST && !own.starts_with('.') {
                let inner = if name.is_empty() {
                    own
                } else {
                    format!("{name}/{own}")
                };
                folders.push((inner, entry.path(), depth + 1));
            }
        }
    }
    found.sort_by(|a, b| a.path.cmp(&b.path));
    found
}

fn state_of(path: &Path) -> Option<State> {
    let plain =
        |name: &str| fs::symlink_metadata(path.join(name)).is_ok_and(|found| found.is_file());
    if plain("bagit.txt") && plain("data/plan.json") && plain("data/trail.parquet") {
        return Some(State::Sealed);
    }
    let open = path
        .extension()
        .is_some_and(|extension| extension == "open");
    (open && plain("journal")).then_some(State::Open)
}

/// Size and time of the files that change when a record does.
fn fingerprint(path: &Path) -> String {
    let one = |name: &str| {
        let found = fs::symlink_metadata(path.join(name)).ok()?;
        let since = found.modified().ok()?.duration_since(UNIX_EPOCH).ok()?;
        Some(format!("{name} {} {}", found.len(), since.as_nanos()))
    };
    let all = [
        "tagmanifest-sha256.txt",
        "data/plan.json",
        "data/summary.json",
        CIRCUMSTANCES,
    ];
    all.iter()
        .filter_map(|name| one(name))
        .collect::<Vec<_>>()
        .join("\n")
}

/// Reads what is told of a record.
pub fn glance(found: &Found) -> Glance {
    let mut glance = Glance {
        path: found.path.clone(),
        state: found.state,
        words: String::new(),
        title: String::new(),
        question: String::new(),
        plan_digest: String::new(),
        result_digest: String::new(),
        goal: String::new(),
        points: 0,
        estimands: 0,
        headlines: Vec::new(),
    };
    if let Err(words) = fill(found, &mut glance) {
        glance.state = State::Unreadable;
        glance.words = words;
    }
    glance
}

/// Reads JSON of a record, of at most so many bytes.
pub fn json(record: &Path, name: &str, most: u64) -> Result<Json, String> {
    let read = reading::read(&record.join(name), most);
    let bytes = read.map_err(|_| format!("{name} cannot be read"))?.bytes;
    let text = String::from_utf8(bytes).map_err(|_| format!("{name} is not UTF-8"))?;
    Json::read(&text).map_err(|words| format!("{name} is {words}"))
}

fn fill(found: &Found, glance: &mut Glance) -> Result<(), String> {
    let text = |json: &Json, key: &str| -> String {
        json.get(key)
            .and_then(Json::as_text)
            .unwrap_or_default()
            .into()
    };
    // A run that has just begun has no plan yet.
    if found.state == State::Open && !found.at.join("data/plan.json").exists() {
        return Ok(());
    }
    let plan = json(&found.at, "data/plan.json", LARGEST)?;
    glance.title = text(&plan, "title");
    glance.question = text(&plan, "question");
    glance.plan_digest = text(&plan, "plan_digest");
    if found.state == State::Open {
        return Ok(());
    }
    let summary = json(&found.at, "data/summary.json", LARGEST)?;
    glance.result_digest = text(&summary, "result_digest");
    let points = summary.get("points").map_or(&[][..], Json::items);
    glance.points = points.len() as u64;
    let goals: Vec<String> = points.iter().map(|point| text(point, "goal")).collect();
    let worst = ["missed", "met", "none"];
    let worst = worst
        .iter()
        .find(|word| goals.iter().any(|goal| goal == *word));
    glance.goal = worst.map_or(String::new(), |word| (*word).into());
    let estimands = points.first().and_then(|point| point.get("estimands"));
    let estimands = estimands.map_or(&[][..], Json::items);
    glance.estimands = estimands.len() as u64;
    glance.headlines = headlines(&estimands[..estimands.len().min(FIGURES)]);
    Ok(())
}

/// Figures from JSON that names them as `summary.json` does.
pub(super) fn headlines(figures: &[Json]) -> Vec<Headline> {
    let text = |json: &Json, key: &str| json.get(key).and_then(Json::as_text).map(str::to_owned);
    let real = |json: &Json, key: &str| json.get(key).and_then(Json::as_real);
    let headline = |json: &Json| Headline {
        name: text(json, "name").unwrap_or_default(),
        unit: text(json, "unit"),
        value: real(json, "value"),
        mcse: real(json, "mcse"),
    };
    figures.iter().map(headline).collect()
}
