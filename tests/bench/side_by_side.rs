//! Ordinary studies beside plain hand-written loops of the same task, in one run: `cargo bench`.
//!
//! Every pair is timed in turn, and the ratio is the median over the rounds: above 1 the study is the faster.
//! Studies advance eight chains on one thread; a step of one chain counts as one. "Plain" is what a careful
//! programmer writes for the task: std's functions, a fast scalar generator, independent steps of one scale,
//! one chain after another. The processor's instructions are whatever this build chooses at run time.

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
    let folder = tempfile::tempdir().expect("a folder");
    heading();
    for adapt in ["scale", "covariance"] {
        walks(folder.path(), adapt);
    }
    estimates();
    journal::run(folder.path());
    starts();
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

fn walks(folder: &Path, adapt: &str) {
    let mut generator = Generator::new(1);
    let plan = study::plan(folder, &tasks::banana(adapt), &[]);
    steps(
        &format!("banana, 2 dimensions, adapt {adapt}"),
        &mut study::settled(&plan),
        100_000,
        "1.0",
        |n| drop(std::hint::black_box(plain::banana(&mut generator, n))),
    );

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
