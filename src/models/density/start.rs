//! Where a chain starts: spread, from the prior, as stated, or from a file.

use super::posterior::Posterior;
use super::unknown::Unknown;
use crate::canon::Json;
use crate::course::{ChainSeed, StartFault};
use crate::formula::Program;
use crate::random::{Purpose, Stream};
use std::collections::BTreeMap;

/// `[ensemble] start`, resolved.
#[derive(Debug, Clone, PartialEq)]
pub enum Start {
    /// Each unknown from the middle half of its law, those it depends on first.
    Spread,
    /// Each unknown from its law.
    Prior,
    /// Stated values; unknowns without one as under `Spread`.
    At(BTreeMap<String, Vec<f64>>),
    /// A row of stated values for each chain.
    File {
        sha256: String,
        rows: Vec<BTreeMap<String, Vec<f64>>>,
    },
}

/// Starts with a density of 0 are drawn again so often.
const TRIES: usize = 1000;

impl Start {
    pub fn canonical(&self) -> Json {
        match self {
            Start::Spread => Json::text("spread"),
            Start::Prior => Json::text("prior"),
            Start::At(values) => Json::object(values.iter().map(|(name, values)| {
                (
                    name.clone(),
                    Json::array(values.iter().map(|&value| Json::real(value))),
                )
            })),
            Start::File { sha256, .. } => Json::object([("file", Json::text(sha256.clone()))]),
        }
    }

    /// The coordinates at which a chain starts.
    ///
    /// # Errors
    /// When a stated value lies outside its unknown's support, or no start with a density above 0 was found:
    /// the words name the part of the log density that is not finite.
    pub fn of_chain(
        &self,
        posterior: &Posterior,
        seed: &ChainSeed,
    ) -> Result<Vec<f64>, StartFault> {
        let mut stream = Stream::new(&seed.stream_key, Purpose::Start);
        let none = BTreeMap::new();
        let stated = match self {
            Start::Spread | Start::Prior => &none,
            Start::At(values) => values,
            Start::File { rows, .. } => rows.get(seed.chain).ok_or_else(|| {
                StartFault(format!(
                    "the start file has {} rows, chain {} has none: give a row for each chain",
                    rows.len(),
                    seed.chain + 1
                ))
            })?,
        };
        let mut target = posterior.target.machine(1);
        let all_stated = posterior
            .unknowns
            .iter()
            .all(|unknown| stated.contains_key(&unknown.name));
        let tries = if all_stated { 1 } else { TRIES };
        let mut coordinates = Vec::new();
        for _ in 0..tries {
            coordinates = self.attempt(posterior, stated, &mut stream)?;
            let mut density = [0.0];
            target.run(&coordinates, &mut density);
            if density[0].is_finite() {
                return Ok(coordinates);
            }
        }
        Err(StartFault(blame(posterior, &coordinates, tries)))
    }

    fn attempt(
        &self,
        posterior: &Posterior,
        stated: &BTreeMap<String, Vec<f64>>,
        stream: &mut Stream,
    ) -> Result<Vec<f64>, StartFault> {
        let mut coordinates = vec![0.0; posterior.coordinates.len()];
        for unknown in &posterior.unknowns {
            let place = unknown.first..unknown.first + unknown.len();
            let found = match stated.get(&unknown.name) {
                Some(values) => at_values(unknown, &coordinates, values)?,
                None => self.drawn(unknown, &coordinates, stream)?,
            };
            coordinates[place].copy_from_slice(&found);
        }
        Ok(coordinates)
    }

    fn drawn(
        &self,
        unknown: &Unknown,
        coordinates: &[f64],
        stream: &mut Stream,
    ) -> Result<Vec<f64>, StartFault> {
        let Some(program) = &unknown.at_quantile else {
            return Err(StartFault(format!(
                "`{}` has no finite law to start from: state where to, such as start = {{ at = {{ {} = … }} }}",
                unknown.name, unknown.name
            )));
        };
        let probabilities: Vec<f64> = (0..unknown.len())
            .map(|_| match self {
                Start::Prior => stream.open(),
                _ => 0.25 + 0.5 * stream.open(),
            })
            .collect();
        Ok(run(program, coordinates, &probabilities, unknown.len()))
    }
}

fn at_values(
    unknown: &Unknown,
    coordinates: &[f64],
    values: &[f64],
) -> Result<Vec<f64>, StartFault> {
    let found = run(&unknown.at_value, coordinates, values, unknown.len());
    for (i, (z, x)) in found.iter().zip(values).enumerate() {
        if !z.is_finite() || (unknown.integer && *x != crate::maths::Unary::Round.apply(*x)) {
            return Err(StartFault(format!(
                "the start of `{}`, {x}, lies outside the support of `{}`",
                unknown.element_name(i),
                unknown.law
            )));
        }
    }
    Ok(found)
}

/// A program from coordinates so far (and whatever stands in the later ones) and the elements' values.
fn run(program: &Program, coordinates: &[f64], values: &[f64], len: usize) -> Vec<f64> {
    let mut inputs = coordinates[..program.inputs() - len].to_vec();
    inputs.extend(values);
    let mut outputs = vec![0.0; len];
    program.machine(1).run(&inputs, &mut outputs);
    outputs
}

/// Names the first part of the log density that is not finite at a start.
fn blame(posterior: &Posterior, coordinates: &[f64], tries: usize) -> String {
    let mut parts = vec![0.0; posterior.part_names.len()];
    posterior.parts.machine(1).run(coordinates, &mut parts);
    let bad = parts.iter().position(|part| !part.is_finite());
    let none = match tries {
        1 => "the start as stated has no density that is finite and above 0".to_string(),
        n => format!("none of {n} starts has a density that is finite and above 0"),
    };
    match bad {
        Some(i) => format!(
            "{none}: {} gives {}; state a start at which it is, such as start = {{ at = {{ {} = … }} }}",
            posterior.part_names[i],
            words(parts[i]),
            posterior.unknowns[0].name
        ),
        None => format!("{none}: its parts are, their sum overflows"),
    }
}

fn words(value: f64) -> &'static str {
    match value {
        v if v.is_nan() => "no number (for instance 0 times infinity)",
        v if v > 0.0 => "an infinite density",
        _ => "a density of 0",
    }
}
