//! TOML text to a tree of spanned values; every syntax fault in one go.

use crate::place::{Fault, Faults, Place, Source, Text};
use crate::reading::section::Section;
use crate::reading::string::offsets;
use crate::reading::value::{Content, Entry, Tree, Value};
use std::ops::Range;
use std::sync::Arc;
use toml::Spanned;
use toml::de::{DeArray, DeInteger, DeTable, DeValue};

/// Reads a whole TOML file. What can be read in spite of faults is given, so that reading can go on.
pub fn parse(source: &Arc<Source>, faults: &mut Faults) -> Section {
    let (table, errors) = DeTable::parse_recoverable(&source.text);
    let damaged = !errors.is_empty();
    for error in errors {
        let place = place(source, error.span().unwrap_or(0..0));
        faults
            .push(Fault::at(place, format!("this is not TOML: {}", error.message())).label("here"));
    }
    let whole = place(source, 0..0);
    let reader = Reader { source, damaged };
    let tree = reader.tree("", table.get_ref(), false, faults);
    Section::new(String::new(), whole, Arc::new(tree), false)
}

fn place(source: &Arc<Source>, span: Range<usize>) -> Place {
    Place {
        source: source.clone(),
        span,
    }
}

struct Reader<'a> {
    source: &'a Arc<Source>,
    damaged: bool,
}

impl Reader<'_> {
    fn tree(&self, path: &str, table: &DeTable<'_>, inline: bool, faults: &mut Faults) -> Tree {
        let mut entries: Vec<Entry> = Vec::with_capacity(table.len());
        for (key, value) in table.iter() {
            let key = text(self.source, key.get_ref(), key.span());
            let path = extend(path, &key.text);
            let value = self.value(path, value, faults);
            entries.push(Entry { key, value });
        }
        entries.sort_by_key(|entry| entry.key.place.span.start);
        Tree {
            entries,
            inline,
            damaged: self.damaged,
        }
    }

    fn value(&self, path: String, value: &Spanned<DeValue<'_>>, faults: &mut Faults) -> Value {
        let span = value.span();
        let here = place(self.source, span.clone());
        let content = match value.get_ref() {
            DeValue::String(decoded) => Content::Text(text(self.source, decoded, span)),
            DeValue::Integer(integer) => whole(integer, &path, &here, faults),
            DeValue::Float(float) => real(float.as_str(), &path, &here, faults),
            DeValue::Boolean(value) => Content::Boolean(*value),
            DeValue::Datetime(_) => Content::Date,
            DeValue::Array(array) => Content::List(self.list(&path, array, faults)),
            DeValue::Table(table) => {
                let written = self.source.text.get(span.start..).unwrap_or("");
                let inline = written.starts_with('{');
                Content::Tree(Arc::new(self.tree(&path, table, inline, faults)))
            }
        };
        Value {
            path,
            place: here,
            content,
        }
    }

    fn list(&self, path: &str, array: &DeArray<'_>, faults: &mut Faults) -> Vec<Value> {
        let numbered = |i: usize| format!("{path}[{}]", i + 1);
        array
            .iter()
            .enumerate()
            .map(|(i, item)| self.value(numbered(i), item, faults))
            .collect()
    }
}

/// `path.key`, with the key in quotes where it would not do without.
fn extend(path: &str, key: &str) -> String {
    let bare = !key.is_empty()
        && key
            .chars()
            .all(|c| c.is_ascii_alphanumeric() || c == '_' || c == '-');
    let key = if bare {
        key.to_string()
    } else {
        format!("{key:?}")
    };
    if path.is_empty() {
        key
    } else {
        format!("{path}.{key}")
    }
}

fn text(source: &Arc<Source>, decoded: &str, span: Range<usize>) -> Text {
    let raw = source.text.get(span.clone()).unwrap_or("");
    let offsets = offsets(raw, decoded)
        .map(|list| list.into_iter().map(|at| at + span.start).collect())
        .unwrap_or_default();
    Text {
        text: decoded.to_string(),
        place: place(source, span),
        offsets,
    }
}

fn whole(integer: &DeInteger<'_>, path: &str, here: &Place, faults: &mut Faults) -> Content {
    match i64::from_str_radix(integer.as_str(), integer.radix()) {
        Ok(value) => Content::Integer(value),
        Err(_) => {
            faults.push(
                Fault::at(
                    here.clone(),
                    format!("`{path}` does not fit into 64 bits with a sign"),
                )
                .label("too large a whole number")
                .help("write it as a decimal such as 1e20 if a rounded number will do, or as text if it is a seed"),
            );
            Content::Broken
        }
    }
}

fn real(written: &str, path: &str, here: &Place, faults: &mut Faults) -> Content {
    match written.parse::<f64>() {
        Ok(value) if value.is_infinite() && !written.contains("inf") => {
            faults.push(
                Fault::at(
                    here.clone(),
                    format!("`{path}` is beyond the largest double"),
                )
                .label("too large"),
            );
            Content::Broken
        }
        Ok(value) => Content::Number(value),
        Err(_) => {
            faults.push(Fault::at(here.clone(), format!("`{path}` is not a number")));
            Content::Broken
        }
    }
}
