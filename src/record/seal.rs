//! The list of what a finished folder holds: the SHA-256 of every file under `data/`, as `sha256sum -c` reads it.
//!
//! It shows a file that was changed by accident or in passing; who rewrites the list as well is not seen.

use super::fault::RecordFault;
use crate::canon;
use sha2::{Digest as _, Sha256};
use std::fs::{self, File};
use std::io::{self, Read};
use std::path::{Path, PathBuf};

/// Beside `data/`, in the folder.
pub const NAME: &str = "manifest-sha256.txt";

/// Bytes read at a time.
const CHUNK: usize = 1 << 16;

/// The list for a folder: a line a file, sorted by its path from the folder.
pub fn list(folder: &Path) -> Result<String, RecordFault> {
    let mut text = String::new();
    for (name, path) in files(folder)? {
        let digest = sha256(&path).map_err(|fault| RecordFault::disk("read", &path, &fault))?;
        text.push_str(&line(&digest, &name));
        text.push('\n');
    }
    Ok(text)
}

/// Holds the files under `data/` against the list.
///
/// # Errors
/// `Changed`, naming every file that is not as it was, is gone or came in since.
pub fn check(folder: &Path) -> Result<(), RecordFault> {
    let changed = |differences: Vec<String>| RecordFault::Changed {
        path: folder.to_owned(),
        differences: differences.join("\n"),
    };
    let text = match fs::read(folder.join(NAME)) {
        Ok(bytes) => String::from_utf8_lossy(&bytes).into_owned(),
        Err(fault) if fault.kind() == io::ErrorKind::NotFound => {
            return Err(changed(vec![format!(
                "{NAME}, which every finished run has, is gone"
            )]));
        }
        Err(fault) => return Err(RecordFault::disk("read", &folder.join(NAME), &fault)),
    };
    let found = files(folder)?;
    let mut listed: Vec<&str> = text.lines().collect();
    let mut differences = Vec::new();
    for (name, path) in &found {
        let at = listed.iter().position(|line| named(line) == escaped(name));
        let Some(at) = at else {
            differences.push(format!("{name} was not there when the run ended"));
            continue;
        };
        let listed = listed.swap_remove(at);
        // What stands in the place of a file may be anything, also something that never ends.
        let plain = fs::metadata(path).is_ok_and(|found| found.is_file());
        let digest = if plain { sha256(path).ok() } else { None };
        let same = digest.is_some_and(|digest| line(&digest, name) == listed);
        if !same {
            differences.push(format!("{name} is not as it was when the run ended"));
        }
    }
    for line in listed {
        differences.push(format!(
            "{} was there when the run ended, and is gone",
            named(line)
        ));
    }
    if differences.is_empty() {
        Ok(())
    } else {
        Err(changed(differences))
    }
}

/// As `sha256sum` writes it: where a name had to be escaped, a backslash leads the line.
fn line(digest: &str, name: &str) -> String {
    let escaped = escaped(name);
    let mark = if escaped == name { "" } else { "\\" };
    format!("{mark}{digest}  {escaped}")
}

/// A name as it stands in a line.
fn escaped(name: &str) -> String {
    let name = name.replace('\\', "\\\\").replace('\n', "\\n");
    name.replace('\r', "\\r")
}

/// The name in a line.
fn named(line: &str) -> &str {
    line.split_once("  ").map_or(line, |(_, name)| name)
}

/// Everything under `data/` that is no folder, by its path from the top with `/` between, sorted.
fn files(folder: &Path) -> Result<Vec<(String, PathBuf)>, RecordFault> {
    let mut files = Vec::new();
    let mut folders = vec![("data".to_owned(), folder.join("data"))];
    while let Some((name, path)) = folders.pop() {
        let disk = |fault| RecordFault::disk("read", &path, &fault);
        let entries = match fs::read_dir(&path) {
            Ok(entries) => entries,
            // All that is listed is then told to be gone.
            Err(fault) if fault.kind() == io::ErrorKind::NotFound => continue,
            Err(fault) => return Err(disk(fault)),
        };
        for entry in entries {
            let entry = entry.map_err(disk)?;
            let inner = format!("{name}/{}", entry.file_name().to_string_lossy());
            let found = (inner, entry.path());
            if entry.file_type().map_err(disk)?.is_dir() {
                folders.push(found);
            } else {
                files.push(found);
            }
        }
    }
    files.sort();
    Ok(files)
}

/// In hexadecimal, of a file of any length.
fn sha256(path: &Path) -> io::Result<String> {
    let mut file = File::open(path)?;
    let mut hash = Sha256::new();
    let mut chunk = vec![0; CHUNK];
    loop {
        match file.read(&mut chunk) {
            Ok(0) => return Ok(canon::hex(&hash.finalize().into())),
            Ok(count) => hash.update(&chunk[..count]),
            Err(fault) if fault.kind() == io::ErrorKind::Interrupted => {}
            Err(fault) => return Err(fault),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sealed() -> tempfile::TempDir {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path();
        fs::create_dir_all(path.join("data/inputs")).unwrap();
        fs::write(path.join("data/a.json"), "abc").unwrap();
        fs::write(path.join("data/inputs/b c.csv"), vec![7; 3 * CHUNK + 1]).unwrap();
        fs::write(path.join("data/inputs/odd\\one\nof two.csv"), "abc").unwrap();
        fs::write(path.join("journal"), "not listed").unwrap();
        fs::write(path.join(NAME), list(path).unwrap()).unwrap();
        folder
    }

    fn told(folder: &Path) -> String {
        match check(folder) {
            Ok(()) => String::new(),
            Err(fault) => {
                assert!(matches!(fault, RecordFault::Changed { .. }), "{fault:?}");
                fault.to_string()
            }
        }
    }

    #[test]
    fn the_list_is_sorted_and_plain() {
        let folder = sealed();
        let text = fs::read_to_string(folder.path().join(NAME)).unwrap();
        let lines: Vec<&str> = text.lines().collect();
        // FIPS 180-4 example "abc" (from memory).
        let abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(lines.len(), 3);
        assert_eq!(lines[0], format!("{abc}  data/a.json"));
        assert!(lines[1].ends_with("  data/inputs/b c.csv"));
        let odd = format!("\\{abc}  data/inputs/odd\\\\one\\nof two.csv");
        assert_eq!(lines[2], odd);
        assert_eq!(told(folder.path()), "");
    }

    #[test]
    fn what_changed_came_or_went_is_named() {
        let folder = sealed();
        let path = folder.path();
        fs::write(path.join("journal"), "changed").unwrap();
        assert_eq!(told(path), "");
        fs::write(path.join("data/a.json"), "abd").unwrap();
        fs::write(path.join("data/inputs/c.csv"), "").unwrap();
        fs::remove_file(path.join("data/inputs/b c.csv")).unwrap();
        let told = told(path);
        for part in [
            "data/a.json is not as it was when the run ended",
            "data/inputs/c.csv was not there",
            "data/inputs/b c.csv was there",
        ] {
            assert!(told.contains(part), "{part} is missing in:\n{told}");
        }
        assert!(!told.contains("odd"), "{told}");
    }

    #[test]
    fn without_its_list_nothing_is_trusted() {
        let folder = sealed();
        fs::remove_file(folder.path().join(NAME)).unwrap();
        assert!(told(folder.path()).contains(NAME));
        let folder = sealed();
        fs::remove_dir_all(folder.path().join("data")).unwrap();
        assert!(told(folder.path()).contains("data/a.json was there"));
    }
}
