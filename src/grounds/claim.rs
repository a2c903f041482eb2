//! The three claims, and what follows from their standing.

use super::condition::{said, stronger, weaker};
use super::evidence::weigh;
use crate::course::{Condition, Standing};
use crate::estimates::Summary;
use crate::plan::Accepted;

/// A claim with the conditions it rests on.
#[derive(Debug, Clone, PartialEq)]
pub struct Claim {
    /// "the average converges"
    pub name: &'static str,
    pub sources: &'static str,
    /// All of these.
    pub conditions: Vec<Condition>,
    /// And all of one of these; empty where there is no choice.
    pub ways: Vec<Vec<Condition>>,
    /// Of the weakest condition, the strongest way counting.
    pub standing: Standing,
    /// Does a run need it for its figures?
    pub needed: bool,
}

/// The grounds of one point.
#[derive(Debug, Clone, PartialEq)]
pub struct Grounds {
    pub claims: Vec<Claim>,
    pub accepted: Accepted,
}

const AVERAGE: [&str; 5] = [
    "finite mass",
    "invariant",
    "irreducible",
    "recurrent",
    "integrable",
];
const LAW: [&str; 5] = [
    "finite mass",
    "invariant",
    "irreducible",
    "recurrent",
    "aperiodic",
];
const GEOMETRIC: [&str; 2] = ["geometrically ergodic", "moment above two"];
const REVERSIBLE: [&str; 2] = ["reversible", "second moment"];

/// The grounds of a point: from what the model says, and, once it has run, from its summary.
pub fn grounds(model: &[Condition], summary: Option<&Summary>, accepted: &Accepted) -> Grounds {
    let limits: Vec<&str> = model
        .iter()
        .filter(|c| c.standing == Standing::NotKnown)
        .map(|c| c.name)
        .collect();
    let look = |name: &'static str| {
        let condition = said(model, name);
        match summary {
            Some(summary) => weigh(condition, summary, &limits),
            None => condition,
        }
    };
    let all = |names: &[&'static str]| names.iter().map(|n| look(n)).collect::<Vec<Condition>>();
    let mut error = all(&AVERAGE);
    error.push(look("start forgotten"));
    let claims = vec![
        claim(
            "the average converges",
            "Tierney 1994; Roberts & Rosenthal 2006",
            all(&AVERAGE),
            Vec::new(),
            true,
        ),
        claim(
            "the error bar holds",
            "Roberts & Rosenthal 1997; Jones 2004",
            error,
            vec![all(&GEOMETRIC), all(&REVERSIBLE)],
            true,
        ),
        claim(
            "the n-step law converges",
            "Tierney 1994; Roberts & Rosenthal 2006",
            all(&LAW),
            Vec::new(),
            false,
        ),
    ];
    Grounds {
        claims,
        accepted: accepted.clone(),
    }
}

fn claim(
    name: &'static str,
    sources: &'static str,
    conditions: Vec<Condition>,
    ways: Vec<Vec<Condition>>,
    needed: bool,
) -> Claim {
    let weakest = |list: &[Condition]| {
        list.iter()
            .map(|c| c.standing)
            .reduce(weaker)
            .unwrap_or(Standing::Proved)
    };
    let mut standing = weakest(&conditions);
    if let Some(best) = ways.iter().map(|way| weakest(way)).reduce(stronger) {
        standing = weaker(standing, best);
    }
    Claim {
        name,
        sources,
        conditions,
        ways,
        standing,
        needed,
    }
}

impl Claim {
    /// The failed conditions that bring the claim down. One way of several brings nothing down while another
    /// stands.
    fn failed(&self) -> Vec<&Condition> {
        let is_failed = |c: &&Condition| c.standing == Standing::Failed;
        let mut out: Vec<&Condition> = self.conditions.iter().filter(is_failed).collect();
        if self
            .ways
            .iter()
            .all(|way| way.iter().any(|c| c.standing == Standing::Failed))
        {
            out.extend(self.ways.iter().flatten().filter(is_failed));
        }
        out
    }
}

impl Grounds {
    /// Failed conditions of the claims that a run needs, each once, whether accepted or not.
    pub fn failed(&self) -> Vec<&Condition> {
        let mut out: Vec<&Condition> = Vec::new();
        for condition in self
            .claims
            .iter()
            .filter(|c| c.needed)
            .flat_map(Claim::failed)
        {
            if out.iter().all(|c| c.name != condition.name) {
                out.push(condition);
            }
        }
        out
    }

    /// Failed conditions that the study does not accept: before the first draw these stop the run.
    pub fn stops(&self) -> Vec<&Condition> {
        self.failed()
            .into_iter()
            .filter(|c| !self.accepts(c.name))
            .collect()
    }

    /// Does the study accept a condition in spite of its standing?
    pub fn accepts(&self, name: &str) -> bool {
        self.accepted.conditions.iter().any(|a| a == name)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::estimates::{Estimate, Figure, GoalState, Note};
    use crate::plan::Give;

    fn condition(name: &'static str, standing: Standing) -> Condition {
        Condition {
            name,
            standing,
            evidence: format!("the model on {name}"),
        }
    }

    fn summary(e: Estimate) -> Summary {
        Summary {
            key: "k".into(),
            values: Vec::new(),
            chains: 4,
            draws_per_chain: 2000,
            burn_in: 1000,
            goal: GoalState::None,
            advice: None,
            figures: vec![Figure {
                name: "b".into(),
                unit: None,
                condition: false,
                give: vec![Give::Value],
                goal: None,
                estimate: e,
            }],
            paired: None,
        }
    }

    fn standing(grounds: &Grounds, claim: usize, name: &str) -> Standing {
        let claim = &grounds.claims[claim];
        let found = claim
            .conditions
            .iter()
            .chain(claim.ways.iter().flatten())
            .find(|c| c.name == name);
        found.expect("a condition").standing
    }

    #[test]
    fn before_the_draws_little_is_known_and_nothing_stops() {
        let model = [
            condition("finite mass", Standing::Assumed),
            condition("invariant", Standing::ByConstruction),
        ];
        let g = grounds(&model, None, &Accepted::default());
        assert_eq!(standing(&g, 0, "finite mass"), Standing::Assumed);
        assert_eq!(standing(&g, 0, "irreducible"), Standing::NotKnown);
        assert!(g.claims.iter().all(|c| c.standing == Standing::NotKnown));
        assert!(g.stops().is_empty());
    }

    #[test]
    fn draws_support_but_never_prove() {
        let model = [
            condition("finite mass", Standing::Proved),
            condition("invariant", Standing::ByConstruction),
            condition("reversible", Standing::Failed),
            condition("geometrically ergodic", Standing::Assumed),
        ];
        let e = Estimate {
            r_hat: Some(1.002),
            tail_index: Some(0.1),
            ..Estimate::default()
        };
        let g = grounds(&model, Some(&summary(e)), &Accepted::default());
        assert_eq!(g.claims[0].standing, Standing::NotContradicted);
        // One way has failed, the other is assumed.
        assert_eq!(g.claims[1].standing, Standing::Assumed);
        assert!(g.stops().is_empty(), "{:?}", g.stops());
        let heavy = Estimate {
            r_hat: Some(1.002),
            tail_index: Some(0.7),
            ..Estimate::default()
        };
        let g = grounds(&model, Some(&summary(heavy)), &Accepted::default());
        assert_eq!(standing(&g, 0, "integrable"), Standing::NotContradicted);
        assert_eq!(standing(&g, 1, "moment above two"), Standing::NotKnown);
    }

    #[test]
    fn disagreeing_chains_bring_the_error_bar_down() {
        let mut e = Estimate {
            r_hat: Some(1.9),
            tail_index: Some(0.1),
            ..Estimate::default()
        };
        e.notes.push(Note::Stray {
            chains: vec![3],
            of: 4,
            errors: 11.0,
        });
        let g = grounds(&[], Some(&summary(e)), &Accepted::default());
        assert_eq!(g.claims[1].standing, Standing::Failed);
        assert_eq!(g.claims[0].standing, Standing::NotKnown);
        assert_eq!(g.failed()[0].name, "start forgotten");
    }

    #[test]
    fn a_start_not_forgotten_brings_the_error_bar_down() {
        // Far from 0, each chain creeps on its own: no error, and the claim fails by this quantity.
        let chains: Vec<Vec<f64>> = (0..8)
            .map(|c| {
                (0..200)
                    .map(|i| 996.0 + f64::from(c) * 0.1 + f64::from(i * 7 % 11) * 0.01)
                    .collect()
            })
            .collect();
        let chains: Vec<&[f64]> = chains.iter().map(Vec::as_slice).collect();
        let e = crate::estimates::estimate(&chains, false, &[0.5]);
        assert!(e.value.is_some() && e.mcse.is_none() && e.sd_mcse.is_none());
        assert!(e.quantiles[0].value.is_some() && e.quantiles[0].mcse.is_none());
        let mut disagree = Estimate {
            r_hat: Some(1.7),
            ..Estimate::default()
        };
        disagree.notes.push(Note::Disagree { r_hat: 1.7 });
        let g = grounds(&[], Some(&summary(disagree)), &Accepted::default());
        assert_eq!(g.failed()[0].name, "start forgotten");
        assert_eq!(
            g.failed()[0].evidence,
            "b: chains disagree (R-hat 1.70): no error"
        );
        assert!(e.chains_disagree());
    }

    #[test]
    fn chains_from_one_start_do_not_show_that_it_is_forgotten() {
        let model = [
            condition("irreducible", Standing::Assumed),
            condition("start forgotten", Standing::NotKnown),
            condition("integrable", Standing::NotKnown),
        ];
        let e = Estimate {
            r_hat: Some(1.001),
            tail_index: Some(0.1),
            ..Estimate::default()
        };
        let g = grounds(&model, Some(&summary(e.clone())), &Accepted::default());
        assert_eq!(standing(&g, 1, "start forgotten"), Standing::NotKnown);
        assert_eq!(standing(&g, 0, "irreducible"), Standing::Assumed);
        assert_eq!(standing(&g, 0, "integrable"), Standing::NotKnown);
        let g = grounds(&model[..1], Some(&summary(e)), &Accepted::default());
        assert_eq!(
            standing(&g, 1, "start forgotten"),
            Standing::NotContradicted
        );
        assert_eq!(standing(&g, 0, "integrable"), Standing::NotContradicted);
    }

    #[test]
    fn failed_conditions_stop_unless_accepted() {
        let model = [
            condition("irreducible", Standing::Failed),
            condition("aperiodic", Standing::Failed),
        ];
        let g = grounds(&model, None, &Accepted::default());
        // Period stops nothing: the average converges all the same.
        assert_eq!(
            g.stops().iter().map(|c| c.name).collect::<Vec<_>>(),
            ["irreducible"]
        );
        let accepted = Accepted {
            conditions: vec!["irreducible".into()],
            because: "only one class matters here".into(),
        };
        let g = grounds(&model, None, &accepted);
        assert!(g.stops().is_empty());
        assert_eq!(g.failed().len(), 1);
    }

    #[test]
    fn the_weakest_statement_counts() {
        let mut second = condition("invariant", Standing::Assumed);
        second.evidence = "another kernel".into();
        let model = [condition("invariant", Standing::ByConstruction), second];
        let g = grounds(&model, None, &Accepted::default());
        let c = &g.claims[0].conditions[1];
        assert_eq!(c.standing, Standing::Assumed);
        assert_eq!(c.evidence, "the model on invariant; another kernel");
    }
}
