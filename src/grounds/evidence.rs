//! What the draws say about the conditions. Statistics never prove: each sentence says what it could not have
//! seen.

use super::condition::weaker;
use crate::course::{Condition, Standing};
use crate::estimates::{Figure, Note, Summary, r_hat_text};

/// R-hat up to this does not speak against anything.
const MIXED: f64 = 1.05;

/// Adds the evidence of a finished point to a condition. What was proved, holds by construction or has failed
/// stays as it is. Conditions named in `limits` are those of which the model itself says that nothing can be known:
/// draws may bring them down, never up.
pub(super) fn weigh(condition: Condition, summary: &Summary, limits: &[&str]) -> Condition {
    if matches!(
        condition.standing,
        Standing::Proved | Standing::ByConstruction | Standing::Failed
    ) {
        return condition;
    }
    let found = match condition.name {
        "finite mass" => run_away(summary),
        "irreducible" => reach(summary),
        "recurrent" => reach(summary).map(|(standing, words)| match standing {
            Standing::NotContradicted => (
                standing,
                "the chains came together from their starts; starts that none of them had are not seen".into(),
            ),
            _ => (standing, words),
        }),
        "start forgotten" => start(summary),
        "integrable" => moment(summary, 1.0, "the mean"),
        "second moment" | "moment above two" => moment(summary, 0.5, "the variance"),
        _ => None,
    };
    let Some((standing, words)) = found else {
        return condition;
    };
    let limited = limits.contains(&condition.name);
    let one_start = limits.contains(&"start forgotten")
        && matches!(condition.name, "irreducible" | "recurrent");
    if one_start && standing == Standing::NotContradicted {
        return condition;
    }
    if limited {
        return Condition {
            name: condition.name,
            standing: weaker(condition.standing, standing),
            evidence: format!("{}; {words}", condition.evidence),
        };
    }
    let evidence = match condition.standing {
        // "Nothing is known" is no longer so.
        Standing::NotKnown => words,
        _ => format!("{}; {words}", condition.evidence),
    };
    Condition {
        name: condition.name,
        standing,
        evidence,
    }
}

/// The first figure whose chains stand still or disagree, with the note.
fn disagreement(summary: &Summary) -> Option<(&Figure, &Note)> {
    summary.figures.iter().find_map(|figure| {
        let note = figure.estimate.notes.iter().find(|n| n.is_disagreement())?;
        Some((figure, note))
    })
}

/// The figure with the largest of some statistic.
fn largest(summary: &Summary, of: impl Fn(&Figure) -> Option<f64>) -> Option<(&Figure, f64)> {
    let mut worst: Option<(&Figure, f64)> = None;
    for figure in &summary.figures {
        if let Some(x) = of(figure).filter(|x| worst.is_none_or(|(_, w)| *x > w)) {
            worst = Some((figure, x));
        }
    }
    worst
}

fn reach(summary: &Summary) -> Option<(Standing, String)> {
    if let Some((figure, note)) = disagreement(summary) {
        return Some((Standing::NotKnown, format!("{}: {note}", figure.name)));
    }
    if summary.chains < 2 {
        return Some((
            Standing::NotKnown,
            "one chain alone cannot show whether another start would lead elsewhere".into(),
        ));
    }
    let (figure, r_hat) = largest(summary, |f| f.estimate.r_hat)?;
    let standing = if r_hat <= MIXED {
        Standing::NotContradicted
    } else {
        Standing::NotKnown
    };
    Some((
        standing,
        format!(
            "{} chains, largest R-hat {} ({}); a region that no chain visited \
             would not show",
            summary.chains,
            r_hat_text(r_hat),
            figure.name
        ),
    ))
}

fn start(summary: &Summary) -> Option<(Standing, String)> {
    if let Some((figure, note)) = disagreement(summary) {
        return Some((Standing::Failed, format!("{}: {note}", figure.name)));
    }
    let (figure, r_hat) = largest(summary, |f| f.estimate.r_hat)?;
    let standing = if r_hat <= MIXED {
        Standing::NotContradicted
    } else {
        Standing::NotKnown
    };
    let what = if summary.chains < 2 {
        "the halves of the one chain"
    } else {
        "the chains"
    };
    Some((
        standing,
        format!(
            "largest R-hat {} ({}); what {what} have in common, a wrong region too, would not show",
            r_hat_text(r_hat),
            figure.name
        ),
    ))
}

/// No quantity has a number in every draw: so are draws recorded from chains that ran away.
fn run_away(summary: &Summary) -> Option<(Standing, String)> {
    all_without_number(summary).then(|| (Standing::NotKnown, RAN_AWAY.into()))
}

fn all_without_number(summary: &Summary) -> bool {
    !summary.figures.is_empty()
        && summary.figures.iter().all(|f| {
            let mut notes = f.estimate.notes.iter();
            notes.any(|n| matches!(n, Note::NotANumber { .. }))
        })
}

const RAN_AWAY: &str = "no quantity has a number in every draw, as when chains run away: where the log density rises \
                        without bound the target has no finite mass, and nothing can be drawn from it";

/// A moment whose existence asks for a tail index under a bound.
fn moment(summary: &Summary, bound: f64, what: &str) -> Option<(Standing, String)> {
    if let Some(figure) = summary.figures.iter().find(|f| {
        f.estimate
            .notes
            .iter()
            .any(|n| matches!(n, Note::Infinite { .. } | Note::NotANumber { .. }))
    }) {
        let words = format!("{}: some draws are infinite or not a number", figure.name);
        let words = match all_without_number(summary) {
            true => format!("{words}; {RAN_AWAY}"),
            false => words,
        };
        return Some((Standing::Failed, words));
    }
    let Some((figure, index)) = largest(summary, |f| f.estimate.tail_index) else {
        let bounded = !summary.figures.is_empty() && summary.figures.iter().all(|f| f.condition);
        return bounded.then(|| {
            (
                Standing::Proved,
                "a condition is 0 or 1: it has every moment".into(),
            )
        });
    };
    let (name, limit) = (&figure.name, if bound == 1.0 { "1" } else { "0.5" });
    Some(if index < bound {
        (
            Standing::NotContradicted,
            format!(
                "largest tail index {index:.2} ({name}), under {limit}; a tail that begins beyond the draws would \
                 not show"
            ),
        )
    } else {
        (
            Standing::NotKnown,
            format!("tail index {index:.2} ({name}), from {limit} on, speaks against {what}"),
        )
    })
}
