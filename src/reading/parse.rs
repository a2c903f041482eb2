//! TOML text to a tree of spanned values; every syntax fault in one go.

use crate::place::{Fault, Faults, Place, Source, Text};
use crate::reading::section::Section;
use crate::reading::slips;
use crate::reading::string::offsets;
use crate::reading::value::{Content, Entry, Tree, Value};
use std::collections::{BTreeMap, BTreeSet};
use std::ops::Range;
use std::sync::Arc;
use toml::Spanned;
use toml::de::{DeArray, DeInteger, DeTable, DeValue};

/// Reads a whole TOML file. What can be read in spite of faults is given, so that reading can go on.
pub fn parse(source: &Arc<Source>, faults: &mut Faults) -> Section {
    let (table, errors) = DeTable::parse_recoverable(&source.text);
    let damaged = !errors.is_empty();
    // Of the faults on one line all but the first follow from it, as a rule; one with advice tells most.
    let mut lines: BTreeMap<usize, Fault> = BTreeMap::new();
    let (mut looked, mut unquoted_lines) = (BTreeSet::new(), BTreeSet::new());
    // What stands behind a brace left open is read as if it stood in the braces.
    let open = errors
        .iter()
        .any(|error| error.message().starts_with("unclosed inline table"))
        .then(|| slips::open_brace(&source.text))
        .flatten();
    if let Some(brace) = open {
        lines.insert(line_of(source, brace), left_open(source, brace));
    }
    for error in errors {
        let span = error.span().unwrap_or(0..0);
        let line = line_of(source, span.start);
        // Looked for once a line, which may hold as many faults as bytes.
        if looked.insert(line)
            && let Some(fault) = unquoted(source, span.start)
        {
            lines.insert(line, fault);
            unquoted_lines.insert(line);
        }
        if unquoted_lines.contains(&line) {
            continue;
        }
        if open.is_some_and(|brace| brace <= span.start) {
            continue;
        }
        let fault = syntax(source, span, error.message());
        match lines.get(&line) {
            Some(kept) if kept.help.is_some() || fault.help.is_none() => {}
            _ => {
                lines.insert(line, fault);
            }
        }
    }
    for fault in lines.into_values() {
        faults.push(fault);
    }
    let whole = place(source, 0..0);
    let reader = Reader { source, damaged };
    let tree = reader.tree("", table.get_ref(), false, faults);
    Section::new(String::new(), whole, Arc::new(tree), false)
}

/// The number of a line, from 0.
fn line_of(source: &Source, at: usize) -> usize {
    source.text[..at].matches('\n').count()
}

fn left_open(source: &Arc<Source>, brace: usize) -> Fault {
    Fault::at(place(source, brace..brace + 1), "this brace is not closed")
        .label("opened here")
        .help("a table in braces ends with `}`, as in { law = \"…\", per = 4 }")
}

/// The fault of the line with this byte, if a value stands there that is text without quotes.
fn unquoted(source: &Arc<Source>, at: usize) -> Option<Fault> {
    let text = &source.text;
    let start = text[..at].rfind('\n').map_or(0, |end| end + 1);
    let end = text[at..].find('\n').map_or(text.len(), |more| at + more);
    let slip = slips::unquoted(text, start..end)?;
    let written = &text[slip.value.clone()];
    let quote = if written.contains('"') { '\'' } else { '"' };
    let fault = Fault::at(place(source, slip.value.clone()), "text without quotes")
        .label("text stands in quotes")
        .help(format!("write {} = {quote}{written}{quote}", slip.key));
    Some(fault)
}

/// A fault of syntax, with plainer words and help for the slips that are made most.
fn syntax(source: &Arc<Source>, span: Range<usize>, message: &str) -> Fault {
    let written = source.text.get(span.clone()).unwrap_or("").trim();
    let at = |what: String| Fault::at(place(source, span.clone()), what);
    let begins = |words: &str| message.starts_with(words);
    if begins("duplicate key") {
        let line = source.text[..span.start].rfind('\n').map_or(0, |at| at + 1);
        let header = source.text[line..].trim_start().starts_with('[');
        let help = if header {
            format!(
                "several tables of one name are written [[{written}]]; one table has one header"
            )
        } else {
            "a table has each key once".into()
        };
        return at(format!("`{written}` stands here a second time"))
            .label("there is one already")
            .help(help);
    }
    let (what, label, help) = if begins("string values must be quoted") && written.is_empty() {
        (
            "a value is missing",
            "a value belongs here",
            "text stands in quotes",
        )
    } else if begins("string values must be quoted") {
        (
            "text without quotes",
            "text stands in quotes",
            "numbers, true and false stand without",
        )
    } else if begins("key with no value") {
        (
            "a key without a value",
            "`=` and a value belong here",
            "each line is `key = value`, a header such as [model], or a comment after `#`",
        )
    } else if begins("invalid basic string, expected `\"`") {
        (
            "text that does not end on its line",
            "a closing quote belongs here",
            "text of several lines stands between three quotes on each side",
        )
    } else if begins("unexpected key or value") {
        (
            "something more on a line that is complete",
            "the line should end before this",
            "each key stands on a line of its own; text with quotes in it stands in quotes of the other kind",
        )
    } else {
        return at(format!("this is not TOML: {message}")).label("here");
    };
    at(what.into()).label(label).help(help)
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
