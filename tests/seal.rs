//! Interrupted runs closed as they stand, on the real binary: figures that verify, under a plan that says where
//! they were closed, beside a run that still goes on to the bits of an undisturbed one.

mod common;

use common::{binary, odograph, payload, status, text};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::thread::sleep;
use std::time::{Duration, Instant};

const STUDY: &str = r#"
title = "Two unknowns that lean on each other"
question = "What stands when a run is closed early?"
[seeds]
root = "seal"
[model]
family = "density"
[model.constant]
pull = 1
[model.unknown]
a = { law = "normal(mean = 0, sd = 1)" }
b = { law = "normal(mean = pull * a, sd = 0.3)" }
[sampler]
method = "metropolis"
[ensemble]
chains = 5
every = 40
burn_in = 400
draws = 12000
"#;

const GOAL: &str = "[goal]\nerror = 0.001\nat_most = 20000\n";

fn folder(content: &str) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("leaning.toml"), content).unwrap();
    folder
}

/// Without its line breaks.
fn flat(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// Begins a run with one thread, waits until its journal has some length, and ends it by SIGTERM.
fn interrupted(folder: &Path, journal: u64) -> PathBuf {
    let run = begun(folder);
    let open = wait_for(folder, journal);
    let sent = Command::new("kill")
        .args(["-TERM", &run.id().to_string()])
        .status();
    assert!(sent.expect("kill").success());
    let ended = run.wait_with_output().expect("it ends");
    assert_eq!(status(&ended), 5, "{}", text(&ended.stderr));
    open
}

fn begun(folder: &Path) -> Child {
    Command::new(binary())
        .current_dir(folder)
        .args(["run", "leaning.toml", "--threads", "1"])
        .stdin(Stdio::null())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("it starts")
}

/// The open folder of the run, once its journal has some length.
#[expect(clippy::disallowed_methods, reason = "a test does not wait for ever")]
fn wait_for(folder: &Path, enough: u64) -> PathBuf {
    let begun = Instant::now();
    loop {
        let open = records(folder).into_iter().find(|path| is_open(path));
        let length = |path: &PathBuf| fs::metadata(path.join("journal")).map_or(0, |j| j.len());
        if let Some(open) = open.filter(|open| length(open) > enough) {
            return open;
        }
        assert!(begun.elapsed() < Duration::from_secs(60), "no journal grew");
        sleep(Duration::from_millis(1));
    }
}

fn is_open(path: &Path) -> bool {
    path.extension().is_some_and(|end| end == "open")
}

/// All folders of the study.
fn records(folder: &Path) -> Vec<PathBuf> {
    let entries = fs::read_dir(folder.join("results/leaning"))
        .into_iter()
        .flatten();
    let paths = entries.map(|entry| entry.unwrap().path());
    let mut all: Vec<PathBuf> = paths.filter(|path| path.is_dir()).collect();
    all.sort();
    all
}

fn sealed(folder: &Path) -> Vec<PathBuf> {
    let all = records(folder).into_iter();
    all.filter(|path| !is_open(path)).collect()
}

fn json(record: &Path, name: &str) -> serde_json::Value {
    let text = fs::read_to_string(record.join(name)).expect("a file");
    serde_json::from_str(&text).expect("JSON")
}

fn verified(folder: &Path, record: &Path) {
    let output = odograph(folder, &["verify", record.to_str().expect("UTF-8")]);
    let said = text(&output.stdout);
    assert_eq!(status(&output), 0, "{said}{}", text(&output.stderr));
}

#[test]
fn a_closed_run_verifies_and_the_run_goes_on_to_the_same_bits() {
    let whole = folder(STUDY);
    let run = odograph(whole.path(), &["run", "leaning.toml"]);
    assert_eq!(status(&run), 0, "{}", text(&run.stderr));

    let here = folder(STUDY);
    let open = interrupted(here.path(), 300_000);
    let closed = odograph(here.path(), &["seal", "leaning.toml"]);
    let (said, told) = (text(&closed.stdout), text(&closed.stderr));
    assert_eq!(status(&closed), 0, "{told}");
    for part in [
        "Closed early: this run was interrupted",
        "of at most 12,000 draws a chain",
    ] {
        assert!(flat(&said).contains(part), "{part} is missing in:\n{said}");
    }
    for part in ["the run itself stays in", "`odograph run` goes on with it"] {
        assert!(told.contains(part), "{part} is missing in:\n{told}");
    }
    let [record] = &sealed(here.path())[..] else {
        panic!("one record")
    };
    let plan = json(record, "data/plan.json");
    let draws = plan["closed"][0]["draws"].as_u64().expect("a count");
    assert_eq!(plan["closed"][0]["burn_in"], 400);
    assert!(0 < draws && draws < 12_000, "{draws}");
    let point = &json(record, "data/summary.json")["points"][0];
    assert_eq!(point["draws_per_chain"].as_u64(), Some(draws));
    let starts = json(record, "circumstances.json")["starts"].clone();
    let starts = starts.as_array().expect("a list");
    assert_eq!(starts.len(), 2, "the run's start and that of the closing");
    let run = starts[1]["closes"]["run"].as_str().expect("a digest");
    let name = open.file_name().unwrap().to_str().unwrap();
    assert_eq!(format!("{}.open", &run[..12]), name);
    verified(here.path(), record);

    let again = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&again), 0, "{}", text(&again.stderr));
    assert!(text(&again.stderr).contains("closed here before"));
    assert_eq!(text(&again.stdout), said);

    let on = odograph(here.path(), &["run", "leaning.toml"]);
    assert_eq!(status(&on), 0, "{}", text(&on.stderr));
    assert!(text(&on.stderr).contains("going on with a run"));
    let ended = open.with_extension("");
    assert!(payload(&ended) == payload(&sealed(whole.path())[0]));
    let ended = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&ended), 1);
    assert!(text(&ended.stderr).contains("nothing to close"));
}

#[test]
fn what_was_not_begun_or_is_at_work_is_not_closed() {
    let here = folder(STUDY);
    let none = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&none), 1);
    let told = text(&none.stderr);
    assert!(told.contains("no run of this study was begun"), "{told}");
    assert!(!here.path().join("results").exists());
    let mut run = begun(here.path());
    let open = wait_for(here.path(), 100_000);
    let held = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&held), 5, "{}", text(&held.stderr));
    assert!(text(&held.stderr).contains("is being written by process"));
    run.kill().expect("killed");
    run.wait().expect("it ends");
    // Burn-in alone: no draws to tell figures of.
    let journal = fs::read(open.join("journal")).unwrap();
    fs::write(open.join("journal"), &journal[..20_000]).unwrap();
    let early = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&early), 1, "{}", text(&early.stderr));
    assert!(text(&early.stderr).contains("no point of this run has draws"));
}

/// A burn-in that chooses its length, and a goal that is out of reach: told as missed, and as closed early.
#[test]
fn a_goal_not_met_is_missed() {
    let burn_in = "burn_in = { from = 400, at_most = 1600 }";
    let here = folder(&(STUDY.replace("burn_in = 400", burn_in) + GOAL));
    interrupted(here.path(), 600_000);
    let closed = odograph(here.path(), &["seal", "leaning.toml"]);
    let said = text(&closed.stdout);
    assert_eq!(status(&closed), 3, "{}", text(&closed.stderr));
    for part in [
        "the goal is MISSED",
        "Closed early",
        "of at most 20,000 draws",
    ] {
        assert!(flat(&said).contains(part), "{part} is missing in:\n{said}");
    }
    let record = sealed(here.path()).remove(0);
    assert_eq!(
        json(&record, "data/summary.json")["points"][0]["goal"],
        "missed"
    );
    verified(here.path(), &record);
}

/// Points that had no draws yet are told by name, and have no figures.
#[test]
fn points_of_a_sweep_without_draws_are_left_out() {
    let axis = "[sweep.axis]\n\"model.constant.pull\" = [1, 2, 3, 4, 5, 6]\n";
    let here = folder(&(STUDY.to_owned() + axis));
    interrupted(here.path(), 400_000);
    let closed = odograph(here.path(), &["seal", "leaning.toml"]);
    let said = text(&closed.stdout);
    assert_eq!(status(&closed), 3, "{}", text(&closed.stderr));
    assert!(said.contains("model.constant.pull = 6"), "{said}");
    assert!(
        flat(&said).contains("closed before this point had draws"),
        "{said}"
    );
    let record = sealed(here.path()).remove(0);
    let plan = json(&record, "data/plan.json");
    assert!(plan["closed"][0].is_object() && plan["closed"][5].is_null());
    verified(here.path(), &record);
}

/// A run that began with the blocks of a shorter one's record, interrupted and closed: all three records verify.
#[test]
fn a_run_that_took_blocks_over_is_closed_as_well() {
    let whole = folder(STUDY);
    let run = odograph(whole.path(), &["run", "leaning.toml"]);
    assert_eq!(status(&run), 0, "{}", text(&run.stderr));

    let here = folder(&STUDY.replace("draws = 12000", "draws = 2000"));
    let short = odograph(here.path(), &["run", "leaning.toml"]);
    assert_eq!(status(&short), 0, "{}", text(&short.stderr));
    fs::write(here.path().join("leaning.toml"), STUDY).unwrap();
    let open = interrupted(here.path(), 300_000);
    let closed = odograph(here.path(), &["seal", "leaning.toml"]);
    assert_eq!(status(&closed), 0, "{}", text(&closed.stderr));
    let on = odograph(here.path(), &["run", "leaning.toml"]);
    assert_eq!(status(&on), 0, "{}", text(&on.stderr));
    let all = sealed(here.path());
    assert_eq!(all.len(), 3);
    for record in &all {
        verified(here.path(), record);
    }
    let ended = open.with_extension("");
    let starts = json(&ended, "circumstances.json")["starts"].clone();
    assert!(starts[0]["taken_over"][0]["draws"].as_u64() > Some(0));
    let wanted = &sealed(whole.path())[0];
    for name in ["data/summary.json", "data/trail.parquet"] {
        let [ours, theirs] = [&ended, wanted].map(|record| fs::read(record.join(name)).unwrap());
        assert!(ours == theirs, "{name} is another");
    }
}
