//! Every forgery that we could think of, each with all sums, keys, links and digests mended: exit status 4, and
//! the place.

use crate::common::text;
use crate::forger::{Forger, told, verified};
use crate::{honest, taken};
use odograph::course::Phase;
use odograph::engine::trail::StateHash;
use odograph::record::trail_file;
use std::fs;
use std::path::PathBuf;

/// Alters a copy of the honest record; `verify` must exit 4 with these words, in part (`letter`).
pub fn refused(alter: impl FnOnce(&mut Forger), letter: char, words: &[&str]) {
    let (_folder, mut forger) = taken();
    alter(&mut forger);
    let output = forger.verified(&[]);
    let told = told(&output);
    assert_eq!(output.status.code(), Some(4), "{told}");
    let part = format!("\n({letter}) ");
    let said = text(&output.stdout);
    let from = said.find(&part).expect("the part is told");
    let rest = &said[from + part.len()..];
    let part = &rest[..rest.find("\n(").unwrap_or(rest.len())];
    assert!(
        part.contains("\n    NO\n"),
        "({letter}) is not refused:\n{told}"
    );
    for words in words {
        assert!(
            part.contains(words),
            "{words} is missing in ({letter}):\n{told}"
        );
    }
}

#[test]
fn the_honest_record_is_intact_and_the_forger_can_write_it() {
    let output = verified(&honest().record, &[]);
    assert_eq!(output.status.code(), Some(0), "{}", told(&output));
    // Nothing altered, all written anew by the forger's tools: the same bytes, so that what the other tests find
    // is their alteration and nothing else.
    let (_folder, forger) = taken();
    forger.seal();
    let mut files = Vec::new();
    all_files(&honest().record, &mut files);
    for path in files {
        let name = path.strip_prefix(&honest().record).expect("inside");
        let own = fs::read(forger.folder.join(name)).expect("written");
        assert!(
            own == fs::read(&path).expect("read"),
            "{} differs",
            name.display()
        );
    }
    // What the forgeries below need of it.
    let blocks = &forger.chains[0];
    assert!(
        forger.burn_in() >= 2,
        "{} blocks of burn-in",
        forger.burn_in()
    );
    let draws: usize = blocks[forger.burn_in()..]
        .iter()
        .map(|made| made.draws.draws)
        .sum();
    assert!(draws > 800, "the goal is met at a later review: {draws}");
}

fn all_files(folder: &std::path::Path, into: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            all_files(&path, into);
        } else {
            into.push(path);
        }
    }
}

#[test]
fn one_flipped_byte_anywhere_names_the_file() {
    let (_folder, forger) = taken();
    let mut files = Vec::new();
    all_files(&forger.folder, &mut files);
    assert!(files.len() >= 16, "{files:?}");
    for path in files {
        let whole = fs::read(&path).expect("read");
        let mut bytes = whole.clone();
        let middle = bytes.len() / 2;
        bytes[middle] ^= 1;
        fs::write(&path, &bytes).expect("written");
        let output = forger.verified(&["--blocks", "1%"]);
        let name = path.strip_prefix(&forger.folder).expect("inside");
        let name = name.to_str().expect("UTF-8");
        assert_eq!(output.status.code(), Some(4), "{name}: {}", told(&output));
        assert!(
            text(&output.stdout).contains(name),
            "{name}: {}",
            told(&output)
        );
        fs::write(&path, whole).expect("written");
    }
    let output = forger.verified(&["--blocks", "1%"]);
    assert_eq!(output.status.code(), Some(0), "{}", told(&output));
}

/// Replaces the first of `from` in a file of the record, and mends the sums.
fn rewrite(forger: &Forger, name: &str, from: &str, to: &str) {
    let path = forger.folder.join(name);
    let before = fs::read_to_string(&path).expect("text");
    assert!(before.contains(from), "{from} is not in {name}:\n{before}");
    fs::write(&path, before.replacen(from, to, 1)).expect("written");
    forger.sums();
}

/// The value of the first estimand, as `summary.csv` has it.
fn first_value(forger: &Forger) -> String {
    let summary = fs::read_to_string(forger.folder.join("data/summary.json")).expect("a summary");
    let json: serde_json::Value = serde_json::from_str(&summary).expect("JSON");
    json["points"][0]["estimands"][0]["value"].to_string()
}

/// The same number with another digit in its third place.
fn other(value: &str) -> String {
    let mut digits: Vec<char> = value.chars().collect();
    digits[3] = if digits[3] == '7' { '3' } else { '7' };
    digits.into_iter().collect()
}

#[test]
fn a_figure_in_the_page() {
    let alter = |forger: &mut Forger| {
        let page = fs::read_to_string(forger.folder.join("data/report.html")).expect("a page");
        let value = &first_value(forger)[..4];
        let at = page.find(value).expect("the figure is on the page");
        let mut page = page.clone();
        page.replace_range(at..at + value.len(), &other(value));
        fs::write(forger.folder.join("data/report.html"), page).expect("written");
        forger.sums();
    };
    refused(
        alter,
        'e',
        &[
            "data/report.html: line ",
            "the record has",
            "the figures give",
        ],
    );
}

#[test]
fn a_figure_in_the_table() {
    let alter = |forger: &mut Forger| {
        let value = first_value(forger);
        rewrite(forger, "data/summary.csv", &value, &other(&value));
    };
    refused(
        alter,
        'e',
        &[
            "data/summary.csv: line 2",
            "the record has",
            "the figures give",
        ],
    );
}

#[test]
fn a_figure_everywhere_with_the_grounds() {
    // Summary, tables, page, grounds and result digest, all rendered from one better figure.
    let alter = |forger: &mut Forger| {
        forger.seal_with(|outcome| {
            let (summary, grounds) = &mut outcome.points[0];
            let estimate = &mut summary.figures[0].estimate;
            estimate.value = estimate.value.map(|value| value * 1.01);
            estimate.r_hat = Some(1.0);
            for claim in &mut grounds.claims {
                for condition in &mut claim.conditions {
                    condition.standing = odograph::course::Standing::Proved;
                }
            }
        });
    };
    let places = [
        "data/summary.json: points[0].estimands[0].value: the record has",
        "data/summary.json: result_digest: the record has",
        "data/grounds.json: ",
        "standing",
    ];
    refused(alter, 'd', &places);
}

#[test]
fn a_prior() {
    let prior = ("gamma(shape = 2, rate = 1)", "gamma(shape = 3, rate = 1)");
    // Plan, keys, starts and links as the new study gives them, the old draws.
    let alter = |forger: &mut Forger| {
        forger.study(prior.0, prior.1);
        forger.resolve();
        forger.seal();
    };
    refused(
        alter,
        'f',
        &[
            "point 1, chain 1, block 1",
            "the record has",
            "the plan gives",
        ],
    );
    // The old starts as well.
    let alter = |forger: &mut Forger| {
        forger.study(prior.0, prior.1);
        let starts = forger.starts.clone();
        forger.resolve();
        forger.starts = starts;
        forger.seal();
    };
    refused(
        alter,
        'c',
        &["chain 1, block 0 is not the start that plan and root give"],
    );
    // The study alone.
    let alter = |forger: &mut Forger| {
        forger.study(prior.0, prior.1);
        forger.sums();
    };
    refused(alter, 'b', &["data/plan.json: ", "the study gives"]);
}

#[test]
fn an_input() {
    let alter = |forger: &mut Forger| {
        let path = forger.folder.join("data/inputs/stations.csv");
        let table = fs::read_to_string(&path).expect("a table");
        fs::write(path, table.replace("Cawdle,5", "Cawdle,3")).expect("written");
        forger.resolve();
        forger.seal();
    };
    refused(alter, 'f', &["point 1, chain 1, block 1", "the plan gives"]);
    let alter = |forger: &mut Forger| {
        let path = forger.folder.join("data/inputs/stations.csv");
        let table = fs::read_to_string(&path).expect("a table");
        fs::write(path, table.replace("Cawdle,5", "Cawdle,3")).expect("written");
        forger.sums();
    };
    refused(alter, 'b', &["sha256: the record has"]);
}

#[test]
fn an_input_that_no_study_names() {
    let alter = |forger: &mut Forger| {
        let name = "data/inputs.json";
        fs::write(forger.folder.join("data/inputs/more.csv"), "a\n1\n").expect("written");
        rewrite(forger, name, "{", "{\n  \"more.csv\": \"more.csv\",");
    };
    refused(
        alter,
        'a',
        &["data/inputs/more.csv is no part of a record of this plan"],
    );
    refused(
        alter,
        'b',
        &["data/inputs.json names \"more.csv\", which the study does not"],
    );
}

#[test]
fn one_draw() {
    let alter = |forger: &mut Forger| {
        let block = forger.burn_in() + 2;
        forger.chains[1][block].draws.values[7] *= 1.0 + 1e-15;
        forger.seal();
    };
    let block = honest().forger.burn_in() + 3;
    let place = format!("chain 2, block {block} draw 8 of rate[\"Cawdle\"]: the record has");
    refused(alter, 'f', &[&place, "the plan gives"]);
}

/// The states of another chain are as sound as one's own: from one of them a chain goes on to better draws.
fn swap_state(forger: &mut Forger, before: usize) {
    forger.chains[0][before].state.moving = forger.chains[2][before].state.moving.clone();
}

#[test]
fn a_block_and_its_starting_state() {
    let before = honest().forger.burn_in() + 1;
    let number = before as u64 + 1;
    // The state after the block before it, and the draws that follow from that state; the block's own last state
    // stays, so that the rest of the chain follows.
    let alter = |forger: &mut Forger| {
        swap_state(forger, before);
        let after = forger.chains[0][before + 1].state.clone();
        forger.on_from(0, number, number + 1);
        forger.chains[0][before + 1].state = after;
        forger.seal();
    };
    let words = "leaves another moving state (position, generator) than the plan gives";
    refused(alter, 'f', &[&format!("chain 1, block {number} {words}")]);
    // The same, and the whole rest of the chain drawn on from it.
    let alter = |forger: &mut Forger| {
        swap_state(forger, before);
        let end = forger.chains[0].len() as u64;
        forger.on_from(0, number, end);
        forger.seal();
    };
    refused(alter, 'f', &[&format!("chain 1, block {number} {words}")]);
    // The same, with as few states kept as a record may.
    let alter = |forger: &mut Forger| {
        let end = forger.chains[0].len() as u64;
        forger.kept = Some(vec![forger.burn_in() as u64, end]);
        swap_state(forger, before);
        forger.on_from(0, number, end);
        forger.seal();
    };
    refused(alter, 'f', &[&format!("chain 1, block {number} {words}")]);
}

#[test]
fn a_block_dropped() {
    // One of one chain, and those behind it moved up.
    let alter = |forger: &mut Forger| {
        let block = forger.burn_in() + 1;
        forger.chains[1].remove(block);
        let rows = forger.rows();
        let other = forger.chains[1][block].clone();
        forger.chains[1].push(other);
        forger.seal();
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    refused(alter, 'c', &["chain 2, block", "is missing"]);
    // One of every chain: the run then ends where no plan ends it.
    let alter = |forger: &mut Forger| {
        let block = forger.burn_in() + 1;
        for chain in &mut forger.chains {
            chain.remove(block);
        }
        forger.seal();
    };
    refused(
        alter,
        'd',
        &["point 1: it ends after", "where the plan does not end it"],
    );
}

#[test]
fn two_chains_made_equal() {
    let alter = |forger: &mut Forger| {
        forger.chains[1] = forger.chains[0].clone();
        forger.seal();
    };
    refused(
        alter,
        'f',
        &["chain 2, block 1 draw 1 of", "the plan gives"],
    );
    let alter = |forger: &mut Forger| {
        forger.chains[1] = forger.chains[0].clone();
        forger.starts[1] = forger.starts[0];
        forger.seal();
    };
    refused(
        alter,
        'c',
        &["chain 2, block 0 is not the start that plan and root give"],
    );
}

#[test]
fn a_state_inside_the_burn_in() {
    // In the trail and among the checkpoints; the draws stay.
    let alter = |forger: &mut Forger| {
        swap_state(forger, 0);
        forger.seal();
    };
    refused(
        alter,
        'f',
        &["chain 1, block 1 leaves another moving state"],
    );
    // In the trail alone, where no state is kept.
    let alter = |forger: &mut Forger| {
        let end = forger.chains[0].len() as u64;
        forger.kept = Some(vec![forger.burn_in() as u64, end]);
        let said = StateHash::of(&forger.chains[2][0].state);
        forger.chains[0][0].said = Some(said);
        forger.seal();
    };
    refused(
        alter,
        'f',
        &["chain 1, block 1 leaves another frozen state"],
    );
}

#[test]
fn another_root() {
    let alter = |forger: &mut Forger| {
        forger.study("a quiet root", "another root");
        forger.resolve();
        forger.seal();
    };
    refused(alter, 'f', &["chain 1, block 1", "the plan gives"]);
    let alter = |forger: &mut Forger| {
        forger.study("a quiet root", "another root");
        let starts = forger.starts.clone();
        forger.resolve();
        forger.starts = starts;
        forger.seal();
    };
    refused(alter, 'c', &["is not the start that plan and root give"]);
}

#[test]
fn states_in_each_others_place() {
    let alter = |forger: &mut Forger| {
        forger.seal();
        let mut swapped = forger.clone();
        let block = forger.burn_in();
        swapped.chains[0][block].state = forger.chains[1][block].state.clone();
        swapped.chains[1][block].state = forger.chains[0][block].state.clone();
        swapped.write_states();
        forger.sums();
    };
    let block = honest().forger.burn_in() + 1;
    let words = "does not have the stored state of the trail";
    refused(alter, 'f', &[&format!("chain 1, block {block} {words}")]);
}

#[test]
fn states_left_out() {
    let alter = |forger: &mut Forger| {
        forger.kept = Some(vec![forger.chains[0].len() as u64]);
        forger.seal();
    };
    let block = honest().forger.burn_in();
    refused(
        alter,
        'f',
        &[&format!("the states after block {block} are missing")],
    );
}

#[test]
fn rows_of_the_trail_in_another_order() {
    let alter = |forger: &mut Forger| {
        let mut rows = forger.rows();
        rows.swap(3, 4);
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    refused(
        alter,
        'c',
        &["data/trail.parquet: point 1, chain 1, block 4 has no place in it"],
    );
}

#[test]
fn a_link_cut_and_the_start_in_another_phase() {
    let alter = |forger: &mut Forger| {
        let mut rows = forger.rows();
        rows[2].link[0] ^= 1;
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    refused(
        alter,
        'c',
        &["chain 1, block 2 does not follow from the one before it"],
    );
    let alter = |forger: &mut Forger| {
        let mut rows = forger.rows();
        rows[0].phase = Phase::Draws;
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    refused(alter, 'c', &["chain 1, block 0"]);
}

#[test]
fn files_that_came_in() {
    for name in [
        "data/note.txt",
        "data/draws/point-2.parquet",
        "data/inputs/other.csv",
    ] {
        let alter = |forger: &mut Forger| {
            fs::write(forger.folder.join(name), "a note").expect("written");
            forger.sums();
        };
        refused(
            alter,
            'a',
            &[&format!("{name} is no part of a record of this plan")],
        );
    }
}

#[test]
fn another_result_on_the_label() {
    let alter = |forger: &mut Forger| {
        let digest = "0".repeat(64);
        odograph::record::write_bag(&forger.folder, &forger.plan.title, &digest).expect("a bag");
    };
    refused(alter, 'e', &["bag-info.txt", "External-Identifier"]);
    let alter = |forger: &mut Forger| {
        let info = fs::read_to_string(forger.folder.join("bag-info.txt")).expect("a bag");
        let digest = info
            .lines()
            .find_map(|line| line.strip_prefix("External-Identifier: "));
        let title = "Failures at no station";
        odograph::record::write_bag(&forger.folder, title, digest.expect("a digest"))
            .expect("a bag");
    };
    refused(alter, 'e', &["bag-info.txt", "External-Description"]);
}
