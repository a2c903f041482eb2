//! The command line on the real binary: exit statuses, what goes to which stream, and doing it again.

mod common;

use common::{odograph, status, text};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

const STUDY: &str = r#"
title = "One unknown"
question = "What does a run say, and where?"
[seeds]
root = "command"
[model]
family = "density"
[model.unknown]
a = { law = "normal(mean = 0, sd = 1)" }
[sampler]
method = "metropolis"
[ensemble]
chains = 4
burn_in = 200
draws = 1000
"#;

fn with(content: &str, arguments: &[&str]) -> (tempfile::TempDir, Output) {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("one.toml"), content).unwrap();
    let output = odograph(folder.path(), arguments);
    (folder, output)
}

/// The folders in a folder, if it is there.
fn folders(folder: &Path) -> Vec<PathBuf> {
    let entries = fs::read_dir(folder).into_iter().flatten();
    let paths = entries.map(|entry| entry.expect("an entry").path());
    paths.filter(|path| path.is_dir()).collect()
}

fn open_folders(folder: &Path) -> usize {
    folders(&folder.join("results/one")).len()
}

#[test]
fn done_is_0_and_done_again_is_reported_from_the_files() {
    let (folder, first) = with(STUDY, &["run", "one.toml"]);
    assert_eq!(status(&first), 0, "{}", text(&first.stderr));
    let said = text(&first.stdout);
    for part in [
        "One unknown",
        "What does a run say",
        "Grounds",
        "Files: results",
    ] {
        assert!(said.contains(part), "{part} is missing in:\n{said}");
    }
    let again = odograph(folder.path(), &["run", "one.toml", "--threads", "3"]);
    assert_eq!(status(&again), 0);
    assert_eq!(text(&again.stdout), said);
    assert!(text(&again.stderr).contains("was run before"));
    // A comment is not another study; another root is.
    let commented = format!("# a remark\n{STUDY}");
    fs::write(folder.path().join("one.toml"), commented).unwrap();
    let commented = odograph(folder.path(), &["run", "one.toml"]);
    assert_eq!(text(&commented.stdout), said);
    let other = STUDY.replace("\"command\"", "\"another\"");
    fs::write(folder.path().join("one.toml"), other).unwrap();
    let other = odograph(folder.path(), &["run", "one.toml"]);
    assert_eq!(status(&other), 0);
    assert_ne!(text(&other.stdout), said);
    assert_eq!(open_folders(folder.path()), 2);
}

#[test]
fn json_goes_to_stdout_and_messages_to_stderr() {
    let (folder, output) = with(STUDY, &["run", "one.toml", "--json"]);
    let json: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON alone");
    assert_eq!(json["schema"], 1);
    assert_eq!(json["points"][0]["draws_per_chain"], 1000);
    assert_eq!(json["points"][0]["burn_in"], 200);
    let again = odograph(folder.path(), &["run", "one.toml", "--json"]);
    assert_eq!(again.stdout, output.stdout);
}

#[test]
fn faults_of_a_study_are_1_and_all_are_told() {
    let broken = STUDY
        .replace("draws = ", "drawz = ")
        .replace("chains = 4", "chains = 0");
    for command in ["run", "check"] {
        let (folder, output) = with(&broken, &[command, "one.toml"]);
        assert_eq!(status(&output), 1);
        assert_eq!(text(&output.stdout), "");
        let said = text(&output.stderr);
        for part in ["one.toml", "drawz", "chains", "nothing was run"] {
            assert!(said.contains(part), "{part} is missing in:\n{said}");
        }
        assert_eq!(open_folders(folder.path()), 0);
    }
    let (_folder, output) = with(STUDY, &["run", "two.toml"]);
    assert_eq!(status(&output), 1, "{}", text(&output.stderr));
    let accepted = format!("{STUDY}[grounds]\naccept = [\"irreducable\"]\nbecause = \"x\"\n");
    let (_folder, output) = with(&accepted, &["run", "one.toml"]);
    assert_eq!(status(&output), 1, "{}", text(&output.stderr));
    assert!(text(&output.stderr).contains("did you mean `irreducible`"));
}

#[test]
fn a_command_line_that_cannot_be_understood_is_2() {
    for arguments in [
        &["walk", "one.toml"][..],
        &["run"],
        &["run", "one.toml", "--threads", "0"],
        &["run", "one.toml", "--treads", "2"],
        &["catalogue", "recipes"],
        &[],
    ] {
        let (_folder, output) = with(STUDY, arguments);
        assert_eq!(status(&output), 2, "{arguments:?}");
    }
    let (_folder, output) = with(STUDY, &["--help"]);
    assert_eq!(status(&output), 0);
}

#[test]
fn a_missed_goal_is_3_also_when_reported_again() {
    let goal = "[goal]\nerror = 0.0001\nat_most = 1500\n";
    let (folder, output) = with(&format!("{STUDY}{goal}"), &["run", "one.toml"]);
    assert_eq!(status(&output), 3, "{}", text(&output.stderr));
    assert!(text(&output.stdout).contains("MISSED"));
    let again = odograph(folder.path(), &["run", "one.toml"]);
    assert_eq!(status(&again), 3);
}

#[test]
fn check_says_what_would_be_run_and_draws_nothing() {
    let (folder, output) = with(STUDY, &["check", "one.toml"]);
    assert_eq!(status(&output), 0);
    let said = text(&output.stdout);
    for part in [
        "4 chains of 1000 draws",
        "burn-in of 200",
        "on disk",
        "Grounds before any draw",
    ] {
        assert!(said.contains(part), "{part} is missing in:\n{said}");
    }
    assert!(!folder.path().join("results").exists());
}

#[test]
fn check_lists_steps_and_goals_of_estimands() {
    let own = "[[estimand]]\nname = \"a\"\ngoal = { absolute = 0.02 }\n";
    let steps = "[[sampler.step]]\nname = \"wide\"\nmethod = \"slice\"\nwidth = 2.5\non = [\"a\"]\nweight = 3\n\
                 [[sampler.step]]\nname = \"near\"\nmethod = \"metropolis\"\nscale = 0.5\non = [\"a\"]\nweight = 1\n";
    let study = STUDY
        .replace("question = \"What does a run say, and where?\"\n", "")
        .replace(
            "[sampler]\nmethod = \"metropolis\"\n",
            &format!("{own}{steps}"),
        )
        .replace("chains = 4", "chains = 1");
    let (_folder, output) = with(&study, &["check", "one.toml"]);
    let said = text(&output.stdout);
    assert_eq!(status(&output), 0, "{}", text(&output.stderr));
    for part in [
        "One unknown\n\n1 chain of 1000 draws",
        "  a: error at most 0.02\n",
        "  wide: slice (width 2.5, limit ",
        ") on a, weight 3\n",
        "  near: metropolis (scale 0.5, adapt ",
        ") on a, weight 1\n",
    ] {
        assert!(said.contains(part), "{part} is missing in:\n{said}");
    }
}

#[test]
fn a_place_where_no_folder_can_be_made_is_1() {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("one.toml"), STUDY).unwrap();
    fs::write(folder.path().join("taken"), "a file").unwrap();
    for into in ["taken", "taken/deeper"] {
        let output = odograph(folder.path(), &["run", "one.toml", "--into", into]);
        assert_eq!(status(&output), 1);
        let said = text(&output.stderr);
        for part in [
            &format!("{into}/one"),
            "cannot be made",
            "a file stands there",
            "choose another folder with --into",
        ] {
            assert!(said.contains(part), "{part} is missing in:\n{said}");
        }
        assert!(!said.contains("goes on from there"), "{said}");
    }
}

/// Every file under a folder.
fn files(folder: &Path) -> Vec<PathBuf> {
    let mut all = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            all.extend(files(&path));
        } else {
            all.push(path);
        }
    }
    all
}

#[test]
fn a_finished_run_whose_files_changed_is_4_and_tells_no_figures() {
    let folder = tempfile::tempdir().unwrap();
    let here = folder.path();
    fs::write(here.join("t.csv"), "x\n0.3\n-1.2\n0.4\n").unwrap();
    let data = "[data.t]\nfile = \"t.csv\"\n";
    let observed = "[model.observed]\nx = { of = \"t.x\", law = \"normal(mean = a, sd = 1)\" }\n";
    let study = STUDY
        .replace("[model]", &format!("{data}[model]"))
        .replace("[sampler]", &format!("{observed}[sampler]"));
    fs::write(here.join("one.toml"), study).unwrap();
    let run = || odograph(here, &["run", "one.toml"]);
    let first = run();
    assert_eq!(status(&first), 0, "{}", text(&first.stderr));
    let done = folders(&here.join("results/one")).remove(0);
    let refused = |name: &str| {
        for arguments in [&["run", "one.toml"][..], &["run", "one.toml", "--json"]] {
            let output = odograph(here, arguments);
            assert_eq!(status(&output), 4, "{name}: {}", text(&output.stderr));
            assert_eq!(text(&output.stdout), "", "{name}");
            let said = text(&output.stderr);
            assert!(said.contains(name), "{name} is missing in:\n{said}");
        }
    };
    let listed = files(&done.join("data"));
    assert_eq!(listed.len(), 14, "{listed:?}");
    for path in &listed {
        let kept = fs::read(path).unwrap();
        let mut flipped = kept.clone();
        let middle = flipped.len() / 2;
        flipped[middle] ^= 1;
        fs::write(path, flipped).unwrap();
        let name = path.strip_prefix(&done).unwrap().to_str().unwrap();
        refused(&format!(
            "{name} is not as it was when the record was sealed"
        ));
        fs::write(path, kept).unwrap();
    }
    fs::write(done.join("data/inputs/more.csv"), "x\n").unwrap();
    refused("data/inputs/more.csv is in no list of the record");
    fs::remove_file(done.join("data/inputs/more.csv")).unwrap();
    fs::rename(done.join("data/plan.json"), here.join("aside")).unwrap();
    refused("data/plan.json is listed, and is not there");
    fs::rename(here.join("aside"), done.join("data/plan.json")).unwrap();
    let again = run();
    assert_eq!(status(&again), 0, "{}", text(&again.stderr));
    assert_eq!(again.stdout, first.stdout);
    // The list is one that others can check, where they have the means.
    let sum = Command::new("sha256sum")
        .args(["--check", "--strict", "manifest-sha256.txt"])
        .current_dir(&done)
        .output();
    match sum {
        Ok(sum) => assert!(sum.status.success(), "{}", text(&sum.stderr)),
        Err(fault) => assert_eq!(fault.kind(), std::io::ErrorKind::NotFound),
    }
}

#[test]
fn a_journal_of_other_hands_is_refused() {
    let (folder, _) = with(STUDY, &["check", "one.toml"]);
    let plan = text(&odograph(folder.path(), &["check", "one.toml"]).stdout);
    let digest = plan
        .lines()
        .find_map(|line| line.strip_prefix("Plan "))
        .unwrap();
    let open = folder
        .path()
        .join(format!("results/one/{}.open", &digest[..12]));
    fs::create_dir_all(&open).unwrap();
    fs::write(open.join("journal"), vec![b'x'; 1000]).unwrap();
    let output = odograph(folder.path(), &["run", "one.toml"]);
    assert_eq!(status(&output), 1);
    assert!(text(&output.stderr).contains("not the journal of this plan"));
}

#[test]
fn the_catalogue_lists_what_the_tables_hold() {
    let (_folder, output) = with(STUDY, &["catalogue"]);
    let said = text(&output.stdout);
    for law in odograph::laws::table() {
        assert!(
            said.contains(&format!("  {}(", law.name())),
            "{}",
            law.name()
        );
    }
    for function in odograph::formula::functions() {
        assert!(said.contains(function.usage), "{}", function.usage);
    }
    for method in odograph::methods::table() {
        assert!(
            said.contains(&format!("  {}\n", method.name)),
            "{}",
            method.name
        );
    }
    let (_folder, output) = with(STUDY, &["catalogue", "methods"]);
    assert!(!text(&output.stdout).contains("Laws"));
}

/// Points that share their streams are told by their differences, with the error of the pairs: here well under
/// that of two points taken apart. Points with unlike draws are not paired, and it is said why.
#[test]
fn shared_streams_tell_differences() {
    let sweep = |values: &str| {
        let axis = format!("[sweep]\nstreams = \"shared\"\n[sweep.axis]\n{values}\n");
        STUDY
            .replace(
                "law = \"normal(mean = 0, sd = 1)\"",
                "law = \"normal(mean = 3 * c, sd = c)\"",
            )
            .replace("[sampler]", "[model.constant]\nc = 1\n[sampler]")
            + &axis
    };
    let points = |values: &str| {
        let (_folder, output) = with(&sweep(values), &["run", "one.toml", "--json"]);
        assert_eq!(status(&output), 0, "{}", text(&output.stderr));
        let json: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
        json["points"].as_array().unwrap().clone()
    };
    let alike = points("\"model.constant.c\" = [1, 1.1]");
    let [one, two] = [0, 1].map(|i| &alike[i]["estimands"][0]);
    let difference = &alike[1]["differences"]["estimands"][0];
    assert_eq!(alike[1]["differences"]["from"], alike[0]["key"]);
    let number = |json: &serde_json::Value, name: &str| json[name].as_f64().unwrap();
    let plain = number(two, "value") - number(one, "value");
    assert!((number(difference, "value") - plain).abs() < 1e-12);
    let [a, b] = [one, two].map(|point| number(point, "mcse"));
    let apart = (a * a + b * b).sqrt();
    let paired = number(difference, "mcse");
    assert!(paired < 0.7 * apart, "{paired} {apart}");
    assert!((number(difference, "value") - 0.3).abs() < 5.0 * paired);
    let unlike = points("\"ensemble.draws\" = [1000, 1200]");
    let reason = unlike[1]["differences"]["reason"].as_str().unwrap();
    assert!(
        reason.contains("1,200 draws a chain, the first point 1,000"),
        "{reason}"
    );
}

#[test]
fn a_density_that_rises_without_bound_ends_in_3_with_words() {
    for method in ["slice", "metropolis"] {
        let study = STUDY
            .replace("normal(mean = 0, sd = 1)", "flat()")
            .replace("[sampler]", "[model.term]\nt = \"a^4\"\n[sampler]")
            .replace("metropolis", method)
            .replace("draws = 1000", "draws = 1000\nstart = { at = { a = 1 } }");
        let (_folder, output) = with(&study, &["run", "one.toml"]);
        assert_eq!(status(&output), 3, "{}", text(&output.stderr));
        let said = text(&output.stdout);
        let said = said.split_whitespace().collect::<Vec<_>>().join(" ");
        assert!(said.contains("rises without bound"), "{said}");
        assert!(said.contains("integrable failed"), "{said}");
    }
}

#[test]
fn chains_that_disagree_end_in_3() {
    // Two modes that a short step does not join, two chains at each.
    let study = STUDY
        .replace("normal(mean = 0, sd = 1)", "flat()")
        .replace(
            "[sampler]",
            "[model.term]\nt = \"-(a^2 - 100)^2 / 2\"\n[sampler]",
        )
        .replace(
            "draws = 1000",
            "draws = 1000\nstart = { file = \"starts.csv\" }",
        );
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("one.toml"), study).unwrap();
    fs::write(folder.path().join("starts.csv"), "a\n-10\n-10\n10\n10\n").unwrap();
    let output = odograph(folder.path(), &["run", "one.toml"]);
    assert_eq!(status(&output), 3, "{}", text(&output.stderr));
    let said = text(&output.stdout);
    let said = said.split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(said.contains("start forgotten failed"), "{said}");
}

#[test]
fn records_are_listed_at_a_glance() {
    let (folder, first) = with(STUDY, &["run", "one.toml"]);
    assert_eq!(status(&first), 0, "{}", text(&first.stderr));
    fs::create_dir_all(folder.path().join("results/notes")).unwrap();
    fs::write(folder.path().join("results/notes/a.txt"), "mine").unwrap();
    let list = |more: &[&str]| {
        let output = odograph(folder.path(), &[&["list"], more].concat());
        assert_eq!(status(&output), 0, "{}", text(&output.stderr));
        text(&output.stdout)
    };
    for _ in 0..2 {
        let told = list(&[]);
        assert!(
            told.contains("  sealed") && told.contains("1 of 1 records"),
            "{told}"
        );
    }
    assert!(list(&["--only", "open"]).contains("0 of 1 records"));
    assert!(list(&["--with", "no such words"]).contains("0 of 1 records"));
    let json: serde_json::Value = serde_json::from_str(&list(&["--json"])).unwrap();
    assert_eq!(json["records"][0]["state"], "sealed");
    let nowhere = odograph(folder.path(), &["list", "nowhere"]);
    assert_eq!(status(&nowhere), 1);
}
