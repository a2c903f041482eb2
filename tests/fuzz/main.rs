//! Throws broken input at the readers: formulas, data files, whole studies. No input may panic, overflow the
//! stack or take longer than a bound.
//!
//! ```text
//! cargo test --release --test fuzz -- [COUNT] [FIRST] [ROOT]
//! ```
//!
//! COUNT inputs (default 2,000, a few seconds) from number FIRST on (default 0) of the series ROOT (default
//! 0) are tried. An input follows from its number and the root alone, so that a failure can be had again:
//! COUNT 1, FIRST the number in the message. Of twenty inputs sixteen are formulas, two data files, two
//! studies. Each input is a sound one with a few mutations.
#![expect(
    clippy::disallowed_macros,
    clippy::disallowed_methods,
    reason = "a program of its own that tells its progress and keeps time"
)]

mod input;
mod mutate;

use input::{Corpus, Input};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::sync::atomic::{AtomicU64, Ordering};
use std::sync::{Arc, Mutex};
use std::time::{Duration, Instant};

/// No input may take longer.
const LONGEST: Duration = Duration::from_secs(10);
/// A line of progress after so many inputs.
const TELL: u64 = 1_000_000;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// The input being tried, for the watchman: its number, what it is, since when.
type Trial = Arc<Mutex<Option<(u64, Input, Instant)>>>;

fn main() -> ExitCode {
    let mut numbers = std::env::args().skip(1).map_while(|word| word.parse().ok());
    let mut next = |default: u64| numbers.next().unwrap_or(default);
    let (count, first, series) = (next(2000), next(0), next(0));
    let corpus = Corpus::gather(root());
    let trial: Trial = Arc::default();
    watch(trial.clone());
    let slowest = AtomicU64::new(0);
    let begun = Instant::now();
    let mut kinds = [0_u64; 3];
    for number in first..first + count {
        let input = corpus.input(series, number);
        kinds[input.kind()] += 1;
        let start = Instant::now();
        *trial.lock().expect("the watchman does not panic") = Some((number, input.clone(), start));
        let tried = catch_unwind(AssertUnwindSafe(|| input.read(&data_folder())));
        let took = start.elapsed().as_millis() as u64;
        *trial.lock().expect("the watchman does not panic") = None;
        if tried.is_err() {
            eprintln!("input {number} of series {series} panicked:\n{input}");
            return ExitCode::FAILURE;
        }
        if slowest.fetch_max(took, Ordering::Relaxed) < took && took > 100 {
            eprintln!("input {number} took {took} ms");
        }
        if (number + 1 - first).is_multiple_of(TELL) {
            let seconds = begun.elapsed().as_secs();
            eprintln!("{} inputs in {seconds} s", number + 1 - first);
        }
    }
    let [formulas, data, studies] = kinds;
    println!(
        "{count} inputs: {formulas} formulas, {data} data files, {studies} studies; none panicked, the \
         slowest took {} ms",
        slowest.load(Ordering::Relaxed)
    );
    ExitCode::SUCCESS
}

fn data_folder() -> PathBuf {
    root().join("manifests")
}

/// Ends the program if an input takes too long, naming it.
fn watch(trial: Trial) {
    std::thread::spawn(move || {
        loop {
            std::thread::sleep(Duration::from_millis(200));
            let now = trial.lock().expect("nothing panics while it holds this");
            if let Some((number, input, start)) = &*now
                && start.elapsed() > LONGEST
            {
                eprintln!("input {number} takes longer than {LONGEST:?}:\n{input}");
                std::process::exit(1);
            }
        }
    });
}
