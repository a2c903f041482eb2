//! Broken studies, each with the message that its reader gets: the whole of what `odograph check` writes to
//! stderr. `ODOGRAPH_WRITE_EXPECTED=1 cargo test --test faults` writes the messages anew, to be read before
//! they are kept. What can't stand in a folder of small files (a 2 GB study, a folder by the name of one)
//! is made here.

mod common;

use common::{odograph, root, text};
use std::fs;
use std::path::{Path, PathBuf};

fn folder() -> PathBuf {
    root().join("tests/faults")
}

fn studies() -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder())
        .expect("the folder of broken studies")
        .map(|entry| {
            let name = entry.expect("a readable entry").file_name();
            name.to_string_lossy().into_owned()
        })
        .filter(|name| name.ends_with(".toml"))
        .collect();
    names.sort();
    names
}

#[expect(
    clippy::disallowed_methods,
    reason = "a test asked to keep its messages"
)]
fn write_anew() -> bool {
    std::env::var_os("ODOGRAPH_WRITE_EXPECTED").is_some()
}

#[test]
fn each_broken_study_gets_its_message() {
    let names = studies();
    assert!(names.len() >= 60, "only {} broken studies", names.len());
    let mut wrong = Vec::new();
    for name in &names {
        let output = odograph(&folder(), &["check", name]);
        let message = text(&output.stderr);
        let status = output.status.code();
        if status != Some(1) {
            wrong.push(format!("{name}: exit status {status:?}, not 1\n{message}"));
            continue;
        }
        if !output.stdout.is_empty() {
            wrong.push(format!("{name}: a fault was written to stdout"));
        }
        let kept = folder().join(name.replace(".toml", ".expected"));
        if write_anew() {
            fs::write(&kept, &message).expect("written");
            continue;
        }
        match fs::read_to_string(&kept) {
            Ok(expected) if expected == message => {}
            Ok(expected) => wrong.push(format!(
                "{name}: the message changed\n--- kept\n{expected}--- now\n{message}"
            )),
            Err(e) => wrong.push(format!("{name}: no message kept ({e})\n{message}")),
        }
    }
    assert!(
        wrong.is_empty(),
        "{} of {} studies:\n\n{}",
        wrong.len(),
        names.len(),
        wrong.join("\n")
    );
}

/// What every message owes its reader, whatever its words.
#[test]
fn each_message_says_where() {
    if write_anew() {
        return;
    }
    let mut wrong = Vec::new();
    for name in studies() {
        let kept = folder().join(name.replace(".toml", ".expected"));
        let message = fs::read_to_string(&kept).unwrap_or_default();
        if message.contains("panicked") || message.contains("RUST_BACKTRACE") {
            wrong.push(format!("{name}: a panic"));
        }
        if message.contains(root().to_str().expect("UTF-8")) {
            wrong.push(format!("{name}: an absolute path"));
        }
        // A file, a line and a column, unless the fault is of a whole file.
        let whole = ["text-not-utf8", "text-empty"].contains(&name.trim_end_matches(".toml"));
        if !whole && !message.contains(".toml:") && !message.contains(".csv:") {
            wrong.push(format!("{name}: no place\n{message}"));
        }
        if message.lines().any(|line| line.chars().count() > 400) {
            wrong.push(format!("{name}: a line of more than 400 characters"));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn no_message_is_kept_for_nothing() {
    let studies = studies();
    for entry in fs::read_dir(folder()).expect("the folder") {
        let name = entry
            .expect("an entry")
            .file_name()
            .to_string_lossy()
            .into_owned();
        if let Some(stem) = name.strip_suffix(".expected") {
            assert!(
                studies.contains(&format!("{stem}.toml")),
                "{name} has no study"
            );
        }
    }
}

/// Checks a study in a folder of its own; gives status and stderr.
fn check(folder: &Path, name: &str) -> (Option<i32>, String) {
    let output = odograph(folder, &["check", name]);
    (output.status.code(), text(&output.stderr))
}

fn expect_fault(folder: &Path, name: &str, words: &[&str]) {
    let (status, message) = check(folder, name);
    assert_eq!(status, Some(1), "{message}");
    for word in words {
        assert!(message.contains(word), "no {word:?} in:\n{message}");
    }
    assert!(!message.contains("panicked"), "{message}");
}

const SOUND: &str = "title = \"Sound\"\n\n[seeds]\nroot = 1\n\n[data.t]\nfile = \"t.csv\"\n\n[model]\nfamily = \"density\"\n\n\
    [model.observed]\ny = { of = \"t.y\", law = \"normal(mean = a, sd = 1)\" }\n\n\
    [model.unknown]\na = { law = \"normal(mean = 0, sd = 1)\" }\n\n[[estimand]]\nname = \"a\"\n";
const DATA: &str = "y\n0.5\n1.5\n";

fn lay(study: &[u8], data: &[u8]) -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    fs::write(folder.path().join("study.toml"), study).expect("written");
    fs::write(folder.path().join("t.csv"), data).expect("written");
    folder
}

#[test]
fn a_sound_study_has_no_fault() {
    let folder = lay(SOUND.as_bytes(), DATA.as_bytes());
    let (status, message) = check(folder.path(), "study.toml");
    assert_eq!(status, Some(0), "{message}");
}

#[test]
fn other_line_ends_and_a_byte_order_mark_just_work() {
    let crlf = |text: &str| text.replace('\n', "\r\n").into_bytes();
    let marked = |text: &str| [b"\xef\xbb\xbf", text.as_bytes()].concat();
    for (study, data) in [
        (crlf(SOUND), crlf(DATA)),
        (marked(SOUND), marked(DATA)),
        (
            [b"\xef\xbb\xbf".to_vec(), crlf(SOUND)].concat(),
            crlf(DATA.trim_end()),
        ),
    ] {
        let folder = lay(&study, &data);
        let (status, message) = check(folder.path(), "study.toml");
        assert_eq!(status, Some(0), "{message}");
    }
}

#[test]
fn a_study_that_does_not_exist() {
    let folder = tempfile::tempdir().expect("a folder");
    expect_fault(folder.path(), "nowhere.toml", &["nowhere.toml"]);
}

#[test]
fn a_folder_in_place_of_a_study() {
    let folder = tempfile::tempdir().expect("a folder");
    fs::create_dir(folder.path().join("study.toml")).expect("made");
    expect_fault(folder.path(), "study.toml", &["study.toml", "folder"]);
}

#[test]
fn a_study_of_two_gigabytes() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = fs::File::create(folder.path().join("study.toml")).expect("made");
    // A hole: no room on the disk is taken, and none in memory may be.
    file.set_len(2_000_000_000).expect("a long file");
    expect_fault(folder.path(), "study.toml", &["study.toml"]);
}

/// Only a run can know it where the support hangs on other unknowns: it must not get as far as a draw.
#[test]
fn a_stated_start_outside_the_support() {
    let study = SOUND.replace("normal(mean = 0, sd = 1)", "gamma(shape = 2, rate = 1)")
        + "\n[ensemble]\nstart = { at = { a = -1 } }\n";
    let folder = lay(study.as_bytes(), DATA.as_bytes());
    let output = odograph(folder.path(), &["run", "study.toml", "--into", "results"]);
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(1), "{message}");
    for word in ["`a`", "-1", "support", "gamma"] {
        assert!(message.contains(word), "no {word:?} in:\n{message}");
    }
}

#[test]
fn a_study_with_a_nought_byte() {
    let folder = lay(b"title = \"a\0b\"\n", DATA.as_bytes());
    expect_fault(folder.path(), "study.toml", &["study.toml"]);
}

#[cfg(unix)]
#[test]
fn a_data_file_that_never_ends() {
    let folder = lay(SOUND.replace("t.csv", "/dev/zero").as_bytes(), b"");
    expect_fault(folder.path(), "study.toml", &["/dev/zero"]);
}

/// A data file that another program writes to while it is read must be seen to change, or be read as one of
/// the states it was in; never as a mixture.
#[test]
fn a_data_file_that_changes_meanwhile() {
    let rows = 200_000;
    let all = |value: &str| format!("y\n{}", format!("{value}\n").repeat(rows));
    let (low, high) = (all("0.25"), all("7.75"));
    let folder = lay(SOUND.as_bytes(), low.as_bytes());
    let path = folder.path().join("t.csv");
    let done = std::sync::atomic::AtomicBool::new(false);
    std::thread::scope(|scope| {
        scope.spawn(|| {
            let mut turn = false;
            while !done.load(std::sync::atomic::Ordering::Relaxed) {
                turn = !turn;
                let text = if turn { &high } else { &low };
                fs::write(&path, text).expect("written");
            }
        });
        for _ in 0..5 {
            let (status, message) = check(folder.path(), "study.toml");
            assert!(matches!(status, Some(0 | 1)), "{status:?} {message}");
            assert!(!message.contains("panicked"), "{message}");
        }
        done.store(true, std::sync::atomic::Ordering::Relaxed);
    });
}
