//! A TOML table asked key by key; the keys nobody asked for are faults.

use crate::place::{Fault, Faults, Place, Text, nearest};
use crate::reading::value::{Content, Entry, Tree, Value, listed};
use std::cell::RefCell;
use std::collections::BTreeSet;
use std::ops::RangeInclusive;
use std::sync::Arc;

/// A table of a study. Each getter takes a key, records what is wrong with its value and goes on; `None`
/// means that the key is absent, or that its fault has been recorded. [`Section::finish`] then reports the
/// keys that no getter was asked for.
#[derive(Debug, Clone)]
pub struct Section {
    path: String,
    place: Place,
    tree: Arc<Tree>,
    /// An element of an array of tables.
    element: bool,
    asked: RefCell<BTreeSet<String>>,
}

impl Section {
    pub(super) fn new(path: String, place: Place, tree: Arc<Tree>, element: bool) -> Section {
        Section {
            path,
            place,
            tree,
            element,
            asked: RefCell::default(),
        }
    }

    /// True if the file has faults of syntax: keys may be missing which were written.
    pub fn damaged(&self) -> bool {
        self.tree.damaged
    }

    /// The same section with another table beneath (swept values in place), asked for nothing yet.
    pub fn with(&self, tree: Arc<Tree>) -> Section {
        Section {
            tree,
            asked: RefCell::default(),
            ..self.clone()
        }
    }

    /// Dotted path; empty for the whole file.
    pub fn path(&self) -> &str {
        &self.path
    }

    /// Its header, or the whole of it if it is written between braces.
    pub fn place(&self) -> &Place {
        &self.place
    }

    /// The table beneath, unasked.
    pub fn tree(&self) -> &Arc<Tree> {
        &self.tree
    }

    /// What it is called in messages: `the study`, `[sampler]`, `[[sampler.step]]`, `` `goal` ``.
    pub fn called(&self) -> String {
        if self.path.is_empty() {
            "the study".into()
        } else if self.tree.inline {
            format!("`{}`", self.path)
        } else if self.element {
            format!("[[{}]]", self.path)
        } else {
            format!("[{}]", self.path)
        }
    }

    /// True if the key is there. Counts as asking for it.
    pub fn has(&self, key: &str) -> bool {
        self.entry(key).is_some()
    }

    /// The place of a key (not of its value). Counts as asking for it.
    pub fn key_place(&self, key: &str) -> Option<Place> {
        self.entry(key).map(|entry| entry.key.place.clone())
    }

    fn entry(&self, key: &str) -> Option<&Entry> {
        self.asked.borrow_mut().insert(key.to_string());
        self.tree.get(key)
    }

    /// The value of a key, whatever it is.
    pub fn value(&self, key: &str) -> Option<Value> {
        self.entry(key).map(|entry| entry.value.clone())
    }

    /// The value of a key that must be there; `meaning` says what it is: "the law of the unknown".
    pub fn need(&self, key: &str, meaning: &str, faults: &mut Faults) -> Option<Value> {
        let found = self.value(key);
        if found.is_none() && !self.damaged() {
            let unasked = |entry: &&Entry| !self.asked.borrow().contains(&entry.key.text);
            let slips = self.tree.entries.iter().filter(unasked);
            let slip = slips
                .clone()
                .find(|entry| nearest(&entry.key.text, [key]).is_some());
            if let Some(slip) = slip {
                self.asked.borrow_mut().insert(slip.key.text.clone());
                let what = format!("`{}` is not a key of {}", slip.key.text, self.called());
                let fault = Fault::at(slip.key.place.clone(), what).label("unknown key");
                faults.push(fault.help(format!("did you mean `{key}`?")));
                return None;
            }
            let fault = Fault::at(
                self.place.clone(),
                format!("{} needs `{key}`", self.called()),
            )
            .label(format!("without `{key}`"))
            .help(format!("add `{key}`: {meaning}"));
            faults.push(fault);
        }
        found
    }

    pub fn text(&self, key: &str, faults: &mut Faults) -> Option<Text> {
        self.value(key)?.text(faults)
    }
    pub fn number(&self, key: &str, faults: &mut Faults) -> Option<f64> {
        self.value(key)?.number(faults)
    }
    pub fn positive(&self, key: &str, faults: &mut Faults) -> Option<f64> {
        self.value(key)?.positive(faults)
    }
    pub fn count(&self, key: &str, range: RangeInclusive<u64>, faults: &mut Faults) -> Option<u64> {
        self.value(key)?.count(range, faults)
    }
    pub fn boolean(&self, key: &str, faults: &mut Faults) -> Option<bool> {
        self.value(key)?.boolean(faults)
    }
    pub fn list(&self, key: &str, faults: &mut Faults) -> Option<Vec<Value>> {
        self.value(key)?.list(faults)
    }
    pub fn texts(&self, key: &str, faults: &mut Faults) -> Option<Vec<Text>> {
        self.value(key)?.texts(faults)
    }
    pub fn word<'w>(&self, key: &str, words: &[&'w str], faults: &mut Faults) -> Option<&'w str> {
        self.value(key)?.word(words, faults)
    }
    pub fn section(&self, key: &str, faults: &mut Faults) -> Option<Section> {
        self.value(key)?.section(faults)
    }

    /// The tables of an array of tables (`[[key]]`); none if the key is absent.
    pub fn sections(&self, key: &str, faults: &mut Faults) -> Vec<Section> {
        let Some(value) = self.value(key) else {
            return Vec::new();
        };
        let header = if self.path.is_empty() {
            key.to_string()
        } else {
            format!("{}.{key}", self.path)
        };
        match &value.content {
            Content::List(list) => {
                let mut sections = Vec::new();
                for item in list {
                    match &item.content {
                        Content::Tree(tree) => sections.push(Section::new(
                            header.clone(),
                            item.place.clone(),
                            tree.clone(),
                            true,
                        )),
                        _ => item.refuse("a table", faults),
                    }
                }
                sections
            }
            Content::Tree(_) => {
                faults.push(
                    Fault::at(
                        value.place.clone(),
                        format!("`{header}` must be an array of tables"),
                    )
                    .label("a single table")
                    .help(format!(
                        "write [[{header}]], with two brackets on each side"
                    )),
                );
                Vec::new()
            }
            _ => {
                value.refuse(&format!("an array of tables, written [[{header}]]"), faults);
                Vec::new()
            }
        }
    }

    /// All keys with their values, in order of name. Counts as asking for every one.
    pub fn entries(&self) -> Vec<(Text, Value)> {
        let mut entries: Vec<(Text, Value)> = self
            .tree
            .entries
            .iter()
            .map(|entry| (entry.key.clone(), entry.value.clone()))
            .collect();
        entries.sort_by(|a, b| a.0.text.cmp(&b.0.text));
        let mut asked = self.asked.borrow_mut();
        for (key, _) in &entries {
            asked.insert(key.text.clone());
        }
        entries
    }

    /// Records every key that no getter was asked for, each with the nearest one that is known here. Silent
    /// in a file with faults of syntax, where keys may have ended up in the wrong table.
    pub fn finish(&self, faults: &mut Faults) {
        if self.damaged() {
            return;
        }
        let asked = self.asked.borrow();
        let known: Vec<&str> = asked.iter().map(String::as_str).collect();
        for entry in &self.tree.entries {
            let key = &entry.key.text;
            if asked.contains(key) {
                continue;
            }
            let mut fault = Fault::at(
                entry.key.place.clone(),
                format!("`{key}` is not a key of {}", self.called()),
            )
            .label("unknown key");
            if let Some(near) = nearest(key, known.iter().copied()) {
                fault = fault.help(format!("did you mean `{near}`?"));
            } else if !known.is_empty() {
                fault = fault.help(format!("keys known here: {}", listed(&known, "and")));
            }
            faults.push(fault);
        }
    }
}
