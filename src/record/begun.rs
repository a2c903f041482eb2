//! The list of the runs begun under a study's name: `<into>/<study>/begun.jsonl`, appended to and never rewritten.
//!
//! Each line holds the SHA-256 of the line before, so that a line taken out or changed shows in the next. It is kept
//! by whoever runs, who can throw it away: it shows what an honest house tried before, and nothing to others. So
//! nothing that is wrong with it stops a run.

use super::moment;
use crate::canon::{self, Json};
use std::fs::{File, OpenOptions};
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

const NAME: &str = "begun.jsonl";
/// What a line tells.
const BEGUN: &str = "begun";
const ENDED: &str = "ended";
/// A longer list is not read.
const LONGEST: u64 = 1 << 26;
/// Earlier runs that a record tells, the latest ones.
const TOLD: usize = 1_000;

/// The list in the folder of a study's name.
#[derive(Debug, Clone, PartialEq)]
pub struct Begun {
    path: PathBuf,
    plan_digest: String,
    root: String,
}

/// The runs of other plans begun under a name.
pub struct Earlier {
    /// In order, each with what came of it; the latest, where there are many.
    pub runs: Json,
    /// How many before these are not told.
    pub left_out: u64,
    /// What is wrong with the list, in words.
    pub fault: Option<String>,
}

/// What a list holds.
struct Lines {
    /// Of each line its text.
    texts: Vec<String>,
    /// The last line has its end.
    ended: bool,
}

impl Begun {
    /// Of a plan (its digest in hexadecimal), in the folder where the records of its study's name stand.
    pub fn of(folder: &Path, plan_digest: &str, root: &str) -> Begun {
        Begun {
            path: folder.join(NAME),
            plan_digest: plan_digest.into(),
            root: root.into(),
        }
    }

    /// Enters that the run begins, if that does not stand there; or in words why that cannot be.
    pub fn begins(&self) -> Result<(), String> {
        self.append(BEGUN, &[("root", &self.root)])
    }

    /// Enters what came of it.
    pub fn ends(&self, outcome: &str) -> Result<(), String> {
        self.append(ENDED, &[("outcome", outcome)])
    }

    fn append(&self, event: &str, more: &[(&str, &str)]) -> Result<(), String> {
        let append = || -> io::Result<()> {
            let mut file = OpenOptions::new()
                .read(true)
                .append(true)
                .create(true)
                .open(&self.path)?;
            // Runs of other plans of the study may write at the same time.
            file.lock()?;
            let lines = read(&mut file)?;
            if event == BEGUN && lines.texts.iter().any(|line| self.is_begun(line)) {
                return Ok(());
            }
            let before = lines.texts.last();
            let before = before.map_or(Json::Null, |line| {
                Json::text(canon::sha256_hex(line.as_bytes()))
            });
            let mut members = vec![
                ("before", before),
                ("event", Json::text(event)),
                ("plan_digest", Json::text(&*self.plan_digest)),
                ("at", Json::text(moment::now())),
            ];
            members.extend(more.iter().map(|(name, text)| (*name, Json::text(*text))));
            let end = if lines.ended { "" } else { "\n" };
            let line = format!("{end}{}\n", Json::object(members).canonical());
            file.write_all(line.as_bytes())?;
            file.sync_data()
        };
        append().map_err(|fault| {
            let path = self.path.display();
            format!("{path}: the run could not be entered in the list of runs begun: {fault}")
        })
    }

    fn is_begun(&self, line: &str) -> bool {
        Json::read(line).is_ok_and(|line| {
            let said =
                |name: &str, text: &str| line.get(name).and_then(Json::as_text) == Some(text);
            said("event", BEGUN) && said("plan_digest", &self.plan_digest)
        })
    }

    /// The runs of other plans begun under this name.
    pub fn earlier(&self) -> Earlier {
        let lines = match File::open(&self.path).and_then(|mut file| read(&mut file)) {
            Ok(lines) => lines,
            Err(fault) => {
                return Earlier {
                    runs: Json::Array(Vec::new()),
                    left_out: 0,
                    fault: Some(format!("{NAME} cannot be read: {fault}")),
                };
            }
        };
        let mut runs: Vec<Vec<(&'static str, Json)>> = Vec::new();
        let mut wrong = None;
        for (index, text) in lines.texts.iter().enumerate() {
            let mut found = |words: &str| {
                wrong.get_or_insert(format!("{NAME}, line {}: {words}", index + 1));
            };
            let Ok(line) = Json::read(text) else {
                found("it cannot be read");
                continue;
            };
            let member = |name: &str| line.get(name).cloned().unwrap_or(Json::Null);
            let before = match index {
                0 => Json::Null,
                _ => Json::text(canon::sha256_hex(lines.texts[index - 1].as_bytes())),
            };
            if member("before") != before {
                found("the line before it is not the one it followed when it was written");
            }
            let plan = member("plan_digest");
            match line.get("event").and_then(Json::as_text) {
                Some(BEGUN) => runs.push(vec![
                    ("plan_digest", plan),
                    ("root", member("root")),
                    ("began", member("at")),
                ]),
                Some(ENDED) => {
                    let own = |run: &&mut Vec<(&str, Json)>| run[0].1 == plan;
                    if let Some(run) = runs.iter_mut().rev().find(own) {
                        run.truncate(3);
                        run.push(("ended", member("at")));
                        run.push(("outcome", member("outcome")));
                    }
                }
                _ => found("it tells neither that a run began nor that one ended"),
            }
        }
        runs.retain(|run| run[0].1.as_text() != Some(&self.plan_digest));
        let left_out = runs.len().saturating_sub(TOLD);
        Earlier {
            runs: Json::array(runs.into_iter().skip(left_out).map(Json::object)),
            left_out: left_out as u64,
            fault: wrong,
        }
    }
}

fn read(file: &mut File) -> io::Result<Lines> {
    if file.metadata()?.len() > LONGEST {
        return Err(io::Error::other("it is too long"));
    }
    let mut bytes = Vec::new();
    file.take(LONGEST).read_to_end(&mut bytes)?;
    let text = String::from_utf8_lossy(&bytes);
    Ok(Lines {
        texts: text.lines().map(str::to_owned).collect(),
        ended: text.is_empty() || text.ends_with('\n'),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::fs;

    fn list() -> (tempfile::TempDir, Begun, Begun) {
        let folder = tempfile::tempdir().unwrap();
        let run = |digit: &str, root: &str| Begun::of(folder.path(), &digit.repeat(64), root);
        let (first, second) = (run("a", "one"), run("b", "two"));
        first.begins().unwrap();
        first.ends("interrupted").unwrap();
        second.begins().unwrap();
        first.ends("sealed").unwrap();
        (folder, first, second)
    }

    #[test]
    fn earlier_runs_are_told_with_what_came_of_them() {
        let (folder, first, second) = list();
        let Earlier {
            runs, fault: wrong, ..
        } = second.earlier();
        assert_eq!(wrong, None);
        let said = |run: &Json, name: &str| run.get(name).and_then(Json::as_text).map(String::from);
        assert_eq!(runs.items().len(), 1);
        assert_eq!(said(&runs.items()[0], "root"), Some("one".into()));
        assert_eq!(said(&runs.items()[0], "outcome"), Some("sealed".into()));
        let runs = first.earlier().runs;
        assert_eq!(said(&runs.items()[0], "root"), Some("two".into()));
        assert_eq!(said(&runs.items()[0], "outcome"), None);
        let none = Begun::of(&folder.path().join("gone"), "c", "three");
        assert!(none.begins().is_err());
        assert!(none.earlier().fault.is_some());
    }

    #[test]
    fn a_line_taken_out_changed_or_torn_is_told_and_stops_nothing() {
        let (folder, first, second) = list();
        let path = folder.path().join(NAME);
        let whole = fs::read_to_string(&path).unwrap();
        let lines: Vec<&str> = whole.lines().collect();
        let without = format!("{}\n{}\n{}\n", lines[0], lines[2], lines[3]);
        let changed = whole.replace("\"one\"", "\"four\"");
        for (text, line) in [(without, 2), (changed, 2), (format!("x\n{whole}"), 1)] {
            fs::write(&path, text).unwrap();
            let wrong = second.earlier().fault;
            let wrong = wrong.expect("a fault");
            assert!(wrong.contains(&format!("line {line}:")), "{wrong}");
            first.begins().unwrap();
        }
        fs::write(&path, &whole[..whole.len() - 9]).unwrap();
        second.ends("sealed").unwrap();
        let Earlier {
            runs, fault: wrong, ..
        } = first.earlier();
        assert!(wrong.is_some_and(|wrong| wrong.contains("line 4: it cannot be read")));
        let outcome = runs.items()[0].get("outcome").and_then(Json::as_text);
        assert_eq!(outcome, Some("sealed"));
    }

    #[test]
    fn runs_that_begin_at_once_make_one_chain() {
        let folder = tempfile::tempdir().unwrap();
        std::thread::scope(|scope| {
            for run in 0..8 {
                let folder = folder.path();
                scope.spawn(move || {
                    let run = Begun::of(folder, &format!("{run:064}"), "root");
                    run.begins().unwrap();
                    for _ in 0..10 {
                        run.begins().unwrap();
                        run.ends("interrupted").unwrap();
                    }
                });
            }
        });
        let Earlier {
            runs, fault: wrong, ..
        } = Begun::of(folder.path(), "", "").earlier();
        assert_eq!((runs.items().len(), wrong), (8, None));
    }
}
