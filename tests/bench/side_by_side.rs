//! Ordinary studies beside plain hand-written loops of the same task, in one run: `cargo bench`.
//!
//! Every pair is timed in turn, and the ratio is the median over the rounds: above 1 the study is the faster.
//! Studies advance eight chains on one thread; a step of one chain counts as one. "Plain" is what a careful
//! programmer writes for the task: std's functions, a fast scalar generator, independent steps of one scale,
//! one chain after another. `cargo bench -- banana normal` runs these parts only. The processor's instructions are whatever this build chooses at run time; `cargo bench --features
//! no-avx512` measures the loops for AVX2 where AVX-512 is at hand.

mod generator;
mod journal;
mod plain;
mod plain_estimates;
mod study;
mod tasks;
mod timing;

use generator::Generator;
use odograph::course::{Course, Phase};
use std::path::Path;
use timing::{heading, pair, report, seconds, single};

fn main() {
    // Words after `cargo bench --` name the parts to run; cargo adds options of its own.
    let wanted: Vec<String> = std::env::args()
        .skip(1)
        .filter(|word| !word.starts_with('-'))
        .collect();
    let runs = |part: &str| wanted.is_empty() || wanted.iter().any(|word| word == part);
    let folder = tempfile::tempdir().expect("a folder");
    heading(instructions());
    for adapt in ["scale", "covariance"] {
        if runs("banana") {
            banana(folder.path(), adapt);
        }
        if runs("normal") {
            normal(folder.path(), adapt);
        }
        if runs("logistic") {
            logistic(folder.path(), adapt);
        }
    }
    if runs("estimates") {
        estimates();
    }
    if runs("journal") {
        journal::run(folder.path());
    }
    if runs("starts") {
        starts();
    }
}

/// The widest instructions that the loops of this build use here.
fn instructions() -> &'static str {
    #[cfg(target_arch = "x86_64")]
    {
        // What `multiversion` asks for, besides the named features, before it takes AVX-512.
        if cfg!(not(feature = "no-avx512")) && std::is_x86_feature_detected!("avx512vbmi2") {
            return "AVX-512";
        }
        if std::is_x86_feature_detected!("avx2") && std::is_x86_feature_detected!("fma") {
            return "AVX2";
        }
    }
    "no more than the target's own"
}

/// Steps a second, in millions.
fn steps(
    name: &str,
    course: &mut Box<dyn Course>,
    draws: usize,
    asked: &str,
    mut plain: impl FnMut(usize),
) {
    let per_round = draws * study::CHAINS;
    let times = pair(
        || seconds(|| course.advance(Phase::Draws, draws)),
        || seconds(|| plain(per_round)),
    );
    let millions = |seconds: f64| per_round as f64 / seconds / 1e6;
    report(
        name,
        "M steps/s",
        millions(times.ours),
        millions(times.plain),
        times.ratio,
        asked,
    );
}

fn banana(folder: &Path, adapt: &str) {
    let mut generator = Generator::new(1);
    let plan = study::plan(folder, &tasks::banana(adapt), &[]);
    steps(
        &format!("banana, 2 dimensions, adapt {adapt}"),
        &mut study::settled(&plan),
        100_000,
        "1.0",
        |n| drop(std::hint::black_box(plain::banana(&mut generator, n))),
    );
}

fn normal(folder: &Path, adapt: &str) {
    let mut generator = Generator::new(1);
    let precision = tasks::precision();
    let data = [("precision.csv", tasks::precision_file())];
    let plan = study::plan(folder, &tasks::normal(adapt), &data);
    steps(
        &format!("normal, 10 dimensions, adapt {adapt}"),
        &mut study::settled(&plan),
        30_000,
        "1.0",
        |n| {
            drop(std::hint::black_box(plain::normal(
                &mut generator,
                &precision,
                n,
            )))
        },
    );
}

fn logistic(folder: &Path, adapt: &str) {
    let mut generator = Generator::new(2);
    let regression = tasks::regression(1000);
    let data = [("rows.csv", regression.file())];
    let plan = study::plan(folder, &tasks::logistic(adapt), &data);
    steps(
        &format!("logistic, 1000 x 25, adapt {adapt}"),
        &mut study::settled(&plan),
        400,
        "3",
        |n| {
            let (rows, answers) = (&regression.rows, &regression.answers);
            drop(std::hint::black_box(plain::logistic(
                &mut generator,
                rows,
                answers,
                n,
            )));
        },
    );
}

/// Ten quantities of 4 million draws each (8 chains of an autoregression), one quantity at a time.
fn estimates() {
    const LENGTH: usize = 500_000;
    let mut generator = Generator::new(3);
    let draws: Vec<f64> = (0..study::CHAINS)
        .flat_map(|_| {
            let mut x = generator.normal();
            (0..LENGTH)
                .map(|_| {
                    x = 0.9 * x + 0.435_889_894_354_067_4 * generator.normal();
                    x
                })
                .collect::<Vec<f64>>()
        })
        .collect();
    let chains: Vec<&[f64]> = draws.chunks_exact(LENGTH).collect();
    let times = pair(
        || seconds(|| odograph::estimates::estimate(&chains, false, &[0.025, 0.5, 0.975])),
        || seconds(|| plain_estimates::figures(&draws, study::CHAINS)),
    );
    let ours = odograph::estimates::estimate(&chains, false, &[]);
    let plain = plain_estimates::figures(&draws, study::CHAINS);
    for (a, b) in [
        (ours.value, plain.mean),
        (ours.mcse_lags, plain.error),
        (ours.r_hat, plain.r_hat),
        (ours.effective_bulk, plain.bulk),
        (ours.effective_tail, plain.tail),
    ] {
        let a = a.expect("a figure");
        assert!(
            (a - b).abs() <= 0.01 * b.abs() + 1e-4,
            "not the same task: {a} and {b}"
        );
    }
    report(
        "estimates, 4e6 draws x 10 quantities",
        "s",
        10.0 * times.ours,
        10.0 * times.plain,
        times.ratio,
        "0.67",
    );
}

/// From a study file to the first draw, and the same for the whole program.
fn starts() {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("manifests/pumps.toml");
    let first = || {
        seconds(|| {
            let plan = study::resolve(&file);
            study::course(&plan).advance(Phase::BurnIn, 1)
        })
    };
    first();
    let times = (0..timing::ROUNDS).map(|_| first()).collect();
    single(
        "start to first draw, in this process",
        "ms",
        1e3 * timing::median(times),
        "under 20",
    );
}
