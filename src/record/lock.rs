//! One writer a folder: an advisory lock on a file that says who holds it.

use super::fault::RecordFault;
use super::moment;
use std::fs::{File, OpenOptions, TryLockError};
use std::io::{ErrorKind, Read, Write};
use std::path::Path;

/// Held until dropped.
#[derive(Debug)]
pub struct Lock {
    _file: File,
}

impl Lock {
    /// Takes the lock, or says who has it.
    pub fn take(path: &Path) -> Result<Lock, RecordFault> {
        let disk = |fault: std::io::Error| RecordFault::disk("lock", path, &fault);
        let mut file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(path)
            .map_err(|fault| match fault.kind() {
                ErrorKind::PermissionDenied | ErrorKind::ReadOnlyFilesystem => {
                    RecordFault::place(path, &fault)
                }
                _ => disk(fault),
            })?;
        match file.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => {
                let mut by = String::new();
                let _ = file.take(1000).read_to_string(&mut by);
                let by = match by.trim() {
                    "" => "another process".to_owned(),
                    by => by.to_owned(),
                };
                let path = path.parent().unwrap_or(path).to_owned();
                return Err(RecordFault::Held { path, by });
            }
            Err(TryLockError::Error(fault)) => return Err(disk(fault)),
        }
        let holder = format!(
            "process {} on {} since {}\n",
            std::process::id(),
            moment::host(),
            moment::now()
        );
        file.set_len(0)
            .and_then(|()| file.write_all(holder.as_bytes()))
            .map_err(disk)?;
        Ok(Lock { _file: file })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_second_writer_is_told_who_holds_it() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("lock");
        let first = Lock::take(&path).unwrap();
        let told = Lock::take(&path).unwrap_err().to_string();
        let process = format!("process {} on ", std::process::id());
        assert!(
            told.contains(&process) && told.contains(" since 20"),
            "{told}"
        );
        drop(first);
        Lock::take(&path).unwrap();
    }
}
