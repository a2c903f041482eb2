//! What a sampler can say of the grounds before any draw.

use super::random_walk::Adapt;
use super::sampler::{Move, Sampler, Settings};
use crate::course::{Condition, Standing};

impl Sampler {
    /// Conditions that the kernels answer for; `irreducible` is the model's to say.
    pub fn conditions(&self) -> Vec<Condition> {
        vec![
            self.invariant(),
            self.recurrent(),
            aperiodic(),
            self.backwards(),
        ]
    }

    /// Whether the whole kernel is reversible (needed by initial-sequence bounds; Geyer 1992): a single
    /// move that is, or a mixture of such. A sweep over coordinates in fixed order is not.
    pub fn reversible(&self) -> bool {
        let single = |part: &Move| {
            matches!(part.settings, Settings::RandomWalk { .. }) || part.coordinates.len() == 1
        };
        (self.is_mixture() || self.steps.len() == 1)
            && self
                .steps
                .iter()
                .all(|step| matches!(&step.moves[..], [part] if single(part)))
    }

    fn is_mixture(&self) -> bool {
        self.steps.iter().all(|step| step.weight.is_some())
    }

    fn invariant(&self) -> Condition {
        let moves = || self.steps.iter().flat_map(|step| &step.moves);
        let mut names: Vec<&str> = Vec::new();
        for part in moves() {
            let name = published(&part.settings);
            if !names.contains(&name) {
                names.push(name);
            }
        }
        let together = match (moves().count(), self.is_mixture()) {
            (1, _) => "leaves the target's law as it is",
            (_, true) => "each leaves the target's law as it is, and so does their mixture",
            (_, false) => "each leaves the target's law as it is, and so do they in turn",
        };
        let fixed = if moves().any(|part| adapts(&part.settings)) {
            "what burn-in adapted is frozen before the first draw"
        } else {
            "nothing adapts"
        };
        Condition {
            name: "invariant",
            standing: Standing::ByConstruction,
            evidence: format!("{}: {together}; {fixed}", names.join("; ")),
        }
    }

    fn recurrent(&self) -> Condition {
        let whole = match &self.steps[..] {
            [step] => matches!(
                &step.moves[..],
                [part] if matches!(part.settings, Settings::RandomWalk { .. })
                    && part.coordinates.len() == self.coordinates.len()
            ),
            _ => false,
        };
        let (standing, evidence) = if whole {
            (
                Standing::ByConstruction,
                "a Metropolis kernel on all coordinates together is Harris recurrent where it is irreducible \
                 (Tierney 1994, corollary 2)",
            )
        } else {
            (
                Standing::Assumed,
                "an irreducible chain with an invariant law converges from almost every start (Tierney 1994); \
                 that the start is none of the exceptions is not shown where coordinates move in groups \
                 (Roberts & Rosenthal 2006)",
            )
        };
        Condition {
            name: "recurrent",
            standing,
            evidence: evidence.into(),
        }
    }

    fn backwards(&self) -> Condition {
        let (standing, evidence) = if self.reversible() {
            (Standing::ByConstruction, "one reversible move a step")
        } else {
            (Standing::Failed, "moves follow each other in a fixed order")
        };
        Condition {
            name: "reversible",
            standing,
            evidence: evidence.into(),
        }
    }
}

fn aperiodic() -> Condition {
    Condition {
        name: "aperiodic",
        standing: Standing::ByConstruction,
        evidence: "every move can end where it began, or arbitrarily near".into(),
    }
}

fn published(settings: &Settings) -> &'static str {
    match settings {
        Settings::RandomWalk { .. } => {
            "Metropolis with normal steps (Metropolis et al. 1953; Roberts, Gelman & Gilks 1997)"
        }
        Settings::Slice { .. } => "slice sampling with stepping out and shrinkage (Neal 2003)",
        Settings::Conditional => "draws from the full conditional (Geman & Geman 1984)",
        Settings::IntegerWalk { .. } => "Metropolis with symmetric whole-number steps",
    }
}

fn adapts(settings: &Settings) -> bool {
    match settings {
        Settings::RandomWalk { adapt, .. } => *adapt != Adapt::None,
        Settings::Slice { .. } => true,
        Settings::Conditional => false,
        Settings::IntegerWalk { adapt, .. } => *adapt,
    }
}
