//! Inputs by number: a sound formula, data file or study of the house, mutated.

use crate::mutate::{Words, mutate};
use odograph::cli::FAMILIES;
use odograph::formula;
use odograph::place::{Faults, Look, Source, Text, show};
use odograph::random::{Purpose, Stream};
use odograph::reading::{Files, Table};
use odograph::study::resolve_text;
use std::fmt;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::Arc;

#[derive(Clone)]
pub enum Input {
    Formula(String),
    Data(String),
    Study(String),
}

impl Input {
    pub fn kind(&self) -> usize {
        match self {
            Input::Formula(_) => 0,
            Input::Data(_) => 1,
            Input::Study(_) => 2,
        }
    }

    /// Reads it and shows what is wrong with it.
    pub fn read(&self, folder: &Path) {
        match self {
            Input::Formula(text) => {
                let mut faults = Faults::default();
                let text = Text::bare(text);
                if let Some(expression) = formula::parse(&text, &mut faults) {
                    let printed = Text::bare(&expression.to_string());
                    let again = formula::parse(&printed, &mut faults).expect("as printed");
                    assert_eq!(again.to_string(), printed.text, "printed and read again");
                }
                show(&faults.sorted(), Look::PLAIN);
            }
            Input::Data(text) => {
                if let Err(faults) = Table::bare("t", text) {
                    assert!(!faults.is_empty());
                    show(&faults.sorted(), Look::PLAIN);
                }
            }
            Input::Study(text) => {
                let source = Arc::new(Source {
                    name: "study.toml".into(),
                    text: text.clone(),
                });
                match resolve_text(source, &Files::Folder(folder.into()), &FAMILIES) {
                    Ok(plan) => {
                        plan.json().canonical();
                    }
                    Err(faults) => {
                        assert!(!faults.is_empty());
                        show(&faults, Look::PLAIN);
                    }
                }
            }
        }
    }
}

impl fmt::Display for Input {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Input::Formula(text) => write!(f, "formula: {text:?}"),
            Input::Data(text) => write!(f, "data file: {text:?}"),
            Input::Study(text) => write!(f, "study:\n{text}"),
        }
    }
}

/// Sound inputs, and the words they are made of.
pub struct Corpus {
    studies: Vec<String>,
    data: Vec<String>,
    formulas: Vec<String>,
    words: Words,
}

impl Corpus {
    /// From the studies that the house ships and the broken ones it keeps.
    pub fn gather(root: &Path) -> Corpus {
        let mut studies = files(&root.join("manifests"), "toml");
        studies.extend(files(&root.join("tests/faults"), "toml"));
        let mut data = files(&root.join("manifests/data"), "csv");
        data.extend(files(&root.join("tests/faults/data"), "csv"));
        assert!(!studies.is_empty() && !data.is_empty());
        let formulas: Vec<String> = studies
            .iter()
            .flat_map(|study| study.split(['"', '\'']).skip(1).step_by(2))
            .filter(|text| !text.is_empty() && text.len() < 300)
            .map(str::to_string)
            .collect();
        let words = Words::of(studies.iter().chain(&data));
        Corpus {
            studies,
            data,
            formulas,
            words,
        }
    }

    pub fn input(&self, series: u64, number: u64) -> Input {
        let mut key = [0; 32];
        key[..8].copy_from_slice(&series.to_le_bytes());
        key[8..16].copy_from_slice(&number.to_le_bytes());
        let mut stream = Stream::new(&key, Purpose::Test);
        let (kind, from): (fn(String) -> Input, &[String]) = match number % 20 {
            0..=15 => (Input::Formula, &self.formulas),
            16 | 17 => (Input::Data, &self.data),
            _ => (Input::Study, &self.studies),
        };
        let base = pick(&mut stream, from);
        let other = pick(&mut stream, from);
        kind(mutate(base, other, &self.words, &mut stream))
    }
}

/// One of a list.
pub fn pick<'a>(stream: &mut Stream, list: &'a [String]) -> &'a str {
    &list[below(stream, list.len())]
}

/// A number below `n` (at least 1), near enough to even for this purpose.
pub fn below(stream: &mut Stream, n: usize) -> usize {
    (stream.word() % n as u64) as usize
}

fn files(folder: &Path, extension: &str) -> Vec<String> {
    let Ok(entries) = fs::read_dir(folder) else {
        return Vec::new();
    };
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("a readable folder").path())
        .filter(|path| path.extension().is_some_and(|e| e == extension))
        .collect();
    paths.sort();
    // Those that are broken as bytes are not text to be mutated.
    paths
        .iter()
        .filter_map(|path| fs::read_to_string(path).ok())
        .collect()
}
