//! The plan as `plan.json`: what all points share once, then what each has of its own.

use crate::canon::{Json, hex};
use crate::plan::types::*;

impl Plan {
    /// The content of `plan.json`.
    pub fn json(&self) -> Json {
        let sections: Vec<Vec<(&'static str, Json)>> =
            self.points.iter().map(Point::sections).collect();
        // A section is shared where it is the same at every point.
        let shared: Vec<bool> = (0..sections[0].len())
            .map(|at| sections.iter().all(|own| own[at] == sections[0][at]))
            .collect();
        let base = sections[0]
            .iter()
            .zip(&shared)
            .filter(|(_, shared)| **shared)
            .map(|(section, _)| section.clone());
        let base = Json::object(base);
        let points = sections.into_iter().enumerate().map(|(at, own)| {
            let point = &self.points[at];
            let mut members = vec![
                ("key", Json::text(hex(&self.point_key(at)))),
                (
                    "values",
                    Json::object(point.values.iter().map(|(path, v)| (path, v.clone()))),
                ),
            ];
            let own = own.into_iter().zip(&shared);
            members.extend(own.filter(|(_, shared)| !**shared).map(|(own, _)| own));
            Json::object(members)
        });
        let points = Json::array(points);
        let axes = self.axes.iter().map(|axis| {
            Json::object([
                ("path", Json::text(&*axis.path)),
                ("values", Json::array(axis.values.iter().cloned())),
            ])
        });
        Json::object([
            ("schema", Json::Count(1)),
            (
                "numerics",
                Json::object([
                    ("draws", Json::Count(self.numerics.draws)),
                    ("estimates", Json::Count(self.numerics.estimates)),
                ]),
            ),
            ("plan_digest", Json::text(hex(&self.digest()))),
            ("title", Json::text(&*self.title)),
            ("question", Json::text(&*self.question)),
            ("root", Json::text(&*self.root)),
            ("closed", self.closed_json()),
            ("keep", self.keep_json()),
            ("checkpoint_bytes", Json::Count(CHECKPOINT_BYTES)),
            ("accepted", self.accepted_json()),
            (
                "sweep",
                Json::object([
                    (
                        "combine",
                        Json::text(match self.combine {
                            Combine::Grid => "grid",
                            Combine::Pair => "pair",
                        }),
                    ),
                    (
                        "streams",
                        Json::text(match self.streams {
                            Streams::Own => "own",
                            Streams::Shared => "shared",
                        }),
                    ),
                    ("axes", Json::array(axes)),
                    ("shared_content", self.shared.clone().unwrap_or(Json::Null)),
                ]),
            ),
            ("base", base),
            ("points", points),
        ])
    }

    /// Where an interrupted run was closed.
    pub(super) fn closed_json(&self) -> Json {
        let point = |lengths: &Option<(u64, u64)>| match lengths {
            None => Json::Null,
            Some((burn_in, draws)) => Json::object([
                ("burn_in", Json::Count(*burn_in)),
                ("draws", Json::Count(*draws)),
            ]),
        };
        match &self.closed {
            None => Json::Null,
            Some(points) => Json::array(points.iter().map(point)),
        }
    }

    pub(super) fn keep_json(&self) -> Json {
        Json::text(match self.keep {
            Keep::Draws => "draws",
            Keep::Summary => "summary",
        })
    }

    pub(super) fn accepted_json(&self) -> Json {
        let conditions = self.accepted.conditions.iter();
        Json::object([
            (
                "conditions",
                Json::array(conditions.map(|c| Json::text(&**c))),
            ),
            ("because", Json::text(&*self.accepted.because)),
        ])
    }
}

impl Point {
    fn sections(&self) -> Vec<(&'static str, Json)> {
        let reasons = self.model.reasons();
        vec![
            ("data", self.data_json()),
            ("rows", self.rows_json()),
            ("model", self.model.canonical()),
            ("reasons", Json::array(reasons.into_iter().map(Json::text))),
            (
                "ensemble",
                Json::object([
                    ("chains", Json::Count(self.ensemble.chains)),
                    ("burn_in", self.burn_in_json()),
                    ("draws", Json::Count(self.ensemble.draws)),
                    ("every", Json::Count(self.ensemble.every)),
                ]),
            ),
            ("block", Json::Count(self.block)),
            ("goal", self.goal_json()),
            ("estimands", self.estimands_json()),
            ("predict", self.predict_json()),
        ]
    }

    pub(super) fn data_json(&self) -> Json {
        Json::array(self.data.iter().map(|data| {
            Json::object([
                ("name", Json::text(&*data.name)),
                ("sha256", Json::text(&*data.sha256)),
                ("read", data.read.clone()),
            ])
        }))
    }

    /// What the files held, for the reader; it follows from their bytes.
    fn rows_json(&self) -> Json {
        Json::array(self.data.iter().map(|data| {
            Json::object([
                ("name", Json::text(&*data.name)),
                ("rows", Json::Count(data.rows)),
                ("missing", Json::Count(data.missing)),
                ("dropped", Json::Count(data.dropped)),
                ("units", pairs(&data.units)),
            ])
        }))
    }

    pub(super) fn units_json(&self) -> Json {
        Json::object(
            self.data
                .iter()
                .map(|data| (&*data.name, pairs(&data.units))),
        )
    }

    pub(super) fn burn_in_json(&self) -> Json {
        match self.ensemble.burn_in {
            BurnIn::Fixed(draws) => Json::Count(draws),
            BurnIn::Chosen { from, at_most } => Json::object([
                ("from", Json::Count(from)),
                ("at_most", Json::Count(at_most)),
            ]),
        }
    }

    pub(super) fn goal_json(&self) -> Json {
        let Some(goal) = &self.goal else {
            return Json::Null;
        };
        Json::object([
            ("error", goal.error.map_or(Json::Null, Json::real)),
            ("r_hat", Json::real(goal.r_hat)),
            ("effective", Json::real(goal.effective)),
            ("at_most", Json::Count(goal.at_most)),
        ])
    }

    pub(super) fn estimands_json(&self) -> Json {
        Json::array(self.estimands.iter().map(|estimand| {
            Json::object([
                ("name", Json::text(&*estimand.name)),
                ("of", Json::text(&*estimand.of)),
                ("unit", optional(estimand.unit.as_deref())),
                ("give", Json::array(estimand.give.iter().map(Give::json))),
                ("goal", estimand.goal.map_or(Json::Null, |goal| goal.json())),
            ])
        }))
    }

    /// What is recorded of the chains: as much of the estimands as can move a number in a block.
    pub(super) fn recorded_json(&self) -> Json {
        let of = self.estimands.iter().map(|e| Json::text(&*e.of));
        let predict = self.predict.iter().map(|prediction| {
            let law = Json::text(&*prediction.law);
            let members = [("law", law), ("per", prediction.per.clone())];
            (&*prediction.name, Json::object(members))
        });
        Json::object([("of", Json::array(of)), ("predict", Json::object(predict))])
    }

    pub(super) fn predict_json(&self) -> Json {
        Json::object(self.predict.iter().map(|prediction| {
            let members = [
                ("law", Json::text(&*prediction.law)),
                ("per", prediction.per.clone()),
                ("unit", optional(prediction.unit.as_deref())),
            ];
            (&*prediction.name, Json::object(members))
        }))
    }
}

impl Give {
    fn json(&self) -> Json {
        match *self {
            Give::Value => Json::text("value"),
            Give::Uncertainty => Json::text("uncertainty"),
            Give::Quantile(part) => Json::object([("quantile", Json::real(part))]),
            Give::Interval(part) => Json::object([("interval", Json::real(part))]),
        }
    }
}

impl EstimandGoal {
    fn json(self) -> Json {
        match self {
            EstimandGoal::Absolute(error) => Json::object([("absolute", Json::real(error))]),
            EstimandGoal::Relative(error) => Json::object([("relative", Json::real(error))]),
            EstimandGoal::Digits(digits) => Json::object([("digits", Json::Count(digits))]),
        }
    }
}

fn optional(text: Option<&str>) -> Json {
    text.map_or(Json::Null, Json::text)
}

fn pairs(list: &[(String, String)]) -> Json {
    Json::object(
        list.iter()
            .map(|(name, text)| (&**name, Json::text(&**text))),
    )
}
