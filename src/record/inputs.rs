//! The files that a study was resolved with, kept byte for byte, and which of them each path in it means.

use super::fault::RecordFault;
use super::folder::Open;
use crate::canon::Json;
use crate::plan::Input;
use crate::reading::{self, Files, LARGEST_DATA};
use std::collections::BTreeMap;
use std::path::Path;

/// An object: each path as the study writes it, and the name of its copy in `data/inputs/`.
const INDEX: &str = "data/inputs.json";
/// A longer index is refused.
const LONGEST_INDEX: u64 = 1 << 24;

/// Copies every input into the folder, if it still has the bytes that the study was resolved with.
pub fn keep(open: &Open, inputs: &[Input]) -> Result<(), RecordFault> {
    let named = named(inputs);
    for (name, input) in &named {
        let read = reading::read(&input.path, LARGEST_DATA).map_err(RecordFault::Input)?;
        if read.sha256 != input.sha256 {
            return Err(RecordFault::Input(format!(
                "{} changed while the study was being read",
                input.path.display()
            )));
        }
        open.write(&format!("data/inputs/{name}"), &read.bytes)?;
    }
    let index = named
        .into_iter()
        .map(|(name, input)| (&*input.written, Json::text(name)));
    open.write(INDEX, Json::object(index).pretty().as_bytes())
}

/// The files that a record keeps. Fails with what is wrong with the index.
pub fn kept(record: &Path) -> Result<Files, String> {
    let read = reading::read(&record.join(INDEX), LONGEST_INDEX)?;
    let wrong = |words: &str| format!("{INDEX}: {words}");
    let text = String::from_utf8(read.bytes).map_err(|_| wrong("not UTF-8"))?;
    let Json::Object(index) = Json::read(&text).map_err(|words| wrong(&words))? else {
        return Err(wrong("not an object"));
    };
    let place = |(written, name): (String, Json)| {
        let plain = |name: &&str| !name.is_empty() && !name.starts_with('.') && !name.contains('/');
        let name = name.as_text().filter(plain);
        let name = name.ok_or_else(|| wrong("a copy does not have the name of a file"))?;
        Ok((written, record.join("data/inputs").join(name)))
    };
    let places: Result<BTreeMap<_, _>, String> = index.into_iter().map(place).collect();
    places.map(Files::Kept)
}

/// Each input under the name of its file; where several of unlike bytes share it, the first digits of
/// theirs stand before it.
fn named(inputs: &[Input]) -> Vec<(String, &Input)> {
    let plain = |input: &Input| {
        let name = input.path.file_name().unwrap_or_default();
        // What lists of digests would have to escape, and names that hide.
        let escaped = |c: char| c.is_control() || matches!(c, '\\' | '%');
        let name = name.to_string_lossy().replace(escaped, "_");
        if name.starts_with('.') {
            format!("_{name}")
        } else {
            name
        }
    };
    let name = |input: &Input| {
        let name = plain(input);
        let shared = inputs
            .iter()
            .any(|other| plain(other) == name && other.sha256 != input.sha256);
        if shared {
            format!("{}-{name}", &input.sha256[..8])
        } else {
            name
        }
    };
    inputs.iter().map(|input| (name(input), input)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::fs;

    #[test]
    fn unlike_files_of_one_name_are_kept_apart() {
        let input = |path: &str, digit: &str| Input {
            written: path.into(),
            path: path.into(),
            sha256: digit.repeat(64),
        };
        let inputs = [
            input("a/t.csv", "1"),
            input("b/t.csv", "2"),
            input("c/u.csv", "3"),
            input("d/u.csv", "3"),
            input("d/50%\n.csv", "4"),
        ];
        let names: Vec<String> = named(&inputs).into_iter().map(|(name, _)| name).collect();
        let wanted = [
            "11111111-t.csv",
            "22222222-t.csv",
            "u.csv",
            "u.csv",
            "50__.csv",
        ];
        assert_eq!(names, wanted);
    }

    #[test]
    fn an_index_leads_nowhere_else() {
        let record = tempfile::tempdir().unwrap();
        fs::create_dir(record.path().join("data")).unwrap();
        let found = |text: &str| {
            fs::write(record.path().join(INDEX), text).unwrap();
            kept(record.path())
        };
        let files = found("{\"../t.csv\": \"t.csv\"}").unwrap();
        assert_eq!(
            files.find("../t.csv"),
            Ok(record.path().join("data/inputs/t.csv"))
        );
        assert!(files.find("t.csv").is_err());
        for bad in [
            "[]",
            "{\"a\": 1}",
            "{\"a\": \"../b\"}",
            "{\"a\": \"..\"}",
            "{\"a\": \"\"}",
            "{",
        ] {
            assert!(found(bad).is_err(), "{bad}");
        }
    }
}
