//! The grounds of a point as HTML.

use super::grounds_text::{USUAL, capital, is_usual, way_word};
use super::html::{element, escape};
use crate::course::{Condition, Standing};
use crate::grounds::{Grounds, standing_word};

/// Each claim with its standing and sources, then the conditions it rests on with their evidence. A condition
/// already told under an earlier claim is only named.
pub(super) fn grounds_html(grounds: &Grounds) -> String {
    let mut out = String::new();
    let mut told: Vec<&str> = Vec::new();
    for claim in &grounds.claims {
        out.push_str(&format!(
            "<h3>{}: {} <small>({})</small></h3>\n",
            escape(&capital(claim.name)),
            standing(claim.standing, standing_word(claim.standing)),
            escape(claim.sources)
        ));
        if is_usual(claim) {
            out.push_str(&element("p", USUAL));
        }
        let (again, new): (Vec<&Condition>, Vec<&Condition>) = claim
            .conditions
            .iter()
            .partition(|condition| told.contains(&condition.name));
        if !again.is_empty() {
            let names: Vec<&str> = again.iter().map(|condition| condition.name).collect();
            let text = format!("Rests on {} (above), and on:", names.join(", "));
            out.push_str(&element("p", &text));
        }
        out.push_str("<div class=\"wide\"><table class=\"grounds\"><tbody>\n");
        for condition in new {
            told.push(condition.name);
            let word = standing_word(condition.standing);
            out.push_str(&row("", condition, word, grounds));
        }
        for (index, way) in claim.ways.iter().enumerate() {
            let lead = if index == 0 { "either " } else { "or " };
            for (at, condition) in way.iter().enumerate() {
                told.push(condition.name);
                let lead = if at == 0 { lead } else { "and " };
                out.push_str(&row(lead, condition, way_word(condition, claim), grounds));
            }
        }
        out.push_str("</tbody></table></div>\n");
    }
    out
}

fn row(lead: &str, condition: &Condition, word: &str, grounds: &Grounds) -> String {
    let accepted = if grounds.accepts(condition.name) {
        "accepted by the study; "
    } else {
        ""
    };
    let lead = match lead {
        "" => String::new(),
        lead => format!("<small>{lead}</small>"),
    };
    format!(
        "<tr><th scope=\"row\">{lead}{}</th><td>{}</td><td>{accepted}{}</td></tr>\n",
        escape(condition.name),
        standing(condition.standing, word),
        escape(&condition.evidence)
    )
}

fn standing(standing: Standing, word: &str) -> String {
    match standing {
        Standing::Failed if word == standing_word(standing) => {
            format!("<strong class=\"bad\">{word}</strong>")
        }
        _ => format!("<em>{word}</em>"),
    }
}
