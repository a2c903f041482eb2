//! What each key and digest covers.
//!
//! | name | covers |
//! |---|---|
//! | stream key | model, data, sampler, start, burn-in, `every`, block rule, swept values (with shared streams: the study without them), root, chain index |
//! | chain key | stream key, swept values, `NUMERICS.draws`; with shared streams also the point's own model, data, sampler, start, burn-in, `every`; with a self-chosen burn-in also the number of chains and the estimands |
//! | plan digest | all chain keys, draws, goal, estimands, predictions, block lengths, `keep`, accepted grounds, title, question, `NUMERICS.estimates`, where an interrupted run was closed |
//! | result digest | plan digest, last links of all trails, estimates, standings of all conditions, points without a start (`report::Outcome::digest`) |
//!
//! A self-chosen burn-in ends when R-hat of the recorded quantities over all chains is small, so the draws
//! after it do depend on how many chains there are and on what is recorded; without that, two chains of one
//! key could differ.

use crate::canon::{Json, hex, tagged};
use crate::plan::types::*;

/// Version of the rule of [`crate::plan::block_length`].
const BLOCK_RULE: u64 = 1;

impl Plan {
    /// Seeds a chain of a point.
    pub fn stream_key(&self, point: usize, chain: u64) -> [u8; 32] {
        self.stream_keys(point, chain..chain + 1)[0]
    }

    /// Heads the trail of a chain of a point; two chains with the same key have the same draws.
    pub fn chain_key(&self, point: usize, chain: u64) -> [u8; 32] {
        self.chain_keys(point, chain..chain + 1)[0]
    }

    /// Names a point by its content: what all its chain keys share.
    pub fn point_key(&self, point: usize) -> [u8; 32] {
        let mut covered = vec![
            ("content", self.content(point)),
            ("values", values(&self.points[point])),
            ("root", Json::text(&*self.root)),
            ("numerics_draws", Json::Count(self.numerics.draws)),
        ];
        covered.extend(self.own(point));
        tagged("odograph point key", &Json::object(covered))
    }

    /// Names the folder.
    pub fn digest(&self) -> [u8; 32] {
        let points = (0..self.points.len()).map(|at| {
            let point = &self.points[at];
            let keys = self.chain_keys(at, 0..point.ensemble.chains);
            Json::object([
                (
                    "chains",
                    Json::array(keys.iter().map(|key| Json::text(hex(key)))),
                ),
                ("draws", Json::Count(point.ensemble.draws)),
                ("goal", point.goal_json()),
                ("estimands", point.estimands_json()),
                ("predict", point.predict_json()),
                ("block", Json::Count(point.block)),
                ("units", point.units_json()),
            ])
        });
        let mut covered = vec![
            ("title", Json::text(&*self.title)),
            ("question", Json::text(&*self.question)),
            ("keep", self.keep_json()),
            ("accepted", self.accepted_json()),
            ("numerics_estimates", Json::Count(self.numerics.estimates)),
            ("points", Json::array(points)),
        ];
        if self.closed.is_some() {
            covered.push(("closed", self.closed_json()));
        }
        tagged("odograph plan digest", &Json::object(covered))
    }

    /// [`Plan::stream_key`] of several chains of a point.
    pub fn stream_keys(&self, point: usize, chains: std::ops::Range<u64>) -> Vec<[u8; 32]> {
        // The content may be large: hashed once for all chains.
        let content = tagged("odograph stream content", &self.content(point));
        let values = match self.shared {
            Some(_) => Json::Null,
            None => values(&self.points[point]),
        };
        let key = |chain| {
            let covered = Json::object([
                ("content", Json::text(hex(&content))),
                ("values", values.clone()),
                ("root", Json::text(&*self.root)),
                ("chain", Json::Count(chain)),
            ]);
            tagged("odograph stream key", &covered)
        };
        chains.map(key).collect()
    }

    /// [`Plan::chain_key`] of several chains of a point.
    pub fn chain_keys(&self, point: usize, chains: std::ops::Range<u64>) -> Vec<[u8; 32]> {
        let streams = self.stream_keys(point, chains);
        let own = self.own(point);
        let point = &self.points[point];
        let together = match point.ensemble.burn_in {
            BurnIn::Fixed(_) => Json::Null,
            BurnIn::Chosen { .. } => Json::object([
                ("chains", Json::Count(point.ensemble.chains)),
                ("estimands", point.recorded_json()),
            ]),
        };
        let key = |stream: &[u8; 32]| {
            let mut covered = vec![
                ("stream", Json::text(hex(stream))),
                ("values", values(point)),
                ("together", together.clone()),
                ("numerics_draws", Json::Count(self.numerics.draws)),
            ];
            covered.extend(own.clone());
            tagged("odograph chain key", &Json::object(covered))
        };
        streams.iter().map(key).collect()
    }

    /// What a point's chains follow, before any value is swept into the key.
    fn content(&self, point: usize) -> Json {
        match &self.shared {
            Some(shared) => shared.clone(),
            None => self.points[point].content(),
        }
    }

    /// With shared streams, the digest of what a point has of its own: the stream key leaves out what is swept,
    /// and of a swept path to a file the value says nothing of its bytes.
    fn own(&self, point: usize) -> Option<(&'static str, Json)> {
        self.shared.as_ref()?;
        let content = tagged("odograph point content", &self.points[point].content());
        Some(("own", Json::text(hex(&content))))
    }
}

impl Point {
    fn content(&self) -> Json {
        Json::object([
            ("model", self.model.canonical()),
            ("resolved", self.shared_parts(true, true, true)),
        ])
    }

    /// What a stream key covers beside the model; with shared streams, without what is swept.
    pub(crate) fn shared_parts(&self, data: bool, burn_in: bool, every: bool) -> Json {
        let given = |given: bool, json: Json| if given { json } else { Json::Null };
        Json::object([
            ("data", given(data, self.data_json())),
            ("burn_in", given(burn_in, self.burn_in_json())),
            ("every", given(every, Json::Count(self.ensemble.every))),
            ("block_rule", Json::Count(BLOCK_RULE)),
        ])
    }
}

/// In order of path: that of the axes in the file must not move a draw.
fn values(point: &Point) -> Json {
    let mut values: Vec<&(String, Json)> = point.values.iter().collect();
    values.sort_by(|a, b| a.0.cmp(&b.0));
    let pair = |(path, value): &(String, Json)| Json::array([Json::text(&**path), value.clone()]);
    Json::array(values.into_iter().map(pair))
}

#[cfg(test)]
pub(super) mod tests;
