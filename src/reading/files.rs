//! Where the files that a study names are found.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// Where the files that a study names are found.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Files {
    /// Paths are relative to this folder, that of the study.
    Folder(PathBuf),
    /// Each path as a study writes it, and where a copy of the file is kept. No other file is looked at.
    Kept(BTreeMap<String, PathBuf>),
}

impl Files {
    /// Those beside a study.
    pub fn beside(study: &Path) -> Files {
        Files::Folder(study.parent().unwrap_or("".as_ref()).to_owned())
    }

    /// Where the file is that a study writes as `written`. Fails in words where none is kept.
    pub fn find(&self, written: &str) -> Result<PathBuf, String> {
        match self {
            Files::Folder(folder) => Ok(folder.join(written)),
            Files::Kept(kept) => kept
                .get(written)
                .cloned()
                .ok_or_else(|| format!("no copy of {written} is kept")),
        }
    }
}
