//! The methods chosen where the study names none, and why.

use super::random_walk::Adapt;
use super::sampler::{Move, Settings};
use super::slice::{DEFAULT_LIMIT, DEFAULT_WIDTH};
use crate::course::{Coordinate, CoordinateKind};

/// The longest range that is drawn from its full conditional unasked.
const SHORT_RANGE: u64 = 64;

/// Moves for the coordinates `on`, each with a sentence.
pub fn choose(coordinates: &[Coordinate], on: &[usize]) -> Vec<(Move, String)> {
    let mut real = Vec::new();
    let mut short = Vec::new();
    let mut long = Vec::new();
    for &c in on {
        match coordinates[c].kind {
            CoordinateKind::Real => real.push(c),
            CoordinateKind::Integer {
                lower: Some(a),
                upper: Some(b),
            } if a.abs_diff(b) < SHORT_RANGE => {
                short.push(c);
            }
            CoordinateKind::Integer { .. } => long.push(c),
        }
    }
    let mut chosen = Vec::new();
    if !real.is_empty() {
        chosen.push(real_move(real));
    }
    if !short.is_empty() {
        let part = Move {
            settings: Settings::Conditional,
            coordinates: short,
        };
        chosen.push((part, "conditional".to_string()));
    }
    if !long.is_empty() {
        let part = Move {
            settings: integer_walk(None, None),
            coordinates: long,
        };
        chosen.push((part, "metropolis".to_string()));
    }
    chosen
}

fn real_move(coordinates: Vec<usize>) -> (Move, String) {
    let settings = Settings::Slice {
        width: DEFAULT_WIDTH,
        limit: DEFAULT_LIMIT,
    };
    (
        Move {
            settings,
            coordinates,
        },
        "slice".into(),
    )
}

/// Settings of the random walk on so many coordinates, with the defaults of what is left out.
pub fn random_walk(count: usize, scale: Option<f64>, adapt: Option<Adapt>) -> Settings {
    Settings::RandomWalk {
        scale: scale.unwrap_or_else(|| 2.38 / (count as f64).sqrt()),
        adapt: adapt.unwrap_or(Adapt::Covariance),
    }
}

/// Settings of the walk on integers, with the defaults of what is left out.
pub fn integer_walk(scale: Option<f64>, adapt: Option<Adapt>) -> Settings {
    Settings::IntegerWalk {
        scale: scale.unwrap_or(1.0),
        adapt: adapt != Some(Adapt::None),
    }
}
