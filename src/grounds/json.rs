//! `grounds.json`.

use super::claim::{Claim, Grounds};
use super::condition::{meaning, standing_word};
use crate::canon::Json;
use crate::course::Condition;

impl Grounds {
    /// The canonical form of the grounds of one point.
    pub fn json(&self) -> Json {
        Json::object([
            (
                "claims",
                Json::array(self.claims.iter().map(|c| self.claim_json(c))),
            ),
            (
                "accepted",
                Json::object([
                    (
                        "conditions",
                        Json::array(self.accepted.conditions.iter().map(Json::text)),
                    ),
                    ("because", Json::text(self.accepted.because.clone())),
                ]),
            ),
            (
                "failed",
                Json::array(self.failed().iter().map(|c| Json::text(c.name))),
            ),
        ])
    }

    fn claim_json(&self, claim: &Claim) -> Json {
        let list = |conditions: &[Condition]| {
            Json::array(conditions.iter().map(|c| self.condition_json(c)))
        };
        let mut members = vec![
            ("claim", Json::text(claim.name)),
            ("standing", Json::text(standing_word(claim.standing))),
            ("needed", Json::Bool(claim.needed)),
            ("sources", Json::text(claim.sources)),
            ("conditions", list(&claim.conditions)),
        ];
        if !claim.ways.is_empty() {
            members.push((
                "and_one_of",
                Json::array(claim.ways.iter().map(|way| list(way))),
            ));
        }
        Json::object(members)
    }

    fn condition_json(&self, condition: &Condition) -> Json {
        Json::object([
            ("condition", Json::text(condition.name)),
            (
                "meaning",
                meaning(condition.name).map_or(Json::Null, Json::text),
            ),
            ("standing", Json::text(standing_word(condition.standing))),
            ("evidence", Json::text(condition.evidence.clone())),
            ("accepted", Json::Bool(self.accepts(condition.name))),
        ])
    }
}
