//! Mutations of text: bytes, words, lines, splices, and numbers at the edge.

use crate::input::{below, pick};
use odograph::random::Stream;
use std::collections::BTreeSet;

/// Longer inputs are cut: what is slow for its length alone is not looked for here.
const LONGEST: usize = 20_000;

/// Numbers and signs on which readers stumble.
const EDGES: [&str; 48] = [
    "0",
    "-0",
    "-1",
    "1e308",
    "1e309",
    "-1e308",
    "5e-324",
    "9007199254740993",
    "9223372036854775808",
    "1e18",
    "nan",
    "inf",
    "-inf",
    "NA",
    "1.",
    ".5",
    "1e",
    "0x",
    "0x7fffffffffffffff",
    "1_000",
    "\"",
    "'",
    "\"\"\"",
    "'''",
    "\\",
    "\\u",
    "\\U0010ffff",
    "\r",
    "\r\n",
    "\n",
    "\t",
    "\u{feff}",
    "\u{0}",
    "\u{e4}",
    "\u{301}",
    "\u{1f600}",
    "[",
    "]",
    "[[",
    "]]",
    "{",
    "}",
    "(",
    ")",
    ",",
    ".",
    "=",
    "#",
];

/// The words of the corpus.
pub struct Words(Vec<String>);

impl Words {
    pub fn of<'a>(texts: impl Iterator<Item = &'a String>) -> Words {
        let mut words = BTreeSet::new();
        for text in texts {
            let split = text.split(|c: char| !(c.is_alphanumeric() || c == '_'));
            words.extend(split.filter(|word| !word.is_empty()).map(str::to_string));
        }
        words.extend(EDGES.map(str::to_string));
        Words(words.into_iter().collect())
    }
}

/// `base` with one to six mutations; some take a piece of `other`.
pub fn mutate(base: &str, other: &str, words: &Words, stream: &mut Stream) -> String {
    let mut text = base.to_string();
    for _ in 0..=below(stream, 6) {
        text = once(&text, other, words, stream);
        if text.len() > LONGEST {
            text.truncate(edge(&text, LONGEST));
        }
    }
    text
}

fn once(text: &str, other: &str, words: &Words, stream: &mut Stream) -> String {
    let at = place(text, stream);
    let (before, behind) = text.split_at(at);
    match below(stream, 10) {
        // A character out, doubled or changed.
        0 => {
            let mut rest = behind.chars();
            rest.next();
            format!("{before}{}", rest.as_str())
        }
        1 => {
            let c = char::from_u32(stream.word() as u32 % 0x300).unwrap_or(' ');
            format!("{before}{c}{behind}")
        }
        // A word or an edge in, or in the place of one.
        2 => format!("{before}{}{behind}", pick(stream, &words.0)),
        3 | 4 => {
            let (start, end) = word_at(text, at);
            let new = match below(stream, 2) {
                0 => pick(stream, &words.0),
                _ => EDGES[below(stream, EDGES.len())],
            };
            format!("{}{new}{}", &text[..start], &text[end..])
        }
        // A piece out, doubled, or many times.
        5 | 6 => {
            let end = place(text, stream);
            let (start, end) = if at <= end { (at, end) } else { (end, at) };
            let piece = &text[start..end];
            match below(stream, 3) {
                0 => format!("{}{}", &text[..start], &text[end..]),
                1 => format!("{}{piece}{}", &text[..end], &text[end..]),
                _ => {
                    let short = &piece[..edge(piece, 12)];
                    let many = short.repeat(1 + below(stream, 200));
                    format!("{}{many}{}", &text[..end], &text[end..])
                }
            }
        }
        // A piece of another.
        7 => {
            let (start, end) = (place(other, stream), place(other, stream));
            let (start, end) = if start <= end {
                (start, end)
            } else {
                (end, start)
            };
            format!("{before}{}{behind}", &other[start..end])
        }
        // The head of one, the tail of another.
        8 => format!("{before}{}", &other[place(other, stream)..]),
        // Two lines the other way round.
        _ => {
            let mut lines: Vec<&str> = text.split('\n').collect();
            let (i, j) = (below(stream, lines.len()), below(stream, lines.len()));
            lines.swap(i, j);
            lines.join("\n")
        }
    }
}

/// A place between two characters.
fn place(text: &str, stream: &mut Stream) -> usize {
    edge(text, below(stream, text.len() + 1))
}

/// The last place between characters up to `at`.
fn edge(text: &str, at: usize) -> usize {
    let mut at = at.min(text.len());
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

/// The word around a place.
fn word_at(text: &str, at: usize) -> (usize, usize) {
    let inside = |c: char| c.is_alphanumeric() || c == '_' || c == '.';
    let start = at
        - text[..at]
            .chars()
            .rev()
            .take_while(|&c| inside(c))
            .map(char::len_utf8)
            .sum::<usize>();
    let end = at
        + text[at..]
            .chars()
            .take_while(|&c| inside(c))
            .map(char::len_utf8)
            .sum::<usize>();
    (start, end)
}
