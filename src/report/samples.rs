//! Made-up results that snapshots are taken of.

use crate::canon::Json;
use crate::course::{Condition, Standing};
use crate::estimates::{
    Difference, Estimate, Figure, GoalState, Note, Paired, QuantileEstimate, Summary,
};
use crate::grounds::{Grounds, grounds};
use crate::plan::{Accepted, Give};

fn estimate(value: f64, mcse: f64, sd: f64) -> Estimate {
    let q = |level, value, mcse| QuantileEstimate {
        level,
        value: Some(value),
        mcse: Some(mcse),
    };
    Estimate {
        chains: 8,
        draws: 2000,
        value: Some(value),
        mcse: Some(mcse),
        sd: Some(sd),
        quantiles: vec![
            q(0.025, value - 1.5 * sd, 3.0 * mcse),
            q(0.5, value - 0.1 * sd, 1.3 * mcse),
            q(0.975, value + 2.4 * sd, 4.0 * mcse),
        ],
        r_hat: Some(1.0018),
        effective_bulk: Some(9312.4),
        effective_tail: Some(8120.7),
        tail_index: Some(0.12),
        ..Estimate::default()
    }
}

fn figure(name: &str, unit: Option<&str>, estimate: Estimate) -> Figure {
    let give = if estimate.condition {
        vec![Give::Value]
    } else {
        vec![
            Give::Value,
            Give::Uncertainty,
            Give::Quantile(0.5),
            Give::Interval(0.95),
        ]
    };
    Figure {
        name: name.into(),
        unit: unit.map(String::from),
        condition: estimate.condition,
        give,
        goal: None,
        estimate,
    }
}

pub(super) fn summary() -> Summary {
    let mut heavy = estimate(812.3, 11.0, 400.0);
    (heavy.mcse, heavy.sd, heavy.tail_index) = (None, None, Some(0.62));
    heavy.notes.push(Note::HeavyTail { index: 0.62 });
    let rare = Estimate {
        condition: true,
        chains: 8,
        draws: 2000,
        value: Some(0.0),
        notes: vec![Note::Rare {
            seen: 0,
            of: 16000,
            effective: Some(8120.0),
            limits: Some((0.0, 0.000454)),
        }],
        ..Estimate::default()
    };
    Summary {
        key: "5f2c".into(),
        values: Vec::new(),
        chains: 8,
        draws_per_chain: 2000,
        burn_in: 1000,
        goal: GoalState::Missed,
        advice: Some("b limits: no error of the mean; more draws alone may not help".into()),
        figures: vec![
            figure(
                "rate[\"Cawdle\"]",
                Some("1/kh"),
                estimate(0.05983, 0.000262, 0.0251),
            ),
            figure(
                "rate[\"Fen End, the pump house by the old sluice on the eastern main drain\"]",
                Some("1/kh"),
                estimate(1.104, 0.00731, 0.31),
            ),
            figure("b", None, heavy),
            figure("worst_is_third", None, rare),
        ],
        paired: None,
    }
}

pub(super) fn sweep() -> Vec<Summary> {
    (0..3)
        .map(|i| {
            let mut s = summary();
            s.key = format!("5f2c{i}");
            s.values = vec![
                (
                    "model.constant.prior_rate".into(),
                    Json::real(0.5 + f64::from(i)),
                ),
                (
                    "sampler.method".into(),
                    Json::text(if i == 1 { "slice" } else { "metropolis" }),
                ),
            ];
            s.goal = if i == 2 {
                GoalState::Missed
            } else {
                GoalState::Met
            };
            s.figures[0].estimate.value = Some(0.05983 + 0.01 * f64::from(i));
            s
        })
        .collect()
}

/// The same with shared streams: the second point has its differences, the third stopped elsewhere.
pub(super) fn paired_sweep() -> Vec<Summary> {
    let mut points = sweep();
    let difference = |value, mcse, notes| {
        Some(Difference {
            value: Some(value),
            mcse,
            notes,
        })
    };
    let found = vec![
        difference(0.01, Some(0.000011), Vec::new()),
        difference(0.0, None, vec![Note::Constant { value: 0.0 }]),
        difference(-3.2, Some(0.4), Vec::new()),
        None,
    ];
    let reason = "it has 3,000 draws a chain, the first point 2,000";
    for (point, differences) in [(1, Ok(found)), (2, Err(reason.into()))] {
        points[point].paired = Some(Paired {
            first: "5f2c0".into(),
            differences,
        });
    }
    points
}

pub(super) fn standings(summary: &Summary) -> Grounds {
    let condition = |name, standing, evidence: &str| Condition {
        name,
        standing,
        evidence: evidence.into(),
    };
    let model = [
        condition(
            "finite mass",
            Standing::Assumed,
            "b has an improper flat law: the mass is finite only if the data bound it",
        ),
        condition(
            "invariant",
            Standing::ByConstruction,
            "random walk with Metropolis acceptance leaves the target's law as it is; what is adapted in burn-in is frozen before the first draw",
        ),
        condition(
            "aperiodic",
            Standing::ByConstruction,
            "some proposals are refused",
        ),
    ];
    let accepted = Accepted {
        conditions: vec!["finite mass".into()],
        because: "the counts bound b".into(),
    };
    grounds(&model, Some(summary), &accepted)
}
