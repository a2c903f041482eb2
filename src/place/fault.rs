//! A fault is written for the person who must mend it: where, what is wrong, what would be right.

use std::ops::Range;
use std::sync::Arc;

/// A file as read: the name it is called by in messages, and its text.
#[derive(Debug, PartialEq, Eq)]
pub struct Source {
    pub name: String,
    pub text: String,
}

/// A range of bytes in a source.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Place {
    pub source: Arc<Source>,
    pub span: Range<usize>,
}

/// A piece of text that came out of a source (for instance the content of a TOML string), with the way
/// back from its bytes to the bytes of the file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Text {
    pub text: String,
    /// The whole value in the file, quotes included.
    pub place: Place,
    /// Offset in the file of each byte of `text`, and one past the end; empty when every byte of the
    /// text has the whole value as its place (strings with escapes).
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

/// One thing that is wrong.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// What is wrong, in one sentence without a full stop: "`scael` is not a key of [sampler]".
    pub what: String,
    /// Where; `None` only for faults of whole files that could not be read.
    pub place: Option<Place>,
    /// A few words under the mark: "unknown key".
    pub label: String,
    /// What would be right: "did you mean `scale`?"
    pub help: Option<String>,
    /// Other places that belong to the fault, each with a few words.
    pub related: Vec<(Place, String)>,
}

impl Fault {
    pub fn at(place: Place, what: impl Into<String>) -> Fault {
        Fault {
            what: what.into(),
            place: Some(place),
            label: String::new(),
            help: None,
            related: Vec::new(),
        }
    }
    /// A fault of a whole file: `what` names it.
    pub fn whole(what: impl Into<String>) -> Fault {
        Fault {
            what: what.into(),
            place: None,
            label: String::new(),
            help: None,
            related: Vec::new(),
        }
    }
    pub fn label(mut self, label: impl Into<String>) -> Fault {
        self.label = label.into();
        self
    }
    pub fn help(mut self, help: impl Into<String>) -> Fault {
        self.help = Some(help.into());
        self
    }
    pub fn related(mut self, place: Place, label: impl Into<String>) -> Fault {
        self.related.push((place, label.into()));
        self
    }
}

/// The faults found so far; reading goes on after each, so that all are shown in one go.
#[derive(Debug, Default)]
pub struct Faults(pub Vec<Fault>);

impl Faults {
    pub fn push(&mut self, fault: Fault) {
        if !self.0.contains(&fault) {
            self.0.push(fault);
        }
    }
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }
}
