//! The grounds of a point as plain text.

use super::layout::{Side, pad, wrap};
use crate::course::{Condition, Standing};
use crate::grounds::{Claim, Grounds, standing_word};

/// Each claim with its standing, then the conditions it rests on. A condition already told under an earlier
/// claim is only named.
pub fn grounds_text(grounds: &Grounds, page: usize) -> String {
    let mut out = String::new();
    let mut told: Vec<&str> = Vec::new();
    for claim in &grounds.claims {
        out.push_str(&format!(
            "{}: {}\n",
            capital(claim.name),
            standing_word(claim.standing)
        ));
        if is_usual(claim) {
            out.push_str(&wrap(USUAL, page, 2, 2));
        }
        claim_text(&mut out, claim, grounds, &mut told, page);
    }
    if !grounds.accepted.conditions.is_empty() {
        let text = format!(
            "Accepted by the study in spite of their standing: {}; because: {}",
            grounds.accepted.conditions.join(", "),
            grounds.accepted.because
        );
        out.push_str(&wrap(&text, page, 0, 2));
    }
    out
}

pub(super) const USUAL: &str = "This is usual, and no sign of a fault: how fast chains forget where they were is proved for few \
                     models. The errors are computed as if the claim held.";

/// Not known for no other reason than that none of its ways is.
pub(super) fn is_usual(claim: &Claim) -> bool {
    let unknown = |c: &Condition| c.standing == Standing::NotKnown;
    let contradicted =
        |c: &Condition| matches!(c.name, "moment above two" | "second moment") && unknown(c);
    claim.standing == Standing::NotKnown
        && !claim.conditions.iter().any(unknown)
        && !claim.ways.iter().flatten().any(contradicted)
}

fn claim_text<'a>(
    out: &mut String,
    claim: &'a Claim,
    grounds: &Grounds,
    told: &mut Vec<&'a str>,
    page: usize,
) {
    let mut again: Vec<&str> = Vec::new();
    for condition in &claim.conditions {
        if told.contains(&condition.name) {
            again.push(condition.name);
        }
    }
    if !again.is_empty() {
        out.push_str(&wrap(
            &format!("rests on {} (above)", again.join(", ")),
            page,
            2,
            4,
        ));
    }
    for condition in &claim.conditions {
        if !told.contains(&condition.name) {
            told.push(condition.name);
            line(
                out,
                condition,
                standing_word(condition.standing),
                grounds,
                2,
                page,
            );
        }
    }
    for (i, way) in claim.ways.iter().enumerate() {
        out.push_str(if i == 0 { "  and either\n" } else { "  or\n" });
        for condition in way {
            told.push(condition.name);
            line(out, condition, way_word(condition, claim), grounds, 4, page);
        }
    }
}

/// The standing of a condition of one way: that one of two is not open is no alarm while the other is.
pub(super) fn way_word(condition: &Condition, claim: &Claim) -> &'static str {
    match (condition.standing, claim.standing) {
        (Standing::Failed, standing) if standing != Standing::Failed => "not so",
        (standing, _) => standing_word(standing),
    }
}

fn line(
    out: &mut String,
    condition: &Condition,
    word: &str,
    grounds: &Grounds,
    indent: usize,
    page: usize,
) {
    const EVIDENCE: usize = 44;
    let name = format!("{}{}", " ".repeat(indent), condition.name);
    out.push_str(&pad(&name, 26, Side::Left));
    out.push_str(&pad(word, EVIDENCE - 26, Side::Left));
    let accepted = if grounds.accepts(condition.name) {
        "accepted by the study; "
    } else {
        ""
    };
    let text = wrap(
        &format!("{accepted}{}", condition.evidence),
        page,
        EVIDENCE,
        EVIDENCE,
    );
    out.push_str(text.trim_start_matches(' '));
}

pub(super) fn capital(text: &str) -> String {
    let mut chars = text.chars();
    chars
        .next()
        .map_or(String::new(), |c| c.to_uppercase().chain(chars).collect())
}
