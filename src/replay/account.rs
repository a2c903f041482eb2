//! What a verification checked, and what came of it.

/// The parts of a verification.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Part {
    /// Every file is as it was sealed, and none is missing or has come in.
    Bag,
    /// The study and its inputs give the plan.
    Plan,
    /// Every stored draw belongs to the trail, and the trail to the plan.
    Draws,
    /// The draws give the figures and the standings, and the plan ends the run where it ended.
    Figures,
    /// Figures and grounds give the pages and tables.
    Pages,
    /// The plan gives the draws.
    Blocks,
}

impl Part {
    pub const ALL: [Part; 6] = [
        Part::Bag,
        Part::Plan,
        Part::Draws,
        Part::Figures,
        Part::Pages,
        Part::Blocks,
    ];

    /// The letter it goes by.
    pub fn letter(self) -> char {
        match self {
            Part::Bag => 'a',
            Part::Plan => 'b',
            Part::Draws => 'c',
            Part::Figures => 'd',
            Part::Pages => 'e',
            Part::Blocks => 'f',
        }
    }

    /// What it asks.
    pub fn question(self) -> &'static str {
        match self {
            Part::Bag => "are all files as they were sealed?",
            Part::Plan => "do study and inputs give this plan?",
            Part::Draws => "do all draws belong to the trail, and the trail to the plan?",
            Part::Figures => "do the draws give these figures?",
            Part::Pages => "do the figures give these pages and tables?",
            Part::Blocks => "does the plan give these draws?",
        }
    }
}

/// A difference, with its place.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Finding {
    pub part: Part,
    /// `data/summary.json: points[0].estimands[2].value: the record has 1.5, the draws give 1.25`
    pub words: String,
}

/// How a part stands.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Standing {
    /// All of it was checked and agrees; in words what was looked at.
    Agrees(String),
    /// Differs; see the findings.
    Differs,
    /// Could not be checked, and why.
    Unchecked(String),
}

/// The account of a verification.
#[derive(Debug, Clone, Default)]
pub struct Account {
    pub title: String,
    pub result_digest: String,
    /// In order of the parts.
    pub parts: Vec<(Part, Standing)>,
    pub findings: Vec<Finding>,
    /// When only a part of the blocks was drawn again: the chances of finding what was altered.
    pub chance: Option<super::lot::Chance>,
    /// Seconds that drawing blocks again took.
    pub replay_seconds: f64,
}

/// Findings told of one part at most.
const MOST: usize = 20;

impl Account {
    /// Enters how a part stands: `looked_at` where nothing was found.
    pub(super) fn enter(&mut self, part: Part, found: Vec<String>, looked_at: String) {
        if found.is_empty() {
            self.parts.push((part, Standing::Agrees(looked_at)));
            return;
        }
        let more = found.len().saturating_sub(MOST);
        let findings = found
            .into_iter()
            .take(MOST)
            // A stranger's names and words must not move the reader's terminal.
            .map(|words| words.replace(|c: char| c.is_control() && c != '\n', " "))
            .map(|words| Finding { part, words });
        self.findings.extend(findings);
        if more > 0 {
            let words = format!("and {more} more differences");
            self.findings.push(Finding { part, words });
        }
        self.parts.push((part, Standing::Differs));
    }

    /// Enters a part that could not be checked.
    pub(super) fn leave(&mut self, part: Part, why: impl Into<String>) {
        self.parts.push((part, Standing::Unchecked(why.into())));
    }

    /// Nothing differs.
    pub fn agrees(&self) -> bool {
        self.findings.is_empty()
    }

    /// Some part could not be checked.
    pub fn unchecked(&self) -> bool {
        let unchecked =
            |(_, standing): &(Part, Standing)| matches!(standing, Standing::Unchecked(_));
        self.parts.iter().any(unchecked)
    }
}
