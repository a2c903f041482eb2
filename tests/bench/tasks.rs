//! The tasks: each a study, and the same numbers for the plain loop.

use crate::generator::Generator;
use std::fmt::Write as _;

/// Chains, burn-in and a flat end common to all: only the walk is timed.
fn ends(adapt: &str) -> String {
    format!(
        "[sampler]\nmethod = \"metropolis\"\nadapt = \"{adapt}\"\n\
         [ensemble]\nchains = 8\nburn_in = 2000\ndraws = 1000\n"
    )
}

/// The banana of Haario, Saksman & Tamminen (1999) with b = 0.03.
pub fn banana(adapt: &str) -> String {
    format!(
        "title = \"Banana\"\n[seeds]\nroot = \"bench\"\n[model]\nfamily = \"density\"\n[model.unknown]\n\
         x1 = {{ law = \"normal(mean = 0, sd = 10)\" }}\n\
         x2 = {{ law = \"normal(mean = 0.03 * (100 - x1^2), sd = 1)\" }}\n{}",
        ends(adapt)
    )
}

/// A normal law in ten dimensions whose neighbours are correlated at 0.7 (an autoregression of order one),
/// by its precision matrix.
pub fn precision() -> [[f64; 10]; 10] {
    let r = 0.7;
    let scale = 1.0 / (1.0 - r * r);
    std::array::from_fn(|i| {
        std::array::from_fn(|j| match (i, j) {
            _ if i == j && (i == 0 || i == 9) => scale,
            _ if i == j => (1.0 + r * r) * scale,
            _ if i.abs_diff(j) == 1 => -r * scale,
            _ => 0.0,
        })
    })
}

fn rows<const N: usize>(names: &str, rows: &[[f64; N]], last: Option<&[f64]>) -> String {
    let mut text = (1..=N)
        .map(|i| format!("{names}{i}"))
        .collect::<Vec<String>>()
        .join(",");
    text.push_str(if last.is_some() { ",y\n" } else { "\n" });
    for (i, row) in rows.iter().enumerate() {
        let cells: Vec<String> = row.iter().map(f64::to_string).collect();
        text.push_str(&cells.join(","));
        if let Some(values) = last {
            write!(text, ",{}", values[i]).expect("written");
        }
        text.push('\n');
    }
    text
}

pub fn precision_file() -> String {
    rows("m", &precision(), None)
}

pub fn normal(adapt: &str) -> String {
    format!(
        "title = \"Normal in ten dimensions\"\n[seeds]\nroot = \"bench\"\n[data.p]\nfile = \"precision.csv\"\nmatrix.m = \"m*\"\n\
         [model]\nfamily = \"density\"\n[model.unknown]\n\
         x = {{ law = \"flat()\", per = \"p\" }}\n[model.term]\nform = \"-0.5 * dot(x, dot(p.m, x))\"\n{}\
         start = {{ at = {{ x = 0 }} }}\n",
        ends(adapt)
    )
}

/// Rows and answers of a logistic regression, made from its own model.
pub struct Regression {
    pub rows: Vec<[f64; 25]>,
    pub answers: Vec<f64>,
}

pub fn regression(count: usize) -> Regression {
    let mut generator = Generator::new(25);
    let beta: [f64; 25] = std::array::from_fn(|_| 0.3 * generator.normal());
    let rows: Vec<[f64; 25]> = (0..count)
        .map(|_| std::array::from_fn(|_| generator.normal()))
        .collect();
    let answers = rows
        .iter()
        .map(|row| {
            let odds: f64 = row.iter().zip(&beta).map(|(x, b)| x * b).sum();
            f64::from(generator.unit() < odograph::maths::logistic(odds))
        })
        .collect();
    Regression { rows, answers }
}

impl Regression {
    pub fn file(&self) -> String {
        rows("x", &self.rows, Some(&self.answers))
    }
}

pub fn logistic(adapt: &str) -> String {
    format!(
        "title = \"Logistic regression\"\n[seeds]\nroot = \"bench\"\n[data.t]\nfile = \"rows.csv\"\nmatrix.x = \"x*\"\n\
         [model]\nfamily = \"density\"\n[model.observed]\n\
         y = {{ of = \"t.y\", law = \"bernoulli(log_odds = dot(t.x, beta))\" }}\n[model.unknown]\n\
         beta = {{ law = \"normal(mean = 0, sd = 2.5)\", per = \"t.x\" }}\n{}",
        ends(adapt)
    )
}
