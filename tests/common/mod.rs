//! What the outer tests share: the real binary, run in a folder of its own.

#![allow(dead_code, reason = "each test uses its part")]

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

pub fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// The binary under test.
pub fn binary() -> &'static str {
    env!("CARGO_BIN_EXE_odograph")
}

/// Runs the binary in a folder and waits for it.
pub fn odograph(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(binary())
        .args(arguments)
        .current_dir(folder)
        .output()
        .expect("the binary starts")
}

pub fn text(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

/// The exit status of a process that no signal ended.
pub fn status(output: &Output) -> i32 {
    output.status.code().expect("no signal")
}

/// Every file of a record's payload, by its path: draws, trail, checkpoints and what is rendered from them. The
/// crate's metadata tell times, which are no part of a result.
pub fn payload(record: &Path) -> BTreeMap<PathBuf, Vec<u8>> {
    let mut files = BTreeMap::new();
    let mut folders = vec![record.join("data")];
    while let Some(folder) = folders.pop() {
        for entry in fs::read_dir(folder).expect("a folder") {
            let path = entry.expect("an entry").path();
            if path.is_dir() {
                folders.push(path);
            } else if !path.ends_with("ro-crate-metadata.json") {
                let name = path.strip_prefix(record).expect("in it").to_owned();
                files.insert(name, fs::read(&path).expect("a file"));
            }
        }
    }
    files
}

/// What one `run` left.
pub struct Run {
    pub status: i32,
    pub stdout: String,
    pub stderr: String,
    /// The folder of the record, when there is one.
    pub record: Option<PathBuf>,
}

impl Run {
    /// The text of a file of the record's payload.
    pub fn file(&self, name: &str) -> String {
        let record = self
            .record
            .as_ref()
            .unwrap_or_else(|| panic!("no record; stderr:\n{}", self.stderr));
        let path = record.join("data").join(name);
        fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
    }

    pub fn summary(&self) -> serde_json::Value {
        serde_json::from_str(&self.file("summary.json")).expect("summary.json is JSON")
    }
}

/// Runs a study into a folder, with further arguments.
pub fn run(study: &Path, into: &Path, more: &[&str]) -> Run {
    let folder = study.parent().expect("a study in a folder");
    let name = study.file_name().and_then(|n| n.to_str()).expect("a name");
    let into_text = into.to_str().expect("a path in UTF-8");
    let mut arguments = vec!["run", name, "--into", into_text];
    arguments.extend(more);
    let output = odograph(folder, &arguments);
    let stem = study.file_stem().expect("a stem");
    Run {
        status: output.status.code().unwrap_or(-1),
        stdout: text(&output.stdout),
        stderr: text(&output.stderr),
        record: only_folder(&into.join(stem)),
    }
}

fn only_folder(folder: &Path) -> Option<PathBuf> {
    let mut found: Vec<PathBuf> = fs::read_dir(folder)
        .ok()?
        .filter_map(|entry| Some(entry.ok()?.path()))
        .filter(|path| path.is_dir())
        .collect();
    found.sort();
    assert!(found.len() < 2, "more than one record: {found:?}");
    found.pop()
}

/// Copies the files of one folder whose names end so.
pub fn copy_files(from: &Path, to: &Path, ending: &str) {
    fs::create_dir_all(to).expect("a folder");
    for entry in fs::read_dir(from).expect("a readable folder") {
        let path = entry.expect("a readable entry").path();
        let name = path
            .file_name()
            .expect("a name")
            .to_string_lossy()
            .into_owned();
        if name.ends_with(ending) {
            fs::copy(&path, to.join(&name)).expect("copied");
        }
    }
}

/// The estimand with this name in a point of a summary.
pub fn estimand<'a>(point: &'a serde_json::Value, name: &str) -> &'a serde_json::Value {
    point["estimands"]
        .as_array()
        .and_then(|all| all.iter().find(|e| e["name"] == name))
        .unwrap_or_else(|| panic!("no estimand {name} in {point}"))
}
