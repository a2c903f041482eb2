//! Layout of the folder that a run leaves: a record, once it is sealed.
//!
//! ```text
//! <into>/<study>/<first 12 of the plan digest>.open/     while it is worked on
//!   journal                                              the draws
//!   lock
//! <into>/<study>/<first 12 of the plan digest>/          when it is sealed
//!   bagit.txt  bag-info.txt  manifest-sha256.txt  tagmanifest-sha256.txt
//!   circumstances.json                                   one entry a start; outside every digest
//!   data/study.toml  data/inputs/…                       byte for byte
//!   data/plan.json
//!   data/draws/…  data/trail.parquet  data/checkpoints/…
//!   data/summary.json  data/summary.csv  data/summary.txt  data/grounds.json  data/report.html
//! ```
//!
//! Every file but the journal is written aside and renamed; when all are there they are forced to the disk, the
//! folder is renamed, and the journal, whose draws now stand in the record, is removed.

use super::fault::RecordFault;
use super::journal::JournalFile;
use super::lock::Lock;
use crate::canon;
use crate::engine::trail::Digest;
use crate::reading;
use std::fs::{self, File};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

/// A larger file of a finished folder is not shown.
const LARGEST_FILE: u64 = 1 << 28;
/// Turns in which a folder may go away under our feet.
const TRIES: u32 = 10;

/// The place of the results of a plan.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Folder {
    done: PathBuf,
    open: PathBuf,
    plan: Digest,
}

/// What is found there.
pub enum Entry {
    /// Finished before.
    Done(PathBuf),
    /// To be worked on, by us alone.
    Open(Box<Open>),
}

/// What is seen there from outside.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Seen {
    /// A sealed record.
    Done(PathBuf),
    /// A run that was begun.
    Begun,
    Nothing,
}

/// A folder that is being worked on. Its lock goes when it is dropped.
pub struct Open {
    folder: Folder,
    pub journal: JournalFile,
    _lock: Lock,
}

impl Folder {
    /// Under `into`, by the name of the study's file and the digest of the plan.
    pub fn of(into: &Path, study: &Path, plan: &Digest) -> Folder {
        let stem = study.file_stem().unwrap_or("study".as_ref());
        let name = canon::hex(plan)[..12].to_owned();
        let base = into.join(stem);
        Folder {
            open: base.join(format!("{name}.open")),
            done: base.join(name),
            plan: *plan,
        }
    }

    /// Looks without going in; makes nothing.
    pub fn look(&self) -> Seen {
        if self.done.exists() {
            Seen::Done(self.done.clone())
        } else if self.open.join("journal").exists() {
            Seen::Begun
        } else {
            Seen::Nothing
        }
    }

    /// Goes in: finds the results, or takes the lock and opens the journal.
    pub fn enter(&self) -> Result<Entry, RecordFault> {
        let mut tries = 0;
        let lock = loop {
            if self.done.exists() {
                clear(&self.done);
                return Ok(Entry::Done(self.done.clone()));
            }
            // Another process that ends its run gives the folder its name between these steps; then its results
            // are found at the next turn.
            tries += 1;
            plain(&self.open)?;
            match fs::create_dir_all(self.open.join("data/inputs")) {
                Err(fault) if fault.kind() == io::ErrorKind::NotFound && tries < TRIES => continue,
                made => made.map_err(|fault| RecordFault::place(&self.open, &fault))?,
            }
            match Lock::take(&self.open.join("lock"))? {
                Some(lock) => break lock,
                None if tries < TRIES => {}
                None => {
                    let gone = io::Error::from(io::ErrorKind::NotFound);
                    return Err(RecordFault::disk("lock", &self.open, &gone));
                }
            }
        };
        if self.done.exists() {
            // Another process ended its run between our look and our lock.
            let _ = fs::remove_dir_all(&self.open);
            return Ok(Entry::Done(self.done.clone()));
        }
        let journal = JournalFile::open(&self.open.join("journal"), &self.plan)?;
        Ok(Entry::Open(Box::new(Open {
            folder: self.clone(),
            journal,
            _lock: lock,
        })))
    }
}

impl Open {
    /// Where it is while it is worked on.
    pub fn path(&self) -> &Path {
        &self.folder.open
    }

    /// Writes a file of the folder, named from its top: `data/plan.json`. It appears whole, and is forced to
    /// the disk when the folder is finished.
    pub fn write(&self, name: &str, bytes: &[u8]) -> Result<(), RecordFault> {
        let path = self.folder.open.join(name);
        let aside = path.with_added_extension("part");
        let written = File::create(&aside).and_then(|mut file| {
            file.write_all(bytes)?;
            fs::rename(&aside, &path)
        });
        written.map_err(|fault| {
            let _ = fs::remove_file(&aside);
            RecordFault::disk("write", &path, &fault)
        })
    }

    /// Forces everything to the disk and gives the folder its name.
    pub(super) fn finish(self) -> Result<PathBuf, RecordFault> {
        let Folder { open, done, .. } = &self.folder;
        let renamed = || -> io::Result<()> {
            let mut folders = vec![open.clone()];
            while let Some(folder) = folders.pop() {
                for entry in fs::read_dir(&folder)? {
                    let path = entry?.path();
                    if path.is_dir() {
                        folders.push(path);
                    } else {
                        File::open(path)?.sync_all()?;
                    }
                }
                File::open(folder)?.sync_all()?;
            }
            fs::rename(open, done)?;
            clear(done);
            match done.parent() {
                Some(parent) => File::open(parent)?.sync_all(),
                None => Ok(()),
            }
        };
        renamed().map_err(|fault| RecordFault::disk("finish", done, &fault))?;
        Ok(done.clone())
    }
}

/// Refuses a folder that is a link or holds one, or a pipe or device: what is written into it, or cleared, would be
/// written elsewhere.
fn plain(folder: &Path) -> Result<(), RecordFault> {
    let mut left = vec![folder.to_owned()];
    while let Some(path) = left.pop() {
        let disk = |fault| RecordFault::disk("read", &path, &fault);
        let gone = |fault: &io::Error| {
            use io::ErrorKind::{NotADirectory, NotFound};
            matches!(fault.kind(), NotFound | NotADirectory)
        };
        let kind = match fs::symlink_metadata(&path) {
            Ok(about) => about.file_type(),
            // Not there yet, not to be had where it should be (which who makes it will be told), or given its name
            // by another process just now.
            Err(fault) if gone(&fault) => continue,
            Err(fault) => return Err(disk(fault)),
        };
        if kind.is_file() {
            continue;
        }
        if !kind.is_dir() {
            let words = "it is neither a file nor a folder, and nothing is written through it";
            return Err(RecordFault::foreign(&path, words));
        }
        match fs::read_dir(&path) {
            Ok(entries) => left.extend(entries.flatten().map(|entry| entry.path())),
            Err(fault) if gone(&fault) => {}
            Err(fault) => return Err(disk(fault)),
        }
    }
    Ok(())
}

/// Removes what a record no longer needs once it has its name. What a kill leaves of it is removed the next
/// time, so a failure here is none. A link leads to a folder that we did not name.
fn clear(done: &Path) {
    if !fs::symlink_metadata(done).is_ok_and(|about| about.is_dir()) {
        return;
    }
    for name in ["journal", "lock"] {
        let _ = fs::remove_file(done.join(name));
    }
}

/// The text of a file of a finished folder.
pub fn read(folder: &Path, name: &str) -> Result<String, RecordFault> {
    let path = folder.join(name);
    let read = reading::read(&path, LARGEST_FILE).map_err(RecordFault::Input)?;
    String::from_utf8(read.bytes).map_err(|_| RecordFault::foreign(&path, "it is not UTF-8"))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn open(folder: &Folder) -> Box<Open> {
        match folder.enter().unwrap() {
            Entry::Open(open) => open,
            Entry::Done(path) => panic!("{} is done", path.display()),
        }
    }

    #[test]
    fn a_folder_appears_under_its_name_when_done() {
        let into = tempfile::tempdir().unwrap();
        let folder = Folder::of(into.path(), "some/where/pumps.toml".as_ref(), &[0xab; 32]);
        assert_eq!(folder.look(), Seen::Nothing);
        let work = open(&folder);
        assert_eq!(folder.look(), Seen::Begun);
        assert!(work.path().ends_with("pumps/abababababab.open"));
        work.write("data/plan.json", b"{}").unwrap();
        let held = folder.enter().err();
        assert!(matches!(held, Some(RecordFault::Held { .. })));
        let done = work.finish().unwrap();
        assert!(done.ends_with("pumps/abababababab"));
        assert_eq!(folder.look(), Seen::Done(done.clone()));
        assert_eq!(read(&done, "data/plan.json").unwrap(), "{}");
        let names: Vec<_> = fs::read_dir(&done)
            .unwrap()
            .map(|entry| entry.unwrap().file_name())
            .collect();
        assert_eq!(names, ["data"]);
        assert!(matches!(folder.enter().unwrap(), Entry::Done(path) if path == done));
        let left: Vec<_> = fs::read_dir(done.parent().unwrap()).unwrap().collect();
        assert_eq!(left.len(), 1);
    }

    /// Processes that begin and end at once: each works, is told who does, or finds the results.
    #[test]
    fn all_who_come_at_once_get_an_answer() {
        let into = tempfile::tempdir().unwrap();
        let come = |folder: &Folder| match folder.enter() {
            Ok(Entry::Open(work)) => {
                work.write("data/plan.json", b"{}").unwrap();
                (work.finish().unwrap(), 1)
            }
            Ok(Entry::Done(path)) => (path, 0),
            Err(fault) => {
                let words = fault.to_string();
                assert!(
                    words.contains("process ") && words.contains(" on "),
                    "{words}"
                );
                (folder.done.clone(), 0)
            }
        };
        for round in 0..40 {
            let folder = Folder::of(into.path(), "pumps.toml".as_ref(), &[round; 32]);
            let worked: u32 = std::thread::scope(|scope| {
                let ways: Vec<_> = (0..4).map(|_| scope.spawn(|| come(&folder))).collect();
                ways.into_iter().map(|way| way.join().unwrap().1).sum()
            });
            assert_eq!(worked, 1, "round {round}");
            assert_eq!(read(&folder.done, "data/plan.json").unwrap(), "{}");
        }
    }

    #[test]
    fn a_folder_left_open_is_gone_on_with() {
        let into = tempfile::tempdir().unwrap();
        let folder = Folder::of(into.path(), "pumps.toml".as_ref(), &[1; 32]);
        drop(open(&folder));
        drop(open(&folder));
        let other = Folder::of(into.path(), "pumps.toml".as_ref(), &[2; 32]);
        fs::create_dir_all(&other.open).unwrap();
        fs::copy(folder.open.join("journal"), other.open.join("journal")).unwrap();
        let fault = other.enter().err();
        assert!(
            matches!(fault, Some(RecordFault::Foreign { .. })),
            "{fault:?}"
        );
    }
}
