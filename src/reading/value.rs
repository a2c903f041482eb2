//! A TOML value with its place, and the ways to ask it what it is.

use crate::place::{Fault, Faults, Place, Source, Text, nearest};
use crate::reading::Section;
use std::ops::RangeInclusive;
use std::sync::Arc;

/// A value of a study file: where it stands, what it is called in messages, what it holds.
#[derive(Debug, Clone, PartialEq)]
pub struct Value {
    /// Dotted path for messages: `model.unknown.a.per`, `sweep.axis."model.coupling"[2]`.
    pub path: String,
    pub place: Place,
    pub content: Content,
}

#[derive(Debug, Clone, PartialEq)]
pub enum Content {
    Text(Text),
    Integer(i64),
    Number(f64),
    Boolean(bool),
    List(Vec<Value>),
    Tree(Arc<Tree>),
    /// A date or a time, which no key of a study takes.
    Date,
    /// Could not be read; the fault has been recorded, and no getter adds another.
    Broken,
}

/// A TOML table: its entries in the order of the file.
#[derive(Debug, Clone, PartialEq)]
pub struct Tree {
    pub entries: Vec<Entry>,
    /// Written between braces rather than under a header.
    pub inline: bool,
    /// Its file has faults of syntax, so that keys may be missing which were written.
    pub damaged: bool,
}

#[derive(Debug, Clone, PartialEq)]
pub struct Entry {
    pub key: Text,
    pub value: Value,
}

impl Tree {
    pub fn get(&self, key: &str) -> Option<&Entry> {
        self.entries.iter().find(|entry| entry.key.text == key)
    }
}

impl Value {
    /// What the value is, in words for a message.
    pub fn kind(&self) -> &'static str {
        match &self.content {
            Content::Text(_) => "text",
            Content::Integer(_) | Content::Number(_) => "a number",
            Content::Boolean(_) => "true or false",
            Content::List(list) if list.iter().any(Value::is_table) => "an array of tables",
            Content::List(_) => "a list",
            Content::Tree(_) => "a table",
            Content::Date => "a date or time",
            Content::Broken => "unreadable",
        }
    }

    pub fn is_text(&self) -> bool {
        matches!(self.content, Content::Text(_))
    }
    pub fn is_number(&self) -> bool {
        matches!(self.content, Content::Integer(_) | Content::Number(_))
    }
    pub fn is_list(&self) -> bool {
        matches!(self.content, Content::List(_))
    }
    pub fn is_table(&self) -> bool {
        matches!(self.content, Content::Tree(_))
    }

    /// Records that the value is not what is wanted: "must be {wanted}, not {kind}". Silent for a value
    /// whose fault is known already.
    pub fn refuse(&self, wanted: &str, faults: &mut Faults) {
        if !matches!(self.content, Content::Broken) {
            let kind = self.kind();
            faults.push(
                Fault::at(
                    self.place.clone(),
                    format!("`{}` must be {wanted}, not {kind}", self.path),
                )
                .label(format!("this is {kind}")),
            );
        }
    }

    /// Text.
    pub fn text(&self, faults: &mut Faults) -> Option<Text> {
        if let Content::Text(text) = &self.content {
            return Some(text.clone());
        }
        self.refuse("text in quotes", faults);
        None
    }

    /// A finite number; whole numbers are numbers too. NaN and infinities are refused.
    pub fn number(&self, faults: &mut Faults) -> Option<f64> {
        match self.content {
            Content::Integer(n) => Some(n as f64),
            Content::Number(x) if x.is_finite() => Some(x),
            Content::Number(_) => {
                faults.push(
                    Fault::at(
                        self.place.clone(),
                        format!("`{}` must be a finite number", self.path),
                    )
                    .label("not finite"),
                );
                None
            }
            _ => {
                self.refuse("a number", faults);
                None
            }
        }
    }

    /// A finite number above 0.
    pub fn positive(&self, faults: &mut Faults) -> Option<f64> {
        let x = self.number(faults)?;
        if x > 0.0 {
            return Some(x);
        }
        faults.push(
            Fault::at(
                self.place.clone(),
                format!("`{}` must be above 0", self.path),
            )
            .label("not above 0"),
        );
        None
    }

    /// A whole number in a range. `2000.0` and `2e3` are whole numbers as well.
    pub fn count(&self, range: RangeInclusive<u64>, faults: &mut Faults) -> Option<u64> {
        const EXACT: f64 = 9007199254740992.0;
        let refused = |wanted: &str, given: String, faults: &mut Faults| {
            faults.push(
                Fault::at(
                    self.place.clone(),
                    format!(
                        "`{}` must be a whole number{wanted}, not {given}",
                        self.path
                    ),
                )
                .label("not such a number"),
            );
            None
        };
        let whole = match self.content {
            Content::Integer(n) => i128::from(n),
            Content::Number(x) if x.floor() == x && x.abs() <= EXACT => x as i128,
            Content::Number(x) => return refused("", x.to_string(), faults),
            _ => {
                self.refuse("a whole number", faults);
                return None;
            }
        };
        let (low, high) = (*range.start(), *range.end());
        if i128::from(low) <= whole && whole <= i128::from(high) {
            return Some(whole as u64);
        }
        let wanted = if high >= EXACT as u64 - 1 && whole < i128::from(low) {
            format!(", {low} or more")
        } else {
            format!(" from {low} to {high}")
        };
        refused(&wanted, whole.to_string(), faults)
    }

    /// `true` or `false`.
    pub fn boolean(&self, faults: &mut Faults) -> Option<bool> {
        if let Content::Boolean(value) = self.content {
            return Some(value);
        }
        self.refuse("true or false, without quotes", faults);
        None
    }

    /// A list.
    pub fn list(&self, faults: &mut Faults) -> Option<Vec<Value>> {
        if let Content::List(list) = &self.content {
            return Some(list.clone());
        }
        self.refuse("a list in square brackets", faults);
        None
    }

    /// A list of texts. Elements that are not text are recorded, the others given.
    pub fn texts(&self, faults: &mut Faults) -> Option<Vec<Text>> {
        let list = self.list(faults)?;
        Some(list.iter().filter_map(|item| item.text(faults)).collect())
    }

    /// A list of finite numbers. `None` if one of them is not.
    pub fn numbers(&self, faults: &mut Faults) -> Option<Vec<f64>> {
        let list = self.list(faults)?;
        let read: Vec<_> = list.iter().map(|item| item.number(faults)).collect();
        read.into_iter().collect()
    }

    /// A table.
    pub fn section(&self, faults: &mut Faults) -> Option<Section> {
        if let Content::Tree(tree) = &self.content {
            return Some(Section::new(
                self.path.clone(),
                self.place.clone(),
                tree.clone(),
                false,
            ));
        }
        self.refuse("a table", faults);
        None
    }

    /// One of these words.
    pub fn word<'w>(&self, words: &[&'w str], faults: &mut Faults) -> Option<&'w str> {
        let Content::Text(text) = &self.content else {
            self.refuse(&listed(words, "or"), faults);
            return None;
        };
        if let Some(word) = words.iter().find(|word| **word == text.text) {
            return Some(word);
        }
        let mut fault = Fault::at(
            self.place.clone(),
            format!("`{}` cannot be `{}`", self.path, text.text),
        )
        .label("not known here");
        let choice = listed(words, "or");
        fault = match nearest(&text.text, words.iter().copied()) {
            Some(near) if words.len() == 1 => fault.help(format!("did you mean `{near}`?")),
            Some(near) => fault.help(format!("did you mean `{near}`? It can be {choice}")),
            None => fault.help(format!("it can be {choice}")),
        };
        faults.push(fault);
        None
    }

    /// The place of the value's source.
    pub fn source(&self) -> &Arc<Source> {
        &self.place.source
    }
}

/// `a`, `b` or `c`; a long list is cut.
pub(crate) fn listed(words: &[&str], joined: &str) -> String {
    const SHOWN: usize = 20;
    let mut quoted: Vec<String> = words
        .iter()
        .take(SHOWN)
        .map(|word| format!("`{word}`"))
        .collect();
    if words.len() > SHOWN {
        quoted.push(format!("{} more", words.len() - SHOWN));
    }
    match quoted.split_last() {
        None => String::new(),
        Some((only, [])) => only.clone(),
        Some((last, rest)) => format!("{} {joined} {last}", rest.join(", ")),
    }
}
