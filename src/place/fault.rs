//! A fault is written for the person who must mend it: where, what is wrong, what would be right.

use crate::place::Place;

/// One thing that is wrong.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Fault {
    /// What is wrong, in one sentence without a full stop: "`scael` is not a key of \[sampler\]".
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

/// Past so many faults nobody reads on, and a broken file could have millions.
const MOST: usize = 1000;

/// The faults found so far; reading goes on after each, so that all are shown in one go. The same fault is
/// kept once.
#[derive(Debug, Default)]
pub struct Faults(pub Vec<Fault>, usize);

impl Faults {
    pub fn push(&mut self, fault: Fault) {
        self.1 += 1;
        if self.0.len() < MOST && !self.0.contains(&fault) {
            self.0.push(fault);
        }
    }
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }
    /// How often a fault was recorded, those that stood already included: what has faults of its own is
    /// told by a change of this, not of the list.
    pub fn count(&self) -> usize {
        self.1
    }
}
