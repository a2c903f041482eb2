//! The conditions that claims rest on, and the order of standings.

use crate::course::{CONDITIONS, Condition, Standing};

/// The meaning of a condition.
pub fn meaning(name: &str) -> Option<&'static str> {
    CONDITIONS.iter().find(|(n, _)| *n == name).map(|(_, m)| *m)
}

/// As written in `grounds.json` and in the report.
pub fn standing_word(standing: Standing) -> &'static str {
    match standing {
        Standing::Proved => "proved",
        Standing::ByConstruction => "by construction",
        Standing::NotContradicted => "not contradicted",
        Standing::Assumed => "assumed",
        Standing::NotKnown => "not known",
        Standing::Failed => "failed",
    }
}

/// From 0, proved, up to failed: the higher, the weaker.
pub fn rank(standing: Standing) -> u8 {
    match standing {
        Standing::Proved => 0,
        Standing::ByConstruction => 1,
        Standing::NotContradicted => 2,
        Standing::Assumed => 3,
        Standing::NotKnown => 4,
        Standing::Failed => 5,
    }
}

/// The weaker of two standings: from proved over by construction, not contradicted, assumed and not known down
/// to failed.
pub fn weaker(a: Standing, b: Standing) -> Standing {
    if rank(b) > rank(a) { b } else { a }
}

/// The stronger of two.
pub(super) fn stronger(a: Standing, b: Standing) -> Standing {
    if rank(b) < rank(a) { b } else { a }
}

/// What the model says about a condition; of several statements (one a kernel, one an unknown) the weakest
/// counts and all evidence is kept.
pub(super) fn said(conditions: &[Condition], name: &'static str) -> Condition {
    let mut out: Option<Condition> = None;
    for c in conditions.iter().filter(|c| c.name == name) {
        out = Some(match out {
            None => c.clone(),
            Some(so_far) => Condition {
                name,
                standing: weaker(so_far.standing, c.standing),
                evidence: if so_far.evidence == c.evidence {
                    so_far.evidence
                } else {
                    format!("{}; {}", so_far.evidence, c.evidence)
                },
            },
        });
    }
    out.unwrap_or(Condition {
        name,
        standing: Standing::NotKnown,
        evidence: "nothing is known about it".into(),
    })
}
