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
    /// Files that no run of this plan leaves.
    #[error("{}: {words}; move the folder away to begin anew", path.display())]
    Foreign { path: PathBuf, words: String },
}

impl RecordFault {
    /// `done` is what was being done: "write".
    pub fn disk(done: &str, path: &Path, fault: &io::Error) -> RecordFault {
        let reason = match fault.kind() {
            io::ErrorKind::StorageFull => "the disk is full".to_owned(),
            io::ErrorKind::QuotaExceeded => "the disk quota is used up".to_owned(),
            io::ErrorKind::PermissionDenied => "permission denied".to_owned(),
            io::ErrorKind::ReadOnlyFilesystem => "the file system is read-only".to_owned(),
            _ => fault.to_string(),
        };
        RecordFault::Disk(format!("cannot {done} {}: {reason}", path.display()))
    }

    pub fn foreign(path: &Path, words: &str) -> RecordFault {
        RecordFault::Foreign {
            path: path.to_owned(),
            words: words.to_owned(),
        }
    }
}
