//! One writer a folder: an advisory lock on a file that says who holds it.

use super::fault::RecordFault;
use super::moment;
use std::fs::{File, OpenOptions, TryLockError};
use std::io::{ErrorKind, Read, Seek, Write};
use std::path::Path;
use std::thread::sleep;
use std::time::Duration;

const READINGS: u32 = 20;
const MOMENT: Duration = Duration::from_millis(50);

/// Held until dropped.
#[derive(Debug)]
pub struct Lock {
    _file: File,
}

impl Lock {
    /// Takes the lock, or says who has it. `None` where its folder is gone: who held it gave the folder its name.
    pub fn take(path: &Path) -> Result<Option<Lock>, RecordFault> {
        let disk = |fault: std::io::Error| RecordFault::disk("lock", path, &fault);
        let opened = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(path);
        let mut file = match opened {
            Ok(file) => file,
            Err(fault) => {
                return match fault.kind() {
                    ErrorKind::NotFound => Ok(None),
                    ErrorKind::PermissionDenied | ErrorKind::ReadOnlyFilesystem => {
                        Err(RecordFault::place(path, &fault))
                    }
                    _ => Err(disk(fault)),
                };
            }
        };
        match file.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => {
                let by = holder(&mut file);
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
        Ok(Some(Lock { _file: file }))
    }
}

/// Who holds a lock, by the words in its file. Who took it a moment ago has yet to write them, over those of an
/// earlier holder who was killed; so they are read after a moment, and waited for.
fn holder(file: &mut File) -> String {
    for _ in 0..READINGS {
        sleep(MOMENT);
        let mut by = String::new();
        let read = file
            .rewind()
            .and_then(|()| file.take(1000).read_to_string(&mut by));
        if read.is_ok() && by.ends_with('\n') {
            return by.trim().to_owned();
        }
    }
    "another process".to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_second_writer_is_told_who_holds_it() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("lock");
        let first = Lock::take(&path).unwrap().unwrap();
        let told = Lock::take(&path).unwrap_err().to_string();
        let process = format!("process {} on ", std::process::id());
        assert!(
            told.contains(&process) && told.contains(" since 20"),
            "{told}"
        );
        drop(first);
        assert!(Lock::take(&path).unwrap().is_some());
    }

    /// The words of who was killed before stand in the file, and the new holder has yet to write over them.
    #[test]
    fn who_took_it_a_moment_ago_is_named() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("lock");
        for (before, late) in [("", 120), ("process 1 on elsewhere since 2020\n", 10)] {
            std::fs::write(&path, before).unwrap();
            let mut first = OpenOptions::new().write(true).open(&path).unwrap();
            first.lock().unwrap();
            let told = std::thread::scope(|scope| {
                scope.spawn(|| {
                    sleep(Duration::from_millis(late));
                    first.set_len(0).unwrap();
                    first.write_all(b"process 2 on here since 2026\n").unwrap();
                });
                Lock::take(&path).unwrap_err().to_string()
            });
            assert!(told.contains("process 2 on here since 2026"), "{told}");
        }
    }

    #[test]
    fn a_folder_that_is_gone_has_no_lock() {
        let folder = tempfile::tempdir().unwrap();
        assert!(
            Lock::take(&folder.path().join("gone/lock"))
                .unwrap()
                .is_none()
        );
    }
}
