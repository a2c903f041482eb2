//! What can go wrong with a folder of results, in words for the reader.

use std::io;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// What can go wrong with a folder of results.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
pub enum RecordFault {
    /// Another process writes there.
    #[error("{} is being written by {by}", path.display())]
    Held { path: PathBuf, by: String },
    /// The disk, its rights or its room. Work done stays; the run can go on.
    #[error("{0}")]
    Disk(String),
    /// A file of the study is not what it was.
    #[error("{0}")]
    Input(String),
    /// A place where no folder can be made.
    #[error("{words}: choose another folder with --into")]
    Place { words: String },
    /// A finished run whose files are not those it ended with.
    #[error("{}:\n{differences}\nno figures are told from it; move the folder away to run anew", path.display())]
    Changed { path: PathBuf, differences: String },
    /// Files that no run of this plan leaves.
    #[error("{}: {words}; move the folder away to begin anew", path.display())]
    Foreign { path: PathBuf, words: String },
}

impl RecordFault {
    /// `done` is what was being done: "write".
    pub fn disk(done: &str, path: &Path, fault: &io::Error) -> RecordFault {
        let reason = reason(fault);
        RecordFault::Disk(format!("cannot {done} {}: {reason}", path.display()))
    }

    /// A folder that cannot be made, or nothing written into it.
    pub fn place(path: &Path, fault: &io::Error) -> RecordFault {
        let reason = reason(fault);
        RecordFault::Place {
            words: format!("{} cannot be made ({reason})", path.display()),
        }
    }

    pub fn foreign(path: &Path, words: &str) -> RecordFault {
        RecordFault::Foreign {
            path: path.to_owned(),
            words: words.to_owned(),
        }
    }
}

fn reason(fault: &io::Error) -> String {
    match fault.kind() {
        io::ErrorKind::StorageFull => "the disk is full".into(),
        io::ErrorKind::QuotaExceeded => "the disk quota is used up".into(),
        io::ErrorKind::PermissionDenied => "permission denied".into(),
        io::ErrorKind::ReadOnlyFilesystem => "the file system is read-only".into(),
        io::ErrorKind::NotADirectory | io::ErrorKind::AlreadyExists => "a file stands there".into(),
        _ => fault.to_string(),
    }
}
