//! Runs that are killed, stopped, crowded or starved of disk, on the real binary: each goes on to the bits of
//! an undisturbed run.
//!
//! `ODOGRAPH_KILLS=25 cargo test --release --test resume killed` kills more often than the few times here.

mod common;

use common::{binary, payload, text};
use std::collections::BTreeMap;
use std::fs;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::thread::sleep;
use std::time::{Duration, Instant};

/// A second or two of work in an unoptimised build.
const STUDY: &str = r#"
title = "Two unknowns that lean on each other"
question = "Does a disturbed run end as an undisturbed one?"

[seeds]
root = "resume"

[model]
family = "density"
[model.unknown]
a = { law = "normal(mean = 0, sd = 1)" }
b = { law = "normal(mean = a, sd = 0.3)" }

[[estimand]]
name = "a"
[[estimand]]
name = "b"
[[estimand]]
name = "apart"
of = "b > a"

[sampler]
method = "metropolis"

[ensemble]
chains = 5
every = 100
burn_in = { from = 500, at_most = 4000 }
draws = 12000
"#;

fn study(folder: &Path, content: &str) -> PathBuf {
    let path = folder.join("leaning.toml");
    fs::write(&path, content).expect("a study");
    path
}

fn command(folder: &Path, into: &Path, threads: usize) -> Command {
    let mut command = Command::new(binary());
    command
        .current_dir(folder)
        .args(["run", "leaning.toml", "--into"])
        .arg(into)
        .args(["--threads", &threads.to_string()])
        .stdin(Stdio::null())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped());
    command
}

struct Ended {
    status: Option<i32>,
    stderr: String,
}

/// Runs to the end.
fn run(folder: &Path, into: &Path, threads: usize) -> Ended {
    let output = command(folder, into, threads).output().expect("it starts");
    Ended {
        status: output.status.code(),
        stderr: text(&output.stderr),
    }
}

fn wait(child: Child) -> Ended {
    let output = child.wait_with_output().expect("it ends");
    Ended {
        status: output.status.code(),
        stderr: text(&output.stderr),
    }
}

fn signal(child: &Child, name: &str) {
    let sent = Command::new("kill")
        .args([name, &child.id().to_string()])
        .status()
        .expect("kill");
    assert!(sent.success());
}

/// The folder of the one plan under `into`, finished or not.
fn folder_of(into: &Path) -> PathBuf {
    let mut found: Vec<PathBuf> = fs::read_dir(into.join("leaning"))
        .expect("results")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.is_dir())
        .collect();
    assert_eq!(found.len(), 1, "{found:?}");
    found.remove(0)
}

/// The payload of the one record under `into`.
fn bits(into: &Path) -> BTreeMap<PathBuf, Vec<u8>> {
    let sealed = folder_of(into);
    assert_eq!(sealed.extension(), None, "not sealed: {}", sealed.display());
    let files = payload(&sealed);
    assert!(files.len() > 8, "{:?}", files.keys());
    files
}

/// Numbers for moments, from a fixed seed (Steele, Lea & Flood 2014).
struct Moments(u64);

impl Moments {
    fn below(&mut self, bound: u64) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut word = self.0;
        word = (word ^ (word >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        word = (word ^ (word >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        (word ^ (word >> 31)) % bound
    }
}

#[test]
#[expect(clippy::disallowed_methods, reason = "how often to kill, and when")]
fn killed_at_any_moment_it_goes_on_to_the_same_bits() {
    let folder = tempfile::tempdir().unwrap();
    study(folder.path(), STUDY);
    let undisturbed = folder.path().join("undisturbed");
    let begun = Instant::now();
    let whole = run(folder.path(), &undisturbed, 2);
    assert_eq!(whole.status, Some(0), "{}", whole.stderr);
    let length = begun.elapsed().as_millis() as u64;
    let expected = bits(&undisturbed);

    let kills: u64 = std::env::var("ODOGRAPH_KILLS").map_or(4, |n| n.parse().expect("a number"));
    let mut moments = Moments(1);
    let mut landed = 0;
    for turn in 0..kills {
        let into = folder.path().join(format!("killed-{turn}"));
        // Killed up to three times on the way, then left alone.
        for again in 0..=moments.below(3) {
            let threads = 1 + moments.below(3) as usize;
            let mut child = command(folder.path(), &into, threads).spawn().unwrap();
            let moment = Duration::from_millis(moments.below(length + length / 8));
            // The clock may run ahead of a busy machine, or behind it: one kill lands in any case.
            if (turn, again) == (0, 0) {
                wait_for(&into, |journal| journal > 100_000);
            } else {
                sleep(moment);
            }
            child.kill().unwrap();
            let ended = wait(child);
            if ended.status.is_none() {
                landed += 1;
            } else {
                assert_eq!(
                    ended.status,
                    Some(0),
                    "turn {turn}.{again}: {}",
                    ended.stderr
                );
            }
        }
        let last = run(folder.path(), &into, 1 + (turn % 4) as usize);
        assert_eq!(last.status, Some(0), "turn {turn}: {}", last.stderr);
        assert!(bits(&into) == expected, "turn {turn}: other bits");
    }
    assert!(landed > 0, "every kill came too late");
}

#[test]
fn signals_end_it_after_the_current_blocks() {
    let folder = tempfile::tempdir().unwrap();
    study(folder.path(), STUDY);
    let undisturbed = folder.path().join("undisturbed");
    assert_eq!(run(folder.path(), &undisturbed, 2).status, Some(0));
    for name in ["-TERM", "-INT"] {
        let into = folder.path().join(name);
        let child = command(folder.path(), &into, 2).spawn().unwrap();
        wait_for(&into, |journal| journal > 100_000);
        signal(&child, name);
        let ended = wait(child);
        assert_eq!(ended.status, Some(5), "{name}: {}", ended.stderr);
        assert!(
            ended.stderr.contains("the same command goes on"),
            "{}",
            ended.stderr
        );
        let last = run(folder.path(), &into, 1);
        assert_eq!(last.status, Some(0), "{}", last.stderr);
        assert!(
            last.stderr.contains("going on with a run"),
            "{}",
            last.stderr
        );
        assert!(bits(&into) == bits(&undisturbed), "{name}: other bits");
    }
}

/// A journal that was damaged while it lay there costs the blocks behind the damage, and that is said; so is the
/// torn tail after a kill, which is as it should be.
#[test]
fn what_is_cut_off_a_journal_is_told() {
    let folder = tempfile::tempdir().unwrap();
    study(folder.path(), STUDY);
    let undisturbed = folder.path().join("undisturbed");
    assert_eq!(run(folder.path(), &undisturbed, 2).status, Some(0));
    let into = folder.path().join("damaged");
    let child = command(folder.path(), &into, 2).spawn().unwrap();
    wait_for(&into, |journal| journal > 150_000);
    signal(&child, "-TERM");
    assert_eq!(wait(child).status, Some(5));
    let work = folder_of(&into);
    let whole = fs::read(work.join("journal")).unwrap();
    let mut flipped = whole.clone();
    flipped[whole.len() / 2] ^= 1;
    let torn = &whole[..whole.len() - 7];
    for (journal, said, unsaid) in [
        (
            flipped.as_slice(),
            "warning: the journal was damaged: the block at byte",
            "as after a kill",
        ),
        (
            torn,
            "the last block of the journal is not whole, as after a kill",
            "damaged",
        ),
        (&whole, "going on with a run", "dropped"),
    ] {
        let again = folder.path().join("again");
        let place = again.join("leaning").join(work.file_name().unwrap());
        fs::create_dir_all(&place).unwrap();
        fs::write(place.join("journal"), journal).unwrap();
        let ended = run(folder.path(), &again, 2);
        assert_eq!(ended.status, Some(0), "{}", ended.stderr);
        assert!(ended.stderr.contains(said), "{}", ended.stderr);
        assert!(!ended.stderr.contains(unsaid), "{}", ended.stderr);
        assert!(bits(&again) == bits(&undisturbed), "other bits");
        fs::remove_dir_all(&again).unwrap();
    }
}

/// Waits until the journal of the run under `into` has some length.
#[expect(clippy::disallowed_methods, reason = "a test does not wait for ever")]
fn wait_for(into: &Path, enough: impl Fn(u64) -> bool) {
    let begun = Instant::now();
    loop {
        let open = fs::read_dir(into.join("leaning")).ok();
        let mut paths = open
            .into_iter()
            .flatten()
            .flatten()
            .map(|entry| entry.path());
        let folder = paths.find(|path| path.is_dir());
        let journal = folder.and_then(|folder| fs::metadata(folder.join("journal")).ok());
        if journal.is_some_and(|journal| enough(journal.len())) {
            return;
        }
        assert!(begun.elapsed() < Duration::from_secs(60), "no journal grew");
        sleep(Duration::from_millis(2));
    }
}

#[test]
fn a_second_process_is_told_who_is_at_work() {
    let folder = tempfile::tempdir().unwrap();
    study(folder.path(), STUDY);
    let into = folder.path().join("results");
    let first = command(folder.path(), &into, 1).spawn().unwrap();
    wait_for(&into, |journal| journal > 0);
    let second = run(folder.path(), &into, 1);
    assert_eq!(second.status, Some(5), "{}", second.stderr);
    let holder = format!("is being written by process {} on ", first.id());
    assert!(second.stderr.contains(&holder), "{}", second.stderr);
    let first = wait(first);
    assert_eq!(first.status, Some(0), "{}", first.stderr);
    let third = run(folder.path(), &into, 1);
    assert_eq!(third.status, Some(0), "{}", third.stderr);
    assert!(third.stderr.contains("was run before"), "{}", third.stderr);

    // Started at once: one works, the other is told so, or comes so late that it finds the results.
    let undisturbed = bits(&into);
    let into = folder.path().join("crowded");
    let both = [1, 2].map(|threads| command(folder.path(), &into, threads).spawn().unwrap());
    let mut statuses = both.map(|child| wait(child).status);
    statuses.sort_unstable();
    assert!(
        [[Some(0), Some(5)], [Some(0), Some(0)]].contains(&statuses),
        "{statuses:?}"
    );
    assert!(bits(&into) == undisturbed, "other bits");
}

/// A goal out of reach, so that the disk fills after the room for the first review was found.
const ENDLESS: &str = r#"
[goal]
error = 0.0005
effective = 100
at_most = 250000
"#;

/// A small file system in memory; `None` where mounting is not permitted.
struct Small(PathBuf);

impl Small {
    fn mount(at: &Path, size: &str) -> Option<Small> {
        fs::create_dir_all(at).expect("a folder");
        let mounted = Command::new("mount")
            .args(["-t", "tmpfs", "-o", &format!("size={size}"), "tmpfs"])
            .arg(at)
            .output()
            .ok()?;
        mounted.status.success().then(|| Small(at.to_owned()))
    }

    fn resize(&self, size: &str) {
        let grown = Command::new("mount")
            .args(["-o", &format!("remount,size={size}")])
            .arg(&self.0)
            .status();
        assert!(grown.expect("mount").success());
    }
}

impl Drop for Small {
    fn drop(&mut self) {
        let _ = Command::new("umount").arg(&self.0).status();
    }
}

#[test]
#[expect(
    clippy::disallowed_macros,
    reason = "a test that could not be made says so"
)]
fn a_full_disk_ends_it_and_room_lets_it_go_on() {
    let folder = tempfile::tempdir().unwrap();
    let endless = STUDY.replace("every = 10", "every = 1") + ENDLESS;
    study(folder.path(), &endless);
    let into = folder.path().join("small");
    let Some(small) = Small::mount(&into, "18m") else {
        println!("not tested: mounting a small file system is not permitted here");
        return;
    };
    let full = run(folder.path(), &into, 2);
    assert_eq!(full.status, Some(5), "{}", full.stderr);
    assert!(
        full.stderr.contains("at its longest this run writes"),
        "{}",
        full.stderr
    );
    assert!(full.stderr.contains("the disk is full"), "{}", full.stderr);
    // Still full: again the same, and nothing is lost.
    let again = run(folder.path(), &into, 1);
    assert_eq!(again.status, Some(5), "{}", again.stderr);
    small.resize("80m");
    let last = run(folder.path(), &into, 2);
    let undisturbed = folder.path().join("undisturbed");
    let whole = run(folder.path(), &undisturbed, 2);
    assert_eq!(last.status, whole.status, "{}", last.stderr);
    assert!(bits(&into) == bits(&undisturbed), "other bits");

    // No room for the first review: refused before the first draw.
    let refused = Small::mount(&folder.path().join("tiny"), "1m").expect("as before");
    let none = run(folder.path(), &refused.0, 1);
    assert_eq!(none.status, Some(5), "{}", none.stderr);
    assert!(
        none.stderr.contains("up to its first review"),
        "{}",
        none.stderr
    );
}

#[test]
fn a_reader_who_leaves_is_no_failure() {
    let mut child = Command::new(binary())
        .arg("catalogue")
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let mut said = String::new();
    child
        .stderr
        .take()
        .unwrap()
        .read_to_string(&mut said)
        .unwrap();
    assert_eq!(child.wait().unwrap().code(), Some(0), "{said}");
    assert_eq!(said, "");
}
