//! The methods chosen where the study names none, and why.
//!
//! Measured on eight chains, burn-in of 500 draws: least effective size of any coordinate, over the number of
//! draws, with the evaluations of the density that a draw takes. (The second row is what a study gets that
//! asks for `metropolis` with `times` = 3 n.)
//!
//! | n coordinates          | pumps 12 | logistic 3 | line 3 | schools 10 | scales 1e-4 .. 1e4, 5 | student 2.5, 4 |
//! |------------------------|----------|------------|--------|------------|-----------------------|----------------|
//! | slice sweep            | 0.25, 66 | 0.07, 18   | 0.02, 19 | 0.49, 56 | 0.11, 30              | 0.80, 26       |
//! | random walk 3 n        | 0.53, 36 | 0.61, 9    | 0.63, 9  | 0.52, 30 | 0.10, 15              | 0.35, 12       |
//! | sweep, random walk 3 n | 0.71, 102 | 0.63, 27  | 0.66, 28 | 0.67, 86 | 0.71, 44              | 0.82, 38       |
//!
//! Each alone fails somewhere: the sweep on correlation (a line through data far from its origin), the walk
//! where scales lie far apart or tails are heavy. Together they cost at most three times the better one.

use super::random_walk::Adapt;
use super::sampler::{Move, Settings};
use super::slice::{DEFAULT_LIMIT, DEFAULT_WIDTH};
use crate::course::{Coordinate, CoordinateKind};

/// The longest range that is drawn from its full conditional unasked.
const SHORT_RANGE: u64 = 64;

/// The most coordinates whose covariance is learned unasked: beyond, three steps a coordinate with a full
/// factor cost more than most densities.
const LEARNED: usize = 64;

/// The most coordinates whose covariance is learned at all: state and factor grow as their square, and each is
/// kept with every block.
pub const MOST_LEARNED: usize = 1000;

/// Moves for some coordinates, how often each is made, and a sentence.
pub struct Choice {
    pub moves: Vec<(Move, u64)>,
    pub reason: String,
}

/// What is chosen for the coordinates `on`.
pub fn choose(coordinates: &[Coordinate], on: &[usize]) -> Vec<Choice> {
    let mut real = Vec::new();
    let mut short = Vec::new();
    let mut long = Vec::new();
    for &c in on {
        match coordinates[c].kind {
            CoordinateKind::Real => real.push(c),
            CoordinateKind::Integer {
                lower: Some(a),
                upper: Some(b),
            } if a.abs_diff(b) < SHORT_RANGE => short.push(c),
            CoordinateKind::Integer { .. } => long.push(c),
        }
    }
    let parts = [
        (real, of_real as fn(_) -> _),
        (short, of_short),
        (long, of_long),
    ];
    parts
        .into_iter()
        .filter(|(coordinates, _)| !coordinates.is_empty())
        .map(|(coordinates, choice)| choice(coordinates))
        .collect()
}

fn of_real(coordinates: Vec<usize>) -> Choice {
    let count = coordinates.len();
    let sweep = Move {
        settings: Settings::Slice {
            width: DEFAULT_WIDTH,
            limit: DEFAULT_LIMIT,
        },
        coordinates: coordinates.clone(),
    };
    if count == 1 {
        return Choice {
            moves: vec![(sweep, 1)],
            reason: "slice sampling for the one continuous coordinate: nearly independent draws for about \
                     six evaluations, whatever its scale"
                .into(),
        };
    }
    if count > LEARNED {
        return Choice {
            moves: vec![(sweep, 1)],
            reason: format!(
                "slice sampling for the {count} continuous coordinates, one by one: they are too many for \
                 their covariance to be learned in burn-in; strong correlation between them will slow it down"
            ),
        };
    }
    let steps = 3 * count as u64;
    let walk = Move {
        settings: random_walk(count, None, None),
        coordinates,
    };
    Choice {
        moves: vec![(sweep, 1), (walk, steps)],
        reason: format!(
            "for the {count} continuous coordinates a slice sweep, which finds the scale of each and copes with \
             heavy tails, then {steps} random-walk steps shaped by the covariance learned in burn-in, which \
             cope with correlation"
        ),
    }
}

fn of_short(coordinates: Vec<usize>) -> Choice {
    let reason = format!(
        "full conditional for {}: at most {SHORT_RANGE} values each, so that every one can be evaluated",
        integers(coordinates.len())
    );
    let part = Move {
        settings: Settings::Conditional,
        coordinates,
    };
    Choice {
        moves: vec![(part, 1)],
        reason,
    }
}

fn of_long(coordinates: Vec<usize>) -> Choice {
    let reason = format!(
        "Metropolis for {}: more than {SHORT_RANGE} values, or no end to them, so that steps of a length \
         learned in burn-in are cheaper than going through all",
        integers(coordinates.len())
    );
    let part = Move {
        settings: integer_walk(None, None),
        coordinates,
    };
    Choice {
        moves: vec![(part, 1)],
        reason,
    }
}

fn integers(count: usize) -> String {
    if count == 1 {
        "one integer coordinate".into()
    } else {
        format!("{count} integer coordinates")
    }
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
