//! A record is a bag (BagIt 1.0, RFC 8493): a list of everything under `data/` with its SHA-256, as
//! `sha256sum -c` reads it, and a list of the other files.
//!
//! It shows a file that was changed by accident or in passing. Who mends the lists as well is found by the rest
//! of a verification.

use super::fault::RecordFault;
use super::moment;
use crate::canon;
use crate::reading;
use sha2::{Digest as _, Sha256};
use std::collections::{BTreeMap, BTreeSet};
use std::fs::{self, File};
use std::io::{self, Read};
use std::path::{Path, PathBuf};

const DECLARATION: &str = "bagit.txt";
const INFO: &str = "bag-info.txt";
const MANIFEST: &str = "manifest-sha256.txt";
const TAGS: &str = "tagmanifest-sha256.txt";
/// Who worked on it, when, where and with what.
pub const CIRCUMSTANCES: &str = "circumstances.json";
/// Outside both lists: signatures come later, and from others.
const SIGNATURES: &str = "signatures";
/// What the list of tags names, in its order.
const TAGGED: [&str; 4] = [INFO, DECLARATION, CIRCUMSTANCES, MANIFEST];

/// Bytes read at a time.
const CHUNK: usize = 1 << 16;
/// A list longer than this is refused.
const LONGEST_LIST: u64 = 1 << 28;
/// A label longer than this is no label.
const LONGEST_INFO: u64 = 1 << 20;
/// Files and folders looked at, and how deep they may lie.
const MOST_FILES: usize = 1 << 20;
const DEEPEST: usize = 8;

/// Writes what makes a bag of a folder whose `data/` and circumstances stand.
pub fn write(folder: &Path, title: &str, result_digest: &str) -> Result<(), RecordFault> {
    let walked = walk(folder)?;
    let mut manifest = String::new();
    for (name, path) in &walked.files {
        if name.starts_with("data/") {
            manifest.push_str(&line(path, name)?);
        }
    }
    let title = one_line(title);
    let info = format!(
        "Bag-Software-Agent: odograph {}\nBagging-Date: {}\nExternal-Description: {title}\n\
         External-Identifier: {result_digest}\nPayload-Oxum: {}\n",
        env!("CARGO_PKG_VERSION"),
        &moment::now()[..10],
        walked.oxum(),
    );
    let declaration = "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n";
    for (name, text) in [
        (DECLARATION, declaration),
        (INFO, &info),
        (MANIFEST, &manifest),
    ] {
        let path = folder.join(name);
        fs::write(&path, text).map_err(|fault| RecordFault::disk("write", &path, &fault))?;
    }
    let mut tags = String::new();
    for name in TAGGED {
        tags.push_str(&line(&folder.join(name), name)?);
    }
    let path = folder.join(TAGS);
    fs::write(&path, tags).map_err(|fault| RecordFault::disk("write", &path, &fault))
}

/// A file's line in a list.
fn line(path: &Path, name: &str) -> Result<String, RecordFault> {
    let digest = sha256(path).map_err(|fault| RecordFault::disk("read", path, &fault))?;
    Ok(format!("{digest}  {name}\n"))
}

/// The path under `data/` of every file there, sorted, and its length.
pub fn payload(folder: &Path) -> Result<Vec<(String, u64)>, RecordFault> {
    let mut files = Vec::new();
    for (name, path) in walk(folder)?.files {
        if let Some(name) = name.strip_prefix("data/") {
            let size =
                fs::metadata(&path).map_err(|fault| RecordFault::disk("read", &path, &fault))?;
            files.push((name.to_owned(), size.len()));
        }
    }
    Ok(files)
}

/// Holds a bag against its lists. Gives every difference, none when it is whole.
///
/// # Errors
/// When the folder itself cannot be read.
pub fn check(folder: &Path) -> Result<Vec<String>, RecordFault> {
    let walked = walk(folder)?;
    let mut differences = [walked.pitfalls.clone(), walked.strange.clone()].concat();
    let mut lists: BTreeMap<&str, BTreeMap<String, String>> = BTreeMap::new();
    for (list, payload) in [(MANIFEST, true), (TAGS, false)] {
        match read_list(&folder.join(list)) {
            Ok(entries) => {
                for name in entries.keys() {
                    if name.starts_with("data/") != payload {
                        differences.push(format!("{list} names {name}, which has no place in it"));
                    }
                }
                lists.insert(list, entries);
            }
            Err(words) => differences.push(format!("{list} {words}")),
        }
    }
    let mut listed: BTreeMap<String, String> = lists.into_values().flatten().collect();
    for name in TAGGED {
        if !listed.contains_key(name) {
            differences.push(format!("{TAGS} does not name {name}"));
        }
    }
    for (name, path) in &walked.files {
        if name == TAGS {
            continue;
        }
        match listed.remove(name) {
            None => differences.push(format!("{name} is in no list of the record")),
            Some(digest) => {
                if sha256(path).ok().is_none_or(|found| found != digest) {
                    let by = match name.starts_with("data/") {
                        true => MANIFEST,
                        false => TAGS,
                    };
                    differences.push(format!(
                        "{name} is not as it was when the record was sealed ({by})"
                    ));
                }
            }
        }
    }
    for name in listed.into_keys() {
        differences.push(format!("{name} is listed, and is not there"));
    }
    let oxum = walked.oxum();
    if label(folder, "Payload-Oxum").is_some_and(|said| said != oxum) {
        differences.push(format!("{INFO}: Payload-Oxum is not {oxum}"));
    }
    if fs::read_to_string(folder.join(DECLARATION))
        .is_ok_and(|text| !text.starts_with("BagIt-Version: 1.0\n"))
    {
        differences.push(format!(
            "{DECLARATION} does not declare a bag of version 1.0"
        ));
    }
    Ok(differences)
}

/// What has no place in a record and is not to be read: links, devices, and more or deeper than is looked at.
/// Whoever reads on after this is led nowhere else.
///
/// # Errors
/// When the folder itself cannot be read.
pub fn pitfalls(folder: &Path) -> Result<Vec<String>, RecordFault> {
    walk(folder).map(|walked| walked.pitfalls)
}

/// Where the label of a bag, `bag-info.txt`, says another title or result than these.
pub fn label_differences(folder: &Path, title: &str, result_digest: &str) -> Vec<String> {
    let title = one_line(title);
    let wanted = [
        ("External-Description", &*title),
        ("External-Identifier", result_digest),
    ];
    let wanted = wanted.into_iter().filter_map(|(name, wanted)| {
        let said = label(folder, name).unwrap_or_default();
        (said != wanted).then(|| format!("{INFO}: {name} says {said:?}, and should say {wanted:?}"))
    });
    wanted.collect()
}

/// What the label of a bag says under a name.
pub fn label(folder: &Path, name: &str) -> Option<String> {
    let text = reading::read(&folder.join(INFO), LONGEST_INFO).ok()?.bytes;
    let text = String::from_utf8(text).ok()?;
    let said = text
        .lines()
        .find_map(|line| line.strip_prefix(name)?.strip_prefix(": "));
    said.map(str::to_owned)
}

fn one_line(title: &str) -> String {
    title.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// Name and digest of every line of a list; in words what is wrong with it.
fn read_list(path: &Path) -> Result<BTreeMap<String, String>, String> {
    let length = fs::symlink_metadata(path).map_err(|_| "is not there".to_owned())?;
    if !length.is_file() || length.len() > LONGEST_LIST {
        return Err("is no list".into());
    }
    let text = fs::read_to_string(path).map_err(|_| "cannot be read".to_owned())?;
    let mut entries = BTreeMap::new();
    for (number, line) in text.lines().enumerate() {
        let entry = line
            .split_once("  ")
            .filter(|(digest, _)| canon::unhex(digest).is_some());
        let Some((digest, name)) = entry else {
            return Err(format!("cannot be read in line {}", number + 1));
        };
        if name.contains(char::is_control) {
            return Err(format!("cannot be read in line {}", number + 1));
        }
        if entries.insert(name.to_owned(), digest.to_owned()).is_some() {
            return Err(format!("names {name} twice"));
        }
    }
    Ok(entries)
}

/// What a folder holds.
struct Walked {
    /// Plain files by their path from the top with `/` between, sorted; without signatures.
    files: Vec<(String, PathBuf)>,
    /// What no record has: unknown names.
    strange: Vec<String>,
    /// What is not to be read at all: links, devices, too much or too deep.
    pitfalls: Vec<String>,
}

impl Walked {
    /// Bytes and files of the payload, as the label of a bag counts them.
    fn oxum(&self) -> String {
        let payload = self
            .files
            .iter()
            .filter(|(name, _)| name.starts_with("data/"));
        let sizes: Vec<u64> = payload
            .map(|(_, path)| fs::symlink_metadata(path).map_or(0, |about| about.len()))
            .collect();
        let bytes = sizes
            .iter()
            .fold(0_u64, |sum, size| sum.saturating_add(*size));
        format!("{bytes}.{}", sizes.len())
    }
}

fn walk(folder: &Path) -> Result<Walked, RecordFault> {
    let top: BTreeSet<&str> = TAGGED.into_iter().chain([TAGS, "data"]).collect();
    let mut walked = Walked {
        files: Vec::new(),
        strange: Vec::new(),
        pitfalls: Vec::new(),
    };
    let mut folders = vec![(String::new(), folder.to_owned(), 0)];
    let mut seen = 0;
    while let Some((name, path, depth)) = folders.pop() {
        let disk = |fault| RecordFault::disk("read", &path, &fault);
        for entry in fs::read_dir(&path).map_err(disk)? {
            let entry = entry.map_err(disk)?;
            let own = entry.file_name();
            let inner = format!("{name}{}", own.to_string_lossy());
            if own.to_string_lossy().contains(char::is_control) {
                let shown = inner.replace(char::is_control, "?");
                walked
                    .pitfalls
                    .push(format!("{shown} has no name for a file"));
                continue;
            }
            let kind = entry.file_type().map_err(disk)?;
            seen += 1;
            if seen > MOST_FILES || depth > DEEPEST {
                walked.pitfalls.push(format!(
                    "{inner}: the record holds too many files, or too deep"
                ));
                return Ok(walked);
            }
            if depth == 0 && inner == SIGNATURES && kind.is_dir() {
                continue;
            }
            if own.to_str().is_none() || (depth == 0 && !top.contains(&*inner)) {
                walked
                    .strange
                    .push(format!("{inner} is no part of a record"));
            } else if kind.is_dir() {
                folders.push((format!("{inner}/"), entry.path(), depth + 1));
            } else if kind.is_file() {
                walked.files.push((inner, entry.path()));
            } else {
                walked
                    .pitfalls
                    .push(format!("{inner} is neither a file nor a folder"));
            }
        }
    }
    walked.files.sort();
    Ok(walked)
}

/// In hexadecimal, of a file of any length.
pub(super) fn sha256(path: &Path) -> io::Result<String> {
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

    fn bag() -> tempfile::TempDir {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path();
        fs::create_dir_all(path.join("data/inputs")).unwrap();
        fs::write(path.join("data/a.json"), "abc").unwrap();
        fs::write(path.join("data/inputs/b c.csv"), vec![7; 3 * CHUNK + 1]).unwrap();
        fs::write(path.join(CIRCUMSTANCES), "{}").unwrap();
        write(path, "Pump\nfailures", "00ff").unwrap();
        folder
    }

    fn told(folder: &Path) -> String {
        check(folder).unwrap().join("\n")
    }

    #[test]
    fn the_lists_are_sorted_and_plain() {
        let folder = bag();
        let text = fs::read_to_string(folder.path().join(MANIFEST)).unwrap();
        let lines: Vec<&str> = text.lines().collect();
        // FIPS 180-4 example "abc" (from memory).
        let abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(lines.len(), 2);
        assert_eq!(lines[0], format!("{abc}  data/a.json"));
        assert!(lines[1].ends_with("  data/inputs/b c.csv"));
        let info = fs::read_to_string(folder.path().join(INFO)).unwrap();
        assert!(
            info.contains("External-Description: Pump failures\n"),
            "{info}"
        );
        assert!(info.contains("Payload-Oxum: 196612.2\n"), "{info}");
        assert_eq!(told(folder.path()), "");
        fs::create_dir(folder.path().join(SIGNATURES)).unwrap();
        fs::write(folder.path().join("signatures/a"), "x").unwrap();
        assert_eq!(told(folder.path()), "");
    }

    #[test]
    fn what_changed_came_or_went_is_named() {
        let folder = bag();
        let path = folder.path();
        fs::write(path.join("data/a.json"), "abd").unwrap();
        fs::write(path.join("data/inputs/c.csv"), "").unwrap();
        fs::remove_file(path.join("data/inputs/b c.csv")).unwrap();
        fs::write(path.join(CIRCUMSTANCES), "{ }").unwrap();
        fs::write(path.join("journal"), "").unwrap();
        let told = told(path);
        for part in [
            "data/a.json is not as it was when the record was sealed",
            "data/inputs/c.csv is in no list",
            "data/inputs/b c.csv is listed, and is not there",
            "circumstances.json is not as it was",
            "journal is no part of a record",
        ] {
            assert!(told.contains(part), "{part} is missing in:\n{told}");
        }
    }

    #[test]
    fn a_flipped_byte_in_a_list_is_told() {
        for name in [DECLARATION, INFO, MANIFEST, TAGS] {
            let folder = bag();
            let path = folder.path().join(name);
            let whole = fs::read(&path).unwrap();
            for at in 0..whole.len() {
                let mut bytes = whole.clone();
                bytes[at] ^= 1;
                fs::write(&path, &bytes).unwrap();
                assert_ne!(told(folder.path()), "", "{name}, byte {at}");
            }
        }
    }

    #[test]
    #[cfg(unix)]
    fn links_are_not_followed() {
        let folder = bag();
        let link = folder.path().join("data/b.json");
        std::os::unix::fs::symlink("/dev/zero", &link).unwrap();
        assert!(told(folder.path()).contains("data/b.json is neither"));
        fs::remove_file(&link).unwrap();
        fs::remove_file(folder.path().join(MANIFEST)).unwrap();
        std::os::unix::fs::symlink("/dev/zero", folder.path().join(MANIFEST)).unwrap();
        assert!(told(folder.path()).contains(MANIFEST));
    }
}
