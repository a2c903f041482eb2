//! What each key and digest covers.

use crate::canon::Json;
use crate::plan::types::*;
use sha2::{Digest, Sha256};

/// The rule of [`crate::plan::block_length`] and [`crate::plan::reviews`], as far as it can move a digit.
const BLOCK_RULE: u64 = 1;

impl Plan {
    /// Seeds a chain of a point.
    pub fn stream_key(&self, point: usize, chain: u64) -> [u8; 32] {
        let point = &self.points[point];
        let content = match &self.shared {
            Some(shared) => Json::object([("shared", shared.clone())]),
            None => Json::object([("content", self.content(point)), ("values", values(point))]),
        };
        let covered = Json::object([
            ("content", content),
            ("root", Json::text(&*self.root)),
            ("chain", Json::Count(chain)),
        ]);
        tagged("odograph stream key", &covered)
    }

    /// Heads the trail of a chain of a point; two chains with the same key have the same draws.
    pub fn chain_key(&self, point: usize, chain: u64) -> [u8; 32] {
        let key = self.stream_key(point, chain);
        let point = &self.points[point];
        let mut members = vec![
            ("stream_key", Json::text(crate::canon::hex(&key))),
            ("values", values(point)),
            ("numerics_draws", Json::Count(NUMERICS.draws)),
        ];
        if let BurnIn::Chosen { .. } = point.ensemble.burn_in {
            // When burn-in ends depends on what all chains recorded.
            members.push(("chains", Json::Count(point.ensemble.chains)));
            members.push(("estimands", estimands(point)));
        }
        tagged("odograph chain key", &Json::object(members))
    }

    /// Names a point by its content: what all its chain keys share.
    pub fn point_key(&self, point: usize) -> [u8; 32] {
        self.chain_key(point, 0)
    }

    /// Names the folder.
    pub fn digest(&self) -> [u8; 32] {
        tagged("odograph plan", &self.canonical())
    }

    /// The plan in canonical form (`plan.json`).
    pub fn canonical(&self) -> Json {
        Json::Null
    }

    fn content(&self, point: &Point) -> Json {
        Json::object([
            ("model", point.model.canonical()),
            ("block_rule", Json::Count(BLOCK_RULE)),
        ])
    }
}

fn values(point: &Point) -> Json {
    Json::array(
        point
            .values
            .iter()
            .map(|(path, value)| Json::array([Json::text(&**path), value.clone()])),
    )
}

fn estimands(_point: &Point) -> Json {
    Json::Null
}

/// SHA-256 over a tag and the canonical text, each with its length before it.
fn tagged(tag: &str, json: &Json) -> [u8; 32] {
    let mut hash = Sha256::new();
    for field in [tag.as_bytes(), json.canonical().as_bytes()] {
        hash.update((field.len() as u64).to_le_bytes());
        hash.update(field);
    }
    hash.finalize().into()
}
