//! Putting a value at a dotted path of a study; entries of an array of tables go by their name.

use crate::place::{Place, Text, nearest};
use crate::reading::{Content, Entry, Tree, Value};
use std::sync::Arc;

/// The segments of a dotted path; a segment in double quotes may hold dots. `None` if it is malformed.
pub(super) fn segments(path: &str) -> Option<Vec<String>> {
    let mut segments = Vec::new();
    let mut rest = path;
    loop {
        let (segment, behind) = match rest.strip_prefix('"') {
            Some(quoted) => quoted.split_once('"')?,
            None => rest.split_at(rest.find('.').unwrap_or(rest.len())),
        };
        if segment.is_empty() {
            return None;
        }
        segments.push(segment.to_string());
        match behind.strip_prefix('.') {
            Some(next) => rest = next,
            None => return behind.is_empty().then_some(segments),
        }
    }
}

/// What a path leads to in a study.
pub(super) enum Found<'a> {
    Entry(&'a Entry),
    /// The entry of an array of tables.
    Element(&'a Value),
    /// No such key in this table; what goes before is there.
    Absent {
        depth: usize,
        known: Vec<&'a str>,
        /// The missing key is the last of the path.
        last: bool,
    },
    /// What stands before this segment is not a table.
    Through {
        depth: usize,
        place: &'a Place,
    },
}

pub(super) fn find<'a>(tree: &'a Tree, path: &[String]) -> Found<'a> {
    let mut tree = tree;
    let mut depth = 0;
    loop {
        let Some(entry) = tree.get(&path[depth]) else {
            return Found::Absent {
                depth,
                known: tree.entries.iter().map(|e| e.key.text.as_str()).collect(),
                last: depth + 1 == path.len(),
            };
        };
        depth += 1;
        if depth == path.len() {
            return Found::Entry(entry);
        }
        tree = match &entry.value.content {
            Content::Tree(tree) => tree,
            Content::List(list) if list.iter().all(Value::is_table) => {
                let Some(element) = list.iter().find(|e| name(e) == Some(&path[depth])) else {
                    return Found::Absent {
                        depth,
                        known: list.iter().filter_map(name).collect(),
                        last: false,
                    };
                };
                depth += 1;
                if depth == path.len() {
                    return Found::Element(element);
                }
                match &element.content {
                    Content::Tree(tree) => tree,
                    _ => {
                        return Found::Through {
                            depth,
                            place: &element.place,
                        };
                    }
                }
            }
            _ => {
                return Found::Through {
                    depth,
                    place: &entry.value.place,
                };
            }
        };
    }
}

/// The name of an entry of an array of tables.
pub(super) fn name(element: &Value) -> Option<&str> {
    let Content::Tree(tree) = &element.content else {
        return None;
    };
    match &tree.get("name")?.value.content {
        Content::Text(text) => Some(&text.text),
        _ => None,
    }
}

/// The study with a value at a path, or (`None`) without what stands there. The path has been found to
/// lead somewhere, or to a key that is missing in tables that may take it; missing tables are made.
pub(super) fn put(tree: &Tree, path: &[String], value: Option<&Value>, key: &Text) -> Tree {
    let mut changed = tree.clone();
    let at = changed
        .entries
        .iter()
        .position(|entry| entry.key.text == path[0]);
    let (first, rest) = (&path[0], &path[1..]);
    if rest.is_empty() {
        match (at, value) {
            (Some(at), Some(value)) => changed.entries[at].value = value.clone(),
            (Some(at), None) => {
                changed.entries.remove(at);
            }
            (None, Some(value)) => changed.entries.push(entry(first, key, value.clone())),
            (None, None) => (),
        }
        return changed;
    }
    let Some(at) = at else {
        if let Some(value) = value {
            let empty = Tree {
                entries: Vec::new(),
                inline: false,
                damaged: tree.damaged,
            };
            let inner = put(&empty, rest, Some(value), key);
            let table = Value {
                path: first.clone(),
                place: key.place.clone(),
                content: Content::Tree(Arc::new(inner)),
            };
            changed.entries.push(entry(first, key, table));
        }
        return changed;
    };
    let place = &mut changed.entries[at].value;
    match &mut place.content {
        Content::Tree(inner) => *inner = Arc::new(put(inner, rest, value, key)),
        Content::List(list) => {
            let element = list.iter().position(|e| name(e) == Some(&rest[0]));
            match (element, rest.len()) {
                (Some(element), 1) => match value {
                    Some(value) => list[element] = value.clone(),
                    None => {
                        list.remove(element);
                    }
                },
                (Some(element), _) => {
                    if let Content::Tree(inner) = &mut list[element].content {
                        *inner = Arc::new(put(inner, &rest[1..], value, key));
                    }
                }
                (None, _) => (),
            }
        }
        _ => (),
    }
    changed
}

fn entry(name: &str, key: &Text, value: Value) -> Entry {
    Entry {
        key: Text {
            text: name.to_string(),
            place: key.place.clone(),
            offsets: Vec::new(),
        },
        value,
    }
}

/// The known name nearest to a segment.
pub(super) fn near<'a>(segment: &str, known: &[&'a str]) -> Option<&'a str> {
    nearest(segment, known.iter().copied())
}
