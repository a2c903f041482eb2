//! The shipped records: every study in `manifests/` has its sealed record in `results/`, the record is of the study as
//! it stands, and this program still makes every byte of it again. So every later change of a digit is seen.
//!
//! After a change that is meant: remove `results/`, run `odograph run` on every study from the top of the tree, and
//! keep what it leaves.

mod common;

use common::{odograph, root, text};
use std::fs;
use std::path::{Path, PathBuf};

fn entries(folder: &Path) -> Vec<PathBuf> {
    let read = fs::read_dir(folder).unwrap_or_else(|fault| panic!("{}: {fault}", folder.display()));
    let mut found: Vec<PathBuf> = read.map(|entry| entry.expect("an entry").path()).collect();
    found.sort();
    found
}

/// The name of every shipped study.
fn studies() -> Vec<String> {
    let all = entries(&root().join("manifests"));
    let studies = all
        .iter()
        .filter(|path| path.extension().is_some_and(|e| e == "toml"));
    let name = |path: &PathBuf| {
        path.file_stem()
            .expect("a name")
            .to_string_lossy()
            .into_owned()
    };
    let mut names: Vec<String> = studies.map(name).collect();
    names.sort();
    names
}

/// The one record of a study.
fn record(study: &str) -> PathBuf {
    let mut found = entries(&root().join("results").join(study));
    found.retain(|path| path.is_dir());
    assert_eq!(found.len(), 1, "records of {study}: {found:?}");
    found.remove(0)
}

#[test]
fn every_study_has_the_record_of_what_it_says_now() {
    let studies = studies();
    assert!(studies.len() >= 6);
    let mut shipped: Vec<String> = entries(&root().join("results"))
        .iter()
        .filter(|path| path.is_dir())
        .map(|path| {
            path.file_name()
                .expect("a name")
                .to_string_lossy()
                .into_owned()
        })
        .collect();
    shipped.sort();
    assert_eq!(shipped, studies);
    for study in &studies {
        let record = record(study);
        let own = root().join("manifests").join(format!("{study}.toml"));
        let same = fs::read(own).expect("a study")
            == fs::read(record.join("data/study.toml")).expect("its copy");
        assert!(same, "{study}: the record is of another study");
        for input in entries(&record.join("data/inputs")) {
            let name = input.file_name().expect("a name");
            let own = root().join("manifests/data").join(name);
            let same = fs::read(own).expect("an input") == fs::read(&input).expect("its copy");
            assert!(same, "{study}: {name:?} is another file");
        }
    }
}

#[test]
fn every_record_is_what_its_study_gives() {
    for study in studies() {
        let record = record(&study);
        let output = odograph(root(), &["verify", &record.to_string_lossy()]);
        let said = text(&output.stdout);
        assert_eq!(output.status.code(), Some(0), "{study}:\n{said}");
        assert!(said.contains("Intact: these figures follow from this study, draw for draw."));
    }
}
