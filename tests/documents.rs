//! The documents run: every study that the README shows is the shipped one, every command that it shows
//! prints what it says, every link leads somewhere; and every shipped study runs to its goal.
//!
//! `<!-- study: FILE -->` stands before a block that must be the file without its comments,
//! `<!-- output: odograph … -->` before a block that must be the command and what it prints.
//! `ODOGRAPH_WRITE_DOCUMENTS=1 cargo test --test documents` writes both anew.

mod common;

use common::{copy_files, odograph, root, run, text};
use std::fs;
use std::path::{Path, PathBuf};

fn readme() -> String {
    fs::read_to_string(root().join("README.md")).expect("README.md")
}

fn manifests() -> Vec<PathBuf> {
    let mut found: Vec<PathBuf> = fs::read_dir(root().join("manifests"))
        .expect("manifests")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    found.sort();
    found
}

/// A folder with the shipped and the broken studies under the names by which the README calls them.
fn lay() -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    let copy = |name: &str, ending: &str| {
        copy_files(&root().join(name), &folder.path().join(name), ending);
    };
    copy("manifests", ".toml");
    copy("manifests/data", ".csv");
    copy("tests/faults", ".toml");
    copy("tests/faults/data", ".csv");
    folder
}

/// A marked block: what its mark says, and where the text between the fences stands.
struct Marked {
    kind: String,
    subject: String,
    inside: std::ops::Range<usize>,
}

fn marked(document: &str) -> Vec<Marked> {
    let mut found = Vec::new();
    let mut at = 0;
    while let Some(start) = document[at..].find("<!-- ").map(|i| at + i + 5) {
        let end = start + document[start..].find(" -->").expect("a closed mark");
        let (kind, subject) = document[start..end]
            .split_once(": ")
            .expect("kind: subject");
        let fence = end + document[end..].find("```").expect("a block after the mark");
        let first = fence + document[fence..].find('\n').expect("a line") + 1;
        let last = if document[first..].starts_with("```") {
            first
        } else {
            first + document[first..].find("\n```").expect("a closed block") + 1
        };
        found.push(Marked {
            kind: kind.to_owned(),
            subject: subject.to_owned(),
            inside: first..last,
        });
        at = last;
    }
    found
}

/// A study without its comments and without the room they leave.
fn bare(study: &str) -> String {
    let mut out = String::new();
    for line in study.lines() {
        let code = match line.find(" #") {
            Some(at) => line[..at].trim_end(),
            None => line,
        };
        let comment = line.trim_start().starts_with('#');
        if !comment && !(code.is_empty() && (out.is_empty() || out.ends_with("\n\n"))) {
            out.push_str(code);
            out.push('\n');
        }
    }
    out
}

fn printed(folder: &Path, command: &str) -> String {
    let arguments: Vec<&str> = command.split(' ').skip(1).collect();
    let output = odograph(folder, &arguments);
    assert!(
        matches!(output.status.code(), Some(0 | 1)),
        "{command}: {:?}\n{}",
        output.status,
        text(&output.stderr)
    );
    let shown = if output.stdout.is_empty() {
        text(&output.stderr)
    } else {
        text(&output.stdout)
    };
    let trimmed: Vec<&str> = shown.lines().map(str::trim_end).collect();
    format!("$ {command}\n{}\n", trimmed.join("\n").trim_end())
}

#[expect(
    clippy::disallowed_methods,
    reason = "a test asked to write the README's blocks"
)]
fn write_anew() -> bool {
    std::env::var_os("ODOGRAPH_WRITE_DOCUMENTS").is_some()
}

#[test]
fn the_readme_shows_what_is() {
    let folder = lay();
    let document = readme();
    let mut new = String::new();
    let mut at = 0;
    let blocks = marked(&document);
    assert!(blocks.len() >= 3, "the README shows too little");
    for block in &blocks {
        let should = match block.kind.as_str() {
            "study" => bare(&fs::read_to_string(root().join(&block.subject)).expect("a study")),
            "output" => printed(folder.path(), &block.subject),
            kind => panic!("a mark that is neither study nor output: {kind}"),
        };
        new.push_str(&document[at..block.inside.start]);
        new.push_str(&should);
        at = block.inside.end;
    }
    new.push_str(&document[at..]);
    if write_anew() {
        fs::write(root().join("README.md"), &new).expect("written");
        return;
    }
    for (old, new) in marked(&document).iter().zip(marked(&new).iter()) {
        assert_eq!(old.subject, new.subject);
    }
    assert!(
        document == new,
        "the README shows other text than the program prints; it should be:\n{new}"
    );
}

/// The two commands at the top: the first runs a shipped study, the second is what `.ci/run` calls.
#[test]
fn the_two_commands_stand_at_the_top() {
    let document = readme();
    let first =
        "$ cargo run --release -- run manifests/pumps.toml --into my-results\n$ cargo test\n";
    let at = document.find(first).expect("the two commands");
    assert!(
        document[..at].lines().count() < 15,
        "they stand too far down"
    );
    let checks = fs::read_to_string(root().join(".ci/run")).expect(".ci/run");
    assert!(checks.lines().any(|line| line == "cargo test"));
}

#[test]
fn every_toml_block_is_a_sound_study() {
    for name in ["README.md", "DEVELOPERS.md"] {
        let document = fs::read_to_string(root().join(name)).expect("a document");
        let folder = lay();
        for (i, block) in document.split("```toml\n").skip(1).enumerate() {
            let study = block.split("```").next().expect("a block");
            let path = folder
                .path()
                .join("manifests")
                .join(format!("shown-{i}.toml"));
            fs::write(&path, study).expect("written");
            let output = odograph(folder.path(), &["check", path.to_str().expect("UTF-8")]);
            assert!(
                output.status.success(),
                "{name}, block {i}:\n{}",
                text(&output.stderr)
            );
        }
    }
}

#[test]
fn every_link_leads_somewhere() {
    for name in ["README.md", "DEVELOPERS.md"] {
        let document = fs::read_to_string(root().join(name)).expect("a document");
        for part in document.split("](").skip(1) {
            let target = part.split(')').next().expect("a closed link");
            if !target.contains("://") {
                assert!(root().join(target).exists(), "{name}: {target}");
            }
        }
    }
}

#[test]
fn every_shipped_study_says_what_is_hard_and_that_it_is_invented() {
    let document = readme();
    for path in manifests() {
        let study = fs::read_to_string(&path).expect("a study");
        let head: String = study
            .lines()
            .take_while(|line| line.starts_with('#'))
            .collect();
        let name = path
            .file_name()
            .expect("a name")
            .to_string_lossy()
            .into_owned();
        for word in ["Asked:", "hard:", "invented"] {
            assert!(head.contains(word), "{name} does not say {word:?}");
        }
        assert!(
            document.contains(&format!("manifests/{name}")),
            "{name} is not in the README"
        );
    }
}

/// Each shipped study runs to its goal.
#[test]
fn every_shipped_study_runs() {
    let folder = lay();
    for path in manifests() {
        let name = path
            .file_name()
            .expect("a name")
            .to_string_lossy()
            .into_owned();
        let study = folder.path().join("manifests").join(&name);
        let run = run(&study, &folder.path().join("results"), &[]);
        assert_eq!(run.status, 0, "{name}:\n{}", run.stderr);
        let summary = run.summary();
        assert_eq!(summary["schema"], 1, "{name}");
        for point in summary["points"].as_array().expect("points") {
            assert_eq!(point["goal"], "met", "{name}: {point}");
        }
    }
}
