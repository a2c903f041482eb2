//! Why a run ended before its end.

/// Why a run ended before its end.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Halt {
    /// The reader asked for it; the journal is whole up to the last block of each chain.
    Interrupted,
    /// A chain found no start: the study's fault.
    Start { point: usize, words: String },
    /// The journal could not be written or read.
    Journal(String),
    /// Blocks that should be equal are not, or a course broke its promise: the program's own fault.
    Own(String),
}

impl Halt {
    /// Why, in words alone.
    pub fn words(self) -> String {
        match self {
            Halt::Interrupted => "interrupted".into(),
            Halt::Start { words, .. } | Halt::Journal(words) | Halt::Own(words) => words,
        }
    }

    pub(super) fn own(point: usize, words: impl std::fmt::Display) -> Halt {
        Halt::Own(format!("point {}: {words}", point + 1))
    }

    pub(super) fn differs(point: usize, chain: usize, number: u64, what: &str) -> Halt {
        Halt::Own(format!(
            "point {}, chain {}, block {number}: computed again, {what} differs from what stands in the \
             journal",
            point + 1,
            chain + 1
        ))
    }
}
