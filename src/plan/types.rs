//! The plan, typed. Nothing in it is left to a default.

use crate::canon::Json;
use crate::course::Model;
use std::fmt;
use std::path::PathBuf;
use std::sync::Arc;

/// Versions of what makes the digits.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Numerics {
    /// Raised when a draw, the layout of a checkpoint, a default or plan resolution changes.
    pub draws: u64,
    /// Raised when an estimate changes.
    pub estimates: u64,
}

pub const NUMERICS: Numerics = Numerics {
    draws: 1,
    estimates: 1,
};

/// Bytes of saved states that a record keeps, all points together, beyond the last of each phase: so many that
/// any part of a run can be drawn again without drawing all before it.
pub const CHECKPOINT_BYTES: u64 = 64 << 20;

/// A study resolved: what a run follows.
#[derive(Debug, Clone)]
pub struct Plan {
    pub title: String,
    pub question: String,
    /// Root of all streams; `7` and `"7"` are the same.
    pub root: String,
    /// In the order of the file; empty without a sweep.
    pub axes: Vec<SweepAxis>,
    pub combine: Combine,
    pub streams: Streams,
    /// With shared streams: what the stream keys of all points cover in place of each point's own model,
    /// which is the study as written, formulas as printed from their tree, without the swept values.
    pub shared: Option<Json>,
    /// At least one.
    pub points: Vec<Point>,
    pub keep: Keep,
    /// Conditions accepted in spite of their standing.
    pub accepted: Accepted,
    /// The files that the study was resolved with, each once. Where they lie is outside every digest.
    pub inputs: Vec<Input>,
    /// [`NUMERICS`], but of a record made under another.
    pub numerics: Numerics,
    /// Where an interrupted run was closed; left out, the plan is followed to its end.
    pub closed: Option<Closed>,
}

/// Draws a chain in burn-in and after it, for each point; `None` for a point that had no draws yet.
pub type Closed = Vec<Option<(u64, u64)>>;

/// A file that a study names: data or a start.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Input {
    /// The path as the study writes it.
    pub written: String,
    pub path: PathBuf,
    /// Lower-case hexadecimal, of the bytes it had.
    pub sha256: String,
}

/// A data file by its name in the study and the bytes it had.
#[derive(Debug, Clone, PartialEq)]
pub struct Data {
    pub name: String,
    /// Lower-case hexadecimal, of the file's bytes.
    pub sha256: String,
    /// How its cells were read (names, columns, labels, missing, matrices), in canonical form.
    pub read: Json,
    /// Units of its columns, in order of name.
    pub units: Vec<(String, String)>,
    /// Rows kept.
    pub rows: u64,
    /// Empty cells found; the number is always reported.
    pub missing: u64,
    /// Rows left out for a missing cell.
    pub dropped: u64,
}

/// One swept path with all its values.
#[derive(Debug, Clone, PartialEq)]
pub struct SweepAxis {
    /// Dotted path into the study.
    pub path: String,
    pub values: Vec<Json>,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Combine {
    /// Every value of an axis with every value of the others; the last axis moves fastest.
    Grid,
    /// The first values together, the second values together …
    Pair,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Streams {
    Own,
    /// Common random numbers across points.
    Shared,
}

/// Which draws the record keeps.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Keep {
    Draws,
    Summary,
}

/// `[grounds]`: conditions that the author accepts, and why.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Accepted {
    pub conditions: Vec<String>,
    pub because: String,
}

/// One combination of swept values; a study without a sweep has one, with no values.
#[derive(Clone)]
pub struct Point {
    /// What it varies, in the order of the axes.
    pub values: Vec<(String, Json)>,
    /// In order of name.
    pub data: Vec<Data>,
    pub model: Arc<dyn Model>,
    pub ensemble: Ensemble,
    /// `None`: run the draws asked for and stop.
    pub goal: Option<Goal>,
    pub estimands: Vec<Estimand>,
    /// `[predict]`, in order of name.
    pub predict: Vec<Prediction>,
    /// Draws in a block.
    pub block: u64,
}

impl fmt::Debug for Point {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Point")
            .field("values", &self.values)
            .field("model", &self.model.canonical().canonical())
            .field("ensemble", &self.ensemble)
            .field("goal", &self.goal)
            .field("estimands", &self.estimands)
            .field("block", &self.block)
            .finish()
    }
}

#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Ensemble {
    pub chains: u64,
    pub burn_in: BurnIn,
    /// A chain; with a goal, the first review.
    pub draws: u64,
    /// Steps of the kernel between recorded draws.
    pub every: u64,
}

/// In draws a chain (`every` steps each).
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum BurnIn {
    Fixed(u64),
    /// Doubled from `from` until R-hat over its last half is small enough, at most this long.
    Chosen {
        from: u64,
        at_most: u64,
    },
}

/// What must be reached by every estimand, and where to stop in any case.
#[derive(Debug, Clone, PartialEq)]
pub struct Goal {
    /// Monte Carlo error of each mean over its standard deviation; `None` where not asked for.
    pub error: Option<f64>,
    /// The larger of bulk and folded.
    pub r_hat: f64,
    /// Bulk and tail, all chains together.
    pub effective: f64,
    /// Draws a chain.
    pub at_most: u64,
}

#[derive(Debug, Clone, PartialEq)]
pub struct Estimand {
    pub name: String,
    /// The formula as printed from its parsed tree.
    pub of: String,
    /// Its own, or that of the unknown or prediction it is named after.
    pub unit: Option<String>,
    /// In the order given.
    pub give: Vec<Give>,
    pub goal: Option<EstimandGoal>,
}

/// A quantity drawn from a law given the unknowns.
#[derive(Debug, Clone, PartialEq)]
pub struct Prediction {
    pub name: String,
    /// The formula as printed from its parsed tree.
    pub law: String,
    /// How many values it has, as written; null where that follows from the law.
    pub per: Json,
    pub unit: Option<String>,
}

/// Draws over all chains that one estimate can take: their places are counted in 32 bits.
pub const MOST_DRAWS: u64 = u32::MAX as u64;

/// A figure asked of an estimand.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Give {
    /// The mean; of a condition, its probability.
    Value,
    /// The standard deviation of the quantity.
    Uncertainty,
    /// `quantile` in (0, 1); the median is 0.5.
    Quantile(f64),
    /// The central interval of this probability.
    Interval(f64),
}

/// A goal of one estimand's mean.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum EstimandGoal {
    /// Monte Carlo error at most this, in the estimand's unit.
    Absolute(f64),
    /// Monte Carlo error at most this part of the value's size.
    Relative(f64),
    /// So many significant digits of the standard uncertainty stand (JCGM 101:2008, 7.9.4).
    Digits(u64),
}
