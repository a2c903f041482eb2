//! One figure of a run against what it should be.

use crate::common::root;
use serde_json::Value as Json;
use std::fmt::Write as _;
use std::fs;
use toml::{Table, Value};

/// What a quantity should be, with where that was taken from.
#[derive(Debug, Clone)]
pub struct Expected {
    pub mean: Option<f64>,
    pub sd: Option<f64>,
    /// Level as `summary.json` writes it, and value.
    pub quantiles: Vec<(String, f64)>,
    pub source: String,
}

/// A number however TOML holds it.
pub fn number(value: &Value) -> Option<f64> {
    value
        .as_float()
        .or_else(|| value.as_integer().map(|i| i as f64))
}

fn numbers(value: Option<&Value>) -> Vec<f64> {
    value
        .and_then(Value::as_array)
        .map(|all| all.iter().filter_map(number).collect())
        .unwrap_or_default()
}

/// The levels that a summary gives by default.
const SHOWN: [(f64, &str); 3] = [(0.025, "0.025"), (0.5, "0.5"), (0.975, "0.975")];

impl Expected {
    /// From an entry of `checks.toml`: the values it gives itself, or those of the reference it names.
    pub fn read(check: &Table) -> Expected {
        if let Some(file) = check.get("reference").and_then(Value::as_str) {
            let filter = check["where"].as_table().expect("where is a table");
            return Expected::find(file, filter);
        }
        let quantiles = check.get("quantiles").and_then(Value::as_table);
        Expected {
            mean: check.get("mean").and_then(number),
            sd: check.get("sd").and_then(number),
            quantiles: quantiles
                .into_iter()
                .flatten()
                .map(|(level, value)| (level.clone(), number(value).expect("a number")))
                .collect(),
            source: check["source"].as_str().expect("a source").to_owned(),
        }
    }

    /// The only entry of a reference file's arrays of tables that has all these values.
    fn find(file: &str, filter: &Table) -> Expected {
        let reference = crate::reference(file);
        let levels = reference
            .values()
            .filter_map(Value::as_table)
            .map(|part| numbers(part.get("quantile_levels")))
            .find(|levels| !levels.is_empty())
            .unwrap_or_default();
        let matching: Vec<&Table> = reference
            .values()
            .filter_map(Value::as_array)
            .flatten()
            .filter_map(Value::as_table)
            .filter(|entry| {
                filter
                    .iter()
                    .all(|(key, value)| entry.get(key) == Some(value))
            })
            .collect();
        assert_eq!(matching.len(), 1, "{file}: entries with {filter:?}");
        let values = numbers(matching[0].get("quantiles"));
        assert!(values.is_empty() || values.len() == levels.len(), "{file}");
        let quantiles = SHOWN
            .iter()
            .filter_map(|(level, name)| {
                let at = levels.iter().position(|l| l == level)?;
                Some(((*name).to_owned(), *values.get(at)?))
            })
            .collect();
        Expected {
            mean: matching[0].get("mean").and_then(number),
            sd: matching[0].get("sd").and_then(number),
            quantiles,
            source: format!("{file}: {}", reference["source"].as_str().unwrap_or("")),
        }
    }
}

/// One figure compared.
#[derive(Debug, Clone)]
pub struct Comparison {
    pub study: String,
    pub method: String,
    pub estimand: String,
    /// `mean`, `sd`, or a level.
    pub figure: String,
    pub value: f64,
    /// Monte Carlo error of the value.
    pub error: f64,
    pub expected: f64,
    /// The error must not be larger than this, or the comparison could see nothing.
    pub largest_error: f64,
    /// Added to four errors: what double precision itself leaves open.
    pub rounding: f64,
    pub source: String,
}

impl Comparison {
    /// All figures of one estimand that are expected of it.
    pub fn all(
        study: &str,
        method: &str,
        estimand: &str,
        point: &Json,
        expected: &Expected,
    ) -> Vec<Comparison> {
        let entry = crate::common::estimand(point, estimand);
        let read = |value: &Json, what: &str| -> f64 {
            value.as_f64().unwrap_or_else(|| {
                panic!("{study} under {method}: {estimand} has no {what}: {entry}")
            })
        };
        let row =
            |figure: &str, value: f64, error: f64, expected_value: f64, largest: f64| Comparison {
                study: study.into(),
                method: method.into(),
                estimand: estimand.into(),
                figure: figure.into(),
                value,
                error,
                expected: expected_value,
                largest_error: largest,
                rounding: 0.0,
                source: expected.source.clone(),
            };
        let mut rows = Vec::new();
        let spread = expected.sd.unwrap_or(f64::INFINITY);
        if let Some(mean) = expected.mean {
            let largest = if spread.is_finite() {
                spread / 25.0
            } else {
                mean.abs() / 25.0
            };
            rows.push(row(
                "mean",
                read(&entry["value"], "value"),
                read(&entry["mcse"], "mcse"),
                mean,
                largest,
            ));
        }
        // An indicator's or an average's sd has no entry of its own for its error in every summary; that of
        // the mean, times a factor for tails up to a kurtosis of nine, stands in: sd(s) = s sqrt((k - 1) / 4n).
        if let (Some(sd), Some(_)) = (expected.sd, expected.mean) {
            let error = entry["sd_mcse"]
                .as_f64()
                .unwrap_or_else(|| read(&entry["mcse"], "mcse") * 2.0_f64.sqrt());
            rows.push(row("sd", read(&entry["sd"], "sd"), error, sd, sd / 10.0));
        }
        for (level, quantile) in &expected.quantiles {
            let figure = &entry["quantiles"][level.as_str()];
            // Among equal draws (whole numbers) a quantile has no error of the usual kind: it must be met.
            let error = figure["mcse"].as_f64().unwrap_or(0.0);
            rows.push(row(
                level,
                read(&figure["value"], "quantile"),
                error,
                *quantile,
                spread / 8.0,
            ));
        }
        rows
    }

    /// Distance in Monte Carlo errors.
    pub fn distance(&self) -> f64 {
        let off = self.value - self.expected;
        if off == 0.0 { 0.0 } else { off / self.error }
    }

    pub fn holds(&self) -> bool {
        let allowed = 4.0 * self.error + self.rounding;
        (self.value - self.expected).abs() <= allowed && self.error <= self.largest_error
    }
}

/// Fails with every comparison that does not hold.
pub fn judge(rows: &[Comparison]) {
    assert!(!rows.is_empty(), "nothing was compared");
    let mut wrong = String::new();
    for row in rows.iter().filter(|row| !row.holds()) {
        writeln!(
            wrong,
            "{} under {}: {} of {} is {} with error {} (at most {}), expected {}: {:.1} errors off ({})",
            row.study,
            row.method,
            row.figure,
            row.estimand,
            row.value,
            row.error,
            row.largest_error,
            row.expected,
            row.distance(),
            row.source,
        )
        .expect("written");
    }
    assert!(wrong.is_empty(), "\n{wrong}");
}

/// Writes the comparisons of one group as a table when asked to by the environment.
#[expect(clippy::disallowed_methods, reason = "a test asked to keep its table")]
pub fn write_table(group: &str, rows: &[Comparison]) {
    if std::env::var_os("ODOGRAPH_WRITE_TABLES").is_none() {
        return;
    }
    let folder = root().join("tests/published/tables");
    fs::create_dir_all(&folder).expect("a folder");
    let mut sources: Vec<&str> = rows.iter().map(|row| row.source.as_str()).collect();
    sources.dedup();
    let mut text = format!("# {group}\n\nExpected values: {}.\n\n", sources.join("; "));
    text.push_str(
        "| method | estimand | figure | value | Monte Carlo error | expected | errors off |\n",
    );
    text.push_str("|---|---|---|---:|---:|---:|---:|\n");
    for row in rows {
        let off = match row.distance() {
            off if off.is_finite() => format!("{off:+.2}"),
            // Without an error of its own: met, or met to a step of doubles.
            _ => format!("{:+.1e} in all", row.value - row.expected),
        };
        writeln!(
            text,
            "| {} | `{}` | {} | {} | {:.2e} | {} | {off} |",
            row.method, row.estimand, row.figure, row.value, row.error, row.expected,
        )
        .expect("written");
    }
    fs::write(folder.join(format!("{group}.md")), text).expect("written");
}
