//! Two ways of doing one task, timed in turn, so that a busy machine troubles both alike.

#![expect(
    clippy::disallowed_methods,
    clippy::disallowed_macros,
    reason = "a bench reads the clock and prints"
)]

use std::time::Instant;

/// Rounds of which the median is taken.
pub const ROUNDS: usize = 7;

/// Seconds that a piece of work takes.
pub fn seconds<T>(work: impl FnOnce() -> T) -> f64 {
    let start = Instant::now();
    std::hint::black_box(work());
    start.elapsed().as_secs_f64()
}

pub fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    values[values.len() / 2]
}

/// Medians of the seconds of two pieces of work over interleaved rounds, and of their ratio round by round
/// (the second over the first: above 1, the first is the faster).
pub struct Pair {
    pub ours: f64,
    pub plain: f64,
    pub ratio: f64,
}

/// One round of each comes first and is not counted: memory is touched, caches are warm.
pub fn pair(mut ours: impl FnMut() -> f64, mut plain: impl FnMut() -> f64) -> Pair {
    ours();
    plain();
    let rounds: Vec<(f64, f64)> = (0..ROUNDS).map(|_| (ours(), plain())).collect();
    Pair {
        ours: median(rounds.iter().map(|r| r.0).collect()),
        plain: median(rounds.iter().map(|r| r.1).collect()),
        ratio: median(rounds.iter().map(|r| r.1 / r.0).collect()),
    }
}

/// A line of the report.
pub fn report(task: &str, unit: &str, ours: f64, plain: f64, ratio: f64, asked: &str) {
    println!("{task:<44} {ours:>12.4} {plain:>12.4} {unit:<12} {ratio:>7.2}  {asked}");
}

pub fn heading(instructions: &str) {
    println!("instructions: {instructions}");
    println!(
        "{:<44} {:>12} {:>12} {:<12} {:>7}  asked",
        "task", "odograph", "plain", "unit", "ratio"
    );
}

/// A line for a figure that has no plain counterpart.
pub fn single(task: &str, unit: &str, value: f64, asked: &str) {
    println!(
        "{task:<44} {value:>12.4} {:>12} {unit:<12} {:>7}  {asked}",
        "", ""
    );
}
