//! Throws broken input at the readers: formulas, data files, whole studies; and the files of records. No input may
//! panic, overflow the stack, take longer than a bound or more memory than one.
//!
//! ```text
//! cargo test --release --test fuzz -- [texts | records] [COUNT] [FIRST] [ROOT]
//! ```
//!
//! COUNT inputs (default 2,000 of both, a few seconds) from number FIRST on (default 0) of the series ROOT (default
//! 0) are tried. An input follows from its number and the root alone, so that a failure can be had again:
//! COUNT 1, FIRST the number in the message. Of twenty texts sixteen are formulas, two data files, two
//! studies. Each input is a sound one with a few mutations.
#![expect(
    clippy::disallowed_macros,
    clippy::disallowed_methods,
    reason = "a program of its own that tells its progress and keeps time"
)]

mod input;
mod mutate;
mod records;

use input::Corpus;
use records::Records;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::sync::{Arc, Mutex};
use std::time::{Duration, Instant};

/// No input may take longer.
const LONGEST: Duration = Duration::from_secs(10);
/// Memory is looked at after so many inputs.
const CHECK: u64 = 1000;
/// A line of progress after so many inputs.
const TELL: u64 = 1_000_000;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// Bytes of memory that this process may have had at its most.
const MEMORY: u64 = 1 << 30;

/// The input being tried, for the watchman: its number, what it is, since when.
type Trial = Arc<Mutex<Option<(u64, String, Instant)>>>;

fn main() -> ExitCode {
    let mut words: Vec<String> = std::env::args().skip(1).collect();
    let named = |word: &String| ["texts", "records"].contains(&word.as_str());
    let which = words.iter().position(named).map(|at| words.remove(at));
    let mut numbers = words.iter().map_while(|word| word.parse().ok());
    let mut next = |default: u64| numbers.next().unwrap_or(default);
    let span = Span {
        count: next(2000),
        first: next(0),
        series: next(0),
    };
    let trial: Trial = Arc::default();
    watch(trial.clone());
    let asked = |word: &str| which.as_ref().is_none_or(|which| which == word);
    let texts = || {
        let corpus = Corpus::gather(root());
        let names = ["formulas", "data files", "studies"];
        span.go(&trial, &names, |number| {
            let input = corpus.input(span.series, number);
            let shown = input.to_string();
            let kind = input.kind();
            (shown, move || {
                input.read(&data_folder());
                kind
            })
        })
    };
    let records = || {
        let records = Records::gather();
        let records = &records;
        span.go(&trial, &records::KINDS, |number| {
            let series = span.series;
            ("a file of a record".into(), move || {
                records.attempt(series, number)
            })
        })
    };
    if (!asked("texts") || texts()) && (!asked("records") || records()) {
        ExitCode::SUCCESS
    } else {
        ExitCode::FAILURE
    }
}

/// Which inputs of a series are tried.
struct Span {
    count: u64,
    first: u64,
    series: u64,
}

impl Span {
    /// Tries every input: `input` gives what it is and the trial, which gives its kind. Whether all went well.
    fn go<T: FnOnce() -> usize>(
        &self,
        trial: &Trial,
        names: &[&str],
        input: impl Fn(u64) -> (String, T),
    ) -> bool {
        let begun = Instant::now();
        let mut kinds = vec![0_u64; names.len()];
        let mut slowest = 0;
        for number in self.first..self.first + self.count {
            let (shown, attempt) = input(number);
            let start = Instant::now();
            *trial.lock().expect("the watchman does not panic") = Some((number, shown, start));
            let tried = catch_unwind(AssertUnwindSafe(attempt));
            let took = start.elapsed().as_millis() as u64;
            let shown = trial.lock().expect("the watchman does not panic").take();
            match tried {
                Ok(kind) => kinds[kind] += 1,
                Err(_) => {
                    let (_, shown, _) = shown.expect("it was put there");
                    eprintln!(
                        "input {number} of series {} panicked:\n{shown}",
                        self.series
                    );
                    return false;
                }
            }
            if slowest < took {
                slowest = took;
                if took > 100 {
                    eprintln!("input {number} took {took} ms");
                }
            }
            let done = number + 1 - self.first;
            if done.is_multiple_of(CHECK) && memory() > MEMORY {
                eprintln!(
                    "memory passed {MEMORY} bytes at one of the {CHECK} inputs before {number}"
                );
                return false;
            }
            if done.is_multiple_of(TELL) {
                eprintln!("{done} inputs in {} s", begun.elapsed().as_secs());
            }
        }
        let kinds = kinds
            .iter()
            .zip(names)
            .map(|(count, name)| format!("{count} {name}"));
        println!(
            "{} inputs in {} s: {}; none panicked, the slowest took {slowest} ms, memory at most {} MiB",
            self.count,
            begun.elapsed().as_secs(),
            kinds.collect::<Vec<_>>().join(", "),
            memory() >> 20,
        );
        memory() <= MEMORY
    }
}

/// Bytes of memory that this process had at its most; 0 where the system does not tell.
fn memory() -> u64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let peak = status.lines().find_map(|line| line.strip_prefix("VmHWM:"));
    let kib = peak.and_then(|line| line.trim().trim_end_matches(" kB").parse::<u64>().ok());
    kib.unwrap_or(0) << 10
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
