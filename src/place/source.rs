//! Files as read, and places in them: lines and columns from 1, columns in characters.

use std::ops::Range;
use std::sync::Arc;

/// A file as read: the name it is called by in messages, and its text (without a byte order mark).
#[derive(Debug, PartialEq, Eq)]
pub struct Source {
    pub name: String,
    pub text: String,
}

impl Source {
    /// The bytes of a line (from 1), without its line end. Empty past the last line.
    pub fn line(&self, number: usize) -> Range<usize> {
        let text = self.text.as_bytes();
        let mut start = 0;
        for _ in 1..number {
            match text[start..].iter().position(|&b| b == b'\n') {
                Some(at) => start += at + 1,
                None => return text.len()..text.len(),
            }
        }
        let end = text[start..]
            .iter()
            .position(|&b| b == b'\n')
            .map_or(text.len(), |at| start + at);
        let carriage = end > start && text[end - 1] == b'\r' && end < text.len();
        start..end - usize::from(carriage)
    }
}

/// A range of bytes in a source.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Place {
    pub source: Arc<Source>,
    pub span: Range<usize>,
}

impl Place {
    /// Line and column of the first character, both from 1; columns count characters.
    pub fn line_column(&self) -> (usize, usize) {
        let text = &self.source.text;
        let mut at = self.span.start.min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        let before = &text[..at];
        let line = before.bytes().filter(|&b| b == b'\n').count() + 1;
        let start = before.rfind('\n').map_or(0, |newline| newline + 1);
        (line, before[start..].chars().count() + 1)
    }

    /// True if `other` lies within this place.
    pub fn holds(&self, other: &Place) -> bool {
        Arc::ptr_eq(&self.source, &other.source)
            && self.span.start <= other.span.start
            && other.span.end <= self.span.end
    }
}

/// A piece of text that came out of a source (for instance the content of a TOML string), with the way
/// back from its bytes to the bytes of the file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Text {
    pub text: String,
    /// The whole value in the file, quotes included.
    pub place: Place,
    /// Offset in the file of each byte of `text`, and one past the end; empty when every byte of the
    /// text has the whole value as its place.
    pub offsets: Vec<usize>,
}

impl Text {
    /// The place in the file of a range of bytes of this text.
    pub fn place_of(&self, range: Range<usize>) -> Place {
        match (self.offsets.get(range.start), self.offsets.get(range.end)) {
            (Some(&start), Some(&end)) => Place {
                source: self.place.source.clone(),
                span: start..end,
            },
            _ => self.place.clone(),
        }
    }

    /// Text that stands in no file (tests, defaults): its source is the text itself.
    pub fn bare(text: &str) -> Text {
        let source = Arc::new(Source {
            name: "text".into(),
            text: text.into(),
        });
        let place = Place {
            source,
            span: 0..text.len(),
        };
        Text {
            text: text.into(),
            place,
            offsets: (0..=text.len()).collect(),
        }
    }
}
