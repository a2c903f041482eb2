//! The files that a study was resolved with, kept byte for byte.

use super::fault::RecordFault;
use super::folder::Open;
use crate::plan::Input;
use crate::reading::{self, LARGEST_DATA};

/// Copies every input into the folder, if it still has the bytes that the study was resolved with.
pub fn keep(open: &Open, inputs: &[Input]) -> Result<(), RecordFault> {
    for (name, input) in named(inputs) {
        let read = reading::read(&input.path, LARGEST_DATA).map_err(RecordFault::Input)?;
        if read.sha256 != input.sha256 {
            return Err(RecordFault::Input(format!(
                "{} changed while the study was being read",
                input.path.display()
            )));
        }
        open.write(&format!("data/inputs/{name}"), &read.bytes)?;
    }
    Ok(())
}

/// Each input under the name of its file; where several of unlike bytes share it, the first digits of
/// theirs stand before it. Alike bytes under one name are kept once.
fn named(inputs: &[Input]) -> Vec<(String, &Input)> {
    let plain = |input: &Input| {
        let name = input.path.file_name().unwrap_or_default();
        // What lists of digests would have to escape.
        let escaped = |c: char| c.is_control() || matches!(c, '\\' | '%');
        name.to_string_lossy().replace(escaped, "_")
    };
    let mut all: Vec<(String, &Input)> = Vec::new();
    for input in inputs {
        let name = plain(input);
        let shared = inputs
            .iter()
            .any(|other| plain(other) == name && other.sha256 != input.sha256);
        let name = if shared {
            format!("{}-{name}", &input.sha256[..8])
        } else {
            name
        };
        if !all.iter().any(|(known, _)| *known == name) {
            all.push((name, input));
        }
    }
    all
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn unlike_files_of_one_name_are_kept_apart() {
        let input = |path: &str, digit: &str| Input {
            path: path.into(),
            sha256: digit.repeat(64),
        };
        let inputs = [
            input("a/t.csv", "1"),
            input("b/t.csv", "2"),
            input("c/u.csv", "3"),
            input("d/u.csv", "3"),
        ];
        let names: Vec<String> = named(&inputs).into_iter().map(|(name, _)| name).collect();
        assert_eq!(names, ["11111111-t.csv", "22222222-t.csv", "u.csv"]);
    }
}
