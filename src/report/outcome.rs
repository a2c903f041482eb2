//! What a run came to, the digest of it, and every file that is rendered from it alone.

use super::{WIDTH, grounds_json, report_html, run_text, summary_csv, summary_json};
use crate::canon::{self, Json};
use crate::engine::trail::Digest;
use crate::engine::{PointEnd, Reviewed, summary};
use crate::estimates::{Paired, Summary, count};
use crate::grounds::{Grounds, grounds};
use crate::plan::{self, Plan};

/// The grounds of a point of a plan, with what its draws add once it has run.
pub fn grounds_of(plan: &Plan, point: usize, summary: Option<&Summary>) -> Grounds {
    let conditions = plan.points[point].model.conditions();
    grounds(&conditions, summary, &plan.accepted)
}

/// Why a point of a closed run has no figures.
pub const CLOSED_BEFORE: &str = "the run was closed before this point had draws";

/// What a run came to. The same plan and draws give the same outcome on every machine.
#[derive(Debug, Clone)]
pub struct Outcome<'a> {
    pub plan: &'a Plan,
    /// Points with figures.
    pub points: Vec<(Summary, Grounds)>,
    /// Points whose chains found no start, and why.
    pub failed: Vec<(usize, String)>,
    /// The last link of each chain's trail, for every point; none where no start was found.
    links: Vec<Vec<Digest>>,
}

impl<'a> Outcome<'a> {
    /// Every name that [`Outcome::files`] may give.
    pub const FILES: [&'static str; 7] = [
        "data/plan.json",
        "data/summary.json",
        "data/summary.csv",
        "data/summary.txt",
        "data/grounds.json",
        "data/report.html",
        "data/failed.json",
    ];

    /// From the ends of all points, in the order of the points, and for each its differences from the first.
    pub fn of(
        plan: &'a Plan,
        ends: &[PointEnd<Reviewed>],
        paired: Vec<Option<Paired>>,
    ) -> Outcome<'a> {
        let mut outcome = Outcome {
            plan,
            points: Vec::new(),
            failed: Vec::new(),
            links: Vec::new(),
        };
        for (end, paired) in ends.iter().zip(paired) {
            match &end.ended {
                Err(words) => {
                    outcome.failed.push((end.point, words.clone()));
                    outcome.links.push(Vec::new());
                }
                Ok(ended) => {
                    let summary = summary(plan, end, paired).expect("the point has figures");
                    let grounds = grounds_of(plan, end.point, Some(&summary));
                    outcome.points.push((summary, grounds));
                    outcome.links.push(ended.links.clone());
                }
            }
        }
        outcome
    }

    /// The result digest: SHA-256 over plan digest, the last link of every trail, estimates, the standing of
    /// every condition, and the points that found no start.
    pub fn digest(&self) -> Digest {
        let links = |links: &Vec<Digest>| {
            Json::array(links.iter().map(|link| Json::text(canon::hex(link))))
        };
        let covered = Json::object([
            ("plan_digest", Json::text(canon::hex(&self.plan.digest()))),
            ("links", Json::array(self.links.iter().map(links))),
            ("estimates", self.summary(None)),
            ("standings", self.standings()),
            ("failed", self.failed_json()),
        ]);
        canon::tagged("odograph result digest", &covered)
    }

    fn standings(&self) -> Json {
        let condition = |c: &crate::course::Condition| {
            let word = crate::grounds::standing_word(c.standing);
            Json::array([Json::text(c.name), Json::text(word)])
        };
        let point = |(_, grounds): &(Summary, Grounds)| {
            let all = grounds.claims.iter();
            let all =
                all.flat_map(|claim| claim.conditions.iter().chain(claim.ways.iter().flatten()));
            Json::array(all.map(condition))
        };
        Json::array(self.points.iter().map(point))
    }

    fn summary(&self, result: Option<&str>) -> Json {
        let summaries: Vec<Summary> = self.points.iter().map(|(s, _)| s.clone()).collect();
        let digest = canon::hex(&self.plan.digest());
        summary_json(self.plan.numerics, &digest, result, &summaries)
    }

    /// The files rendered from plan and outcome alone, by their names in a record.
    pub fn files(&self) -> Vec<(&'static str, Vec<u8>)> {
        let result = canon::hex(&self.digest());
        let summaries: Vec<Summary> = self.points.iter().map(|(s, _)| s.clone()).collect();
        let keyed: Vec<(String, Grounds)> = self
            .points
            .iter()
            .map(|(summary, grounds)| (summary.key.clone(), grounds.clone()))
            .collect();
        let closed = self.closed_text();
        let head = [&*self.plan.title, &*self.plan.question, &*closed];
        let mut text = run_text(&head, &self.points, WIDTH);
        text.push_str(&self.failed_text());
        let mut files = vec![
            ("data/plan.json", self.plan.json().pretty()),
            ("data/summary.json", self.summary(Some(&result)).pretty()),
            ("data/summary.csv", summary_csv(&summaries)),
            ("data/summary.txt", text),
            ("data/grounds.json", grounds_json(&keyed).pretty()),
            ("data/report.html", report_html(self)),
        ];
        if !self.failed.is_empty() {
            files.push(("data/failed.json", self.failed_json().pretty()));
        }
        let bytes = |(name, text): (&'static str, String)| (name, text.into_bytes());
        files.into_iter().map(bytes).collect()
    }

    /// Of a run that was closed before its end, how far it was from it; empty of others.
    pub fn closed_text(&self) -> String {
        let Some(closed) = &self.plan.closed else {
            return String::new();
        };
        let most = |point: usize| {
            let point = &self.plan.points[point];
            let reviews = plan::reviews(&point.ensemble, point.goal.as_ref(), point.block);
            reviews[reviews.len() - 1]
        };
        let words = match &closed[..] {
            [Some((_, draws))] => format!(
                "after {} of at most {} draws a chain",
                count(*draws),
                count(most(0))
            ),
            points => {
                let none = points.iter().filter(|point| point.is_none()).count();
                let short = points.iter().enumerate();
                let short = short.filter(|(at, point)| point.is_some_and(|p| p.1 < most(*at)));
                format!(
                    "when {} of its {} points had fewer draws than they may come to, and {} had none",
                    short.count(),
                    points.len(),
                    none
                )
            }
        };
        format!("Closed early: this run was interrupted and sealed as it stood, {words}.")
    }

    pub(super) fn values_text(&self, point: usize) -> String {
        let values = self.plan.points[point].values.iter();
        let values = values.map(|(path, value)| format!("{path} = {}", value.canonical()));
        values.collect::<Vec<_>>().join(", ")
    }

    fn failed_text(&self) -> String {
        if self.failed.is_empty() {
            return String::new();
        }
        let mut text = format!("\nPoints that found no start: {}\n", self.failed.len());
        for (point, words) in &self.failed {
            text.push_str(&format!("  {}: {words}\n", self.values_text(*point)));
        }
        text
    }

    fn failed_json(&self) -> Json {
        let point = |(point, words): &(usize, String)| {
            let values = self.plan.points[*point].values.clone();
            Json::object([
                ("key", Json::text(canon::hex(&self.plan.point_key(*point)))),
                ("values", Json::object(values)),
                ("reason", Json::text(words.clone())),
            ])
        };
        Json::object([("points", Json::array(self.failed.iter().map(point)))])
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples;
    use super::*;
    use crate::course::Standing;
    use crate::plan;

    type Change = fn(&mut Outcome<'_>);

    /// What moves the result digest.
    const COVERED: &[(&str, Change)] = &[
        ("link", |o| o.links[0][1] = [9; 32]),
        ("value", |o| {
            o.points[0].0.figures[0].estimate.value = Some(1.0)
        }),
        ("mcse", |o| o.points[0].0.figures[0].estimate.mcse = None),
        ("quantile", |o| {
            o.points[0].0.figures[0].estimate.quantiles[0].value = None
        }),
        ("draws", |o| o.points[0].0.draws_per_chain += 1),
        ("burn-in", |o| o.points[0].0.burn_in += 1),
        ("standing", |o| {
            o.points[0].1.claims[0].conditions[0].standing = Standing::Failed
        }),
        ("failed", |o| o.failed[0].1 = "another reason".into()),
        ("order", |o| o.points.swap(0, 1)),
    ];

    /// What does not: words for the reader.
    const OUTSIDE: &[(&str, Change)] = &[
        ("evidence", |o| {
            o.points[0].1.claims[0].conditions[0].evidence = "x".into()
        }),
        ("advice", |o| o.points[0].0.advice = Some("x".into())),
    ];

    #[test]
    fn the_result_digest_covers_what_its_table_says() {
        let plan = plan::sample();
        let mut points: Vec<(Summary, Grounds)> = samples::sweep()
            .into_iter()
            .map(|summary| (summary.clone(), samples::standings(&summary)))
            .collect();
        points.truncate(2);
        let outcome = Outcome {
            plan: &plan,
            points,
            failed: vec![(1, "no start".into())],
            links: vec![vec![[1; 32], [2; 32]], Vec::new()],
        };
        let whole = outcome.digest();
        for (what, change) in COVERED {
            let mut changed = outcome.clone();
            change(&mut changed);
            assert_ne!(changed.digest(), whole, "{what}");
        }
        for (what, change) in OUTSIDE {
            let mut changed = outcome.clone();
            change(&mut changed);
            assert_eq!(changed.digest(), whole, "{what}");
        }
        let mut other = plan::sample();
        other.title = "U".into();
        let other = Outcome {
            plan: &other,
            ..outcome
        };
        assert_ne!(other.digest(), whole);
    }
}
