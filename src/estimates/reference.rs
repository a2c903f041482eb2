//! Estimators against independently computed values on given arrays: `tests/reference/08_*`, each with its
//! sources (Vehtari et al. 2021; Geyer 1992; Flegal & Jones 2010; Vats et al. 2019; Zhang & Stephens 2009;
//! Vehtari et al. 2024; textbook algebra of autoregressive chains).

use super::moments::{Scaled, mean, squares, variance};
use super::quantile::{effective_at, quantile, quantile_error};
use super::ranks::Ordered;
use super::*;
use crate::maths::{absolute, expm1, log1p, normal_quantile};
use crate::random::{Purpose, Stream};
use toml::{Table, Value};

fn path(name: &str) -> String {
    format!("{}/tests/reference/{name}", env!("CARGO_MANIFEST_DIR"))
}

fn tables(name: &str) -> Table {
    std::fs::read_to_string(path(name))
        .expect("a readable file")
        .parse()
        .expect("TOML")
}

fn entries<'a>(table: &'a Table, key: &str) -> Vec<&'a Table> {
    let list = table[key].as_array().expect("an array of tables");
    list.iter()
        .map(|v| v.as_table().expect("a table"))
        .collect()
}

fn number(table: &Table, key: &str) -> f64 {
    match &table[key] {
        Value::Float(x) => *x,
        Value::Integer(n) => *n as f64,
        other => panic!("{key}: {other}"),
    }
}

fn numbers(table: &Table, key: &str) -> Vec<f64> {
    let list = table[key].as_array().expect("an array");
    list.iter()
        .map(|v| v.as_float().expect("a number"))
        .collect()
}

fn text<'a>(table: &'a Table, key: &str) -> &'a str {
    table[key].as_str().expect("text")
}

/// Columns of a CSV file with a heading.
fn columns(name: &str) -> Vec<Vec<f64>> {
    let content = std::fs::read_to_string(path(name)).expect("a readable file");
    let rows: Vec<Vec<f64>> = content
        .lines()
        .skip(1)
        .map(|line| {
            line.split(',')
                .map(|x| x.parse().expect("a number"))
                .collect()
        })
        .collect();
    (0..rows[0].len())
        .map(|c| rows.iter().map(|r| r[c]).collect())
        .collect()
}

fn views(columns: &[Vec<f64>]) -> Vec<&[f64]> {
    columns.iter().map(Vec::as_slice).collect()
}

#[track_caller]
fn close(what: &str, got: f64, want: f64, tolerance: f64) {
    let size = if absolute(want) > 1e-9 {
        absolute(want)
    } else {
        1.0
    };
    assert!(
        absolute(got - want) <= tolerance * size,
        "{what}: {got}, not {want}"
    );
}

/// The printed digits carry 15 places; sums in another order differ in the last few.
const NEAR: f64 = 1e-11;

#[test]
fn r_hat_and_effective_sizes() {
    let file = tables("08_diagnostics.toml");
    let arrays = entries(&file, "array");
    assert_eq!(arrays.len(), 7);
    for array in arrays {
        let name = text(array, "name");
        let data = columns(text(array, "file"));
        let chains = views(&data);
        let near =
            |key: &str, got: f64| close(&format!("{name} {key}"), got, number(array, key), NEAR);
        let r = r_hat(&chains);
        near("rank_normalised_split_rhat", r.bulk.expect("varies"));
        near(
            "folded_rank_normalised_split_rhat",
            r.folded.expect("varies"),
        );
        near("rhat_max", r.larger().expect("varies"));
        near(
            "split_rhat",
            super::r_hat::split_r_hat(&chains.concat(), 400).expect("varies"),
        );
        let raw = effective(&chains).expect("varies");
        near("ess_mean", raw.size);
        near("tau_raw", raw.tau);
        assert_eq!(
            raw.last_pair as f64,
            number(array, "last_pair_raw"),
            "{name}"
        );
        let e = estimate(&chains, false, &[0.05, 0.5, 0.95]);
        near("rhat_max", e.r_hat.expect("varies"));
        near("bulk_ess", e.effective_bulk.expect("varies"));
        near("tail_ess", e.effective_tail.expect("varies"));
        let quantiles: Vec<f64> = e
            .quantiles
            .iter()
            .map(|q| q.value.expect("finite"))
            .collect();
        for (got, want) in quantiles.iter().zip(numbers(array, "quantiles_5_50_95")) {
            close(&format!("{name} quantile"), *got, want, 1e-13);
        }
    }
}

#[test]
fn monte_carlo_errors() {
    let file = tables("08_diagnostics.toml");
    for array in entries(&file, "array") {
        let name = text(array, "name");
        let data = columns(text(array, "file"));
        let chains = views(&data);
        let near =
            |key: &str, got: f64| close(&format!("{name} {key}"), got, number(array, key), NEAR);
        let scaled = Scaled::new(&chains, 0.0);
        let centre = mean(&scaled.values);
        near("mean", scaled.value(centre));
        let sd = scaled.length(variance(&scaled.values).expect("many").sqrt());
        near("sd", sd);
        near(
            "mcse_mean",
            sd / effective(&chains).expect("varies").size.sqrt(),
        );
        near(
            "mcse_sd_delta",
            super::estimate::error_of_sd(&scaled, centre, 400).expect("varies"),
        );
        let ordered = Ordered::new(&chains);
        for (label, level) in [("05", 0.05), ("50", 0.5), ("95", 0.95)] {
            let value = quantile(&ordered.values, level).expect("finite");
            let size = effective_at(&chains, value).expect("varies").size;
            near(&format!("ess_quantile_{label}"), size);
            let error = quantile_error(&ordered.values, level, size).expect("finite");
            near(&format!("mcse_quantile_{label}"), error);
        }
        // What reaches the reader: the same, unless there is a reason against it.
        let e = estimate(&chains, false, &[0.05, 0.5, 0.95]);
        let shown: Vec<Option<f64>> = e.quantiles.iter().map(|q| q.mcse).collect();
        match name {
            "shifted" => {
                assert!(
                    e.chains_disagree() && e.mcse.is_none() && shown == [None; 3],
                    "{e:?}"
                );
                assert!(
                    e.notes
                        .iter()
                        .any(|n| matches!(n, Note::Stray { chains, .. } if chains == &[3]))
                );
            }
            "scaled" => {
                // One chain's spread is another's many times over: the folded R-hat lies above 1.1.
                assert!(
                    e.chains_disagree() && e.mcse.is_none() && shown == [None; 3],
                    "{e:?}"
                );
                assert!(e.notes.iter().any(|n| matches!(n, Note::Disagree { .. })));
            }
            "cauchy" => {
                assert!(
                    e.mcse.is_none() && e.sd.is_none() && e.value.is_some(),
                    "{e:?}"
                );
                assert!(e.notes.iter().any(|n| matches!(n, Note::HeavyTail { .. })));
                near("mcse_quantile_50", shown[1].expect("an error"));
            }
            _ => {
                near("mcse_mean", e.mcse_lags.expect("an error"));
                let batches = e.mcse_batches.expect("an error");
                let larger = if batches > number(array, "mcse_mean") {
                    batches
                } else {
                    number(array, "mcse_mean")
                };
                close(name, e.mcse.expect("an error"), larger, NEAR);
                if name != "ties" {
                    near("mcse_quantile_05", shown[0].expect("an error"));
                } else {
                    // The published formula gives 0 here, which no reader should see.
                    assert_eq!(number(array, "mcse_quantile_05"), 0.0);
                    assert_eq!(shown[0], None);
                    near("mcse_quantile_50", shown[1].expect("an error"));
                }
            }
        }
    }
}

#[test]
fn long_run_variances_of_single_chains() {
    let file = tables("08_diagnostics.toml");
    let entries = entries(&file, "single_chain");
    assert_eq!(entries.len(), 14);
    for entry in entries {
        let name = format!("{} {}", text(entry, "name"), number(entry, "chain"));
        let data = columns(&format!("08_chains_{}.csv", text(entry, "name")));
        let x = data[number(entry, "chain") as usize - 1].as_slice();
        let near =
            |key: &str, got: f64| close(&format!("{name} {key}"), got, number(entry, key), NEAR);
        near("mean", mean(x));
        near("variance", variance(x).expect("many"));
        let g = initial_sequence(x).expect("varies");
        assert_eq!(
            g.last_pair as f64,
            number(entry, "geyer_last_pair"),
            "{name}"
        );
        near("initial_positive_variance", g.positive);
        near("initial_monotone_variance", g.monotone);
        near("initial_convex_variance", g.convex);
        for (key, batches) in [
            ("batch_means_variance_b20", 20),
            ("batch_means_variance_b10", 40),
        ] {
            near(
                key,
                400.0 * pooled_batch_variance(&[x], batches).expect("many"),
            );
        }
        let mut lags = super::lags::Lags::new(super::lags::Series::whole(x));
        let zero = lags.get(0);
        for (k, want) in numbers(entry, "autocorrelation_1_to_10")
            .into_iter()
            .enumerate()
        {
            let got = lags.get(k + 1) / zero;
            assert!(
                absolute(got - want) < 1e-13,
                "{name} lag {}: {got}, not {want}",
                k + 1
            );
        }
    }
}

#[test]
fn constants_have_no_errors() {
    let data = columns("08_chains_constant.csv");
    let chains = views(&data);
    let e = estimate(&chains, false, &[0.5]);
    assert_eq!(e.value, Some(1.5));
    assert_eq!(e.notes, [Note::Constant { value: 1.5 }]);
    assert_eq!(
        (e.mcse, e.sd, e.r_hat, e.effective_bulk, e.effective_tail),
        (None, None, None, None, None)
    );
    assert_eq!(e.quantiles[0].mcse, None);
    assert_eq!(effective(&chains), None);
    assert_eq!(
        r_hat(&chains),
        RHat {
            bulk: None,
            folded: None
        }
    );
    assert_eq!(initial_sequence(chains[0]), None);
}

#[test]
fn multivariate_sizes() {
    let file = tables("08_multivariate_ess.toml");
    let sample = file["sample"].as_table().expect("a table");
    let data = columns(text(sample, "file"));
    let one: Vec<[&[f64]; 1]> = data.iter().map(|x| [x.as_slice()]).collect();
    let quantities: Vec<&[&[f64]]> = one.iter().map(|q| q.as_slice()).collect();
    // Batches of 30 among 900.
    let got = multivariate_effective(&quantities, 30).expect("varies");
    close(
        "multivariate",
        got,
        number(sample, "multivariate_ess"),
        NEAR,
    );
    for (q, want) in quantities
        .iter()
        .zip(numbers(sample, "univariate_ess_batch_means"))
    {
        close(
            "univariate",
            multivariate_effective(&[q], 30).expect("varies"),
            want,
            NEAR,
        );
    }
    let twice = [quantities[0], quantities[1], quantities[0]];
    assert_eq!(multivariate_effective(&twice, 30), None);
    for entry in entries(&file, "minimum_ess") {
        let p = number(entry, "p");
        let got = minimum_effective(p as u64, number(entry, "alpha"), number(entry, "epsilon"));
        close(
            &format!("minimum for {p}"),
            got,
            number(entry, "value"),
            1e-12,
        );
    }
}

#[test]
fn pareto_tails() {
    let file = tables("08_pareto_tail.toml");
    for entry in entries(&file, "quantile_sample") {
        let (xi, n) = (number(entry, "true_xi"), number(entry, "n"));
        let x: Vec<f64> = (1..=n as usize)
            .map(|i| {
                let u = (i as f64 - 0.5) / n;
                if xi == 0.0 {
                    -log1p(-u)
                } else {
                    expm1(-xi * log1p(-u)) / xi
                }
            })
            .collect();
        close("first", x[0], numbers(entry, "first_three")[0], 1e-12);
        let name = format!("{xi} {n}");
        let (twenty, thirty) = (
            fit_tail(&x, 20).expect("a fit"),
            fit_tail(&x, 30).expect("a fit"),
        );
        close(&name, twenty.index, number(entry, "xi_hat_m20"), 1e-9);
        close(&name, twenty.scale, number(entry, "sigma_hat_m20"), 1e-9);
        close(&name, thirty.index, number(entry, "xi_hat_m30"), 1e-9);
        close(&name, thirty.scale, number(entry, "sigma_hat_m30"), 1e-9);
    }
    for entry in entries(&file, "chain_tail") {
        let name = text(entry, "name");
        let data = columns(&format!("08_chains_{name}.csv"));
        let sorted = Ordered::new(&views(&data)).values;
        let size = tail_size(sorted.len(), 1.0);
        assert_eq!(size as f64, number(entry, "tail_size"));
        let threshold = sorted[sorted.len() - size - 1];
        assert_eq!(threshold, number(entry, "threshold"));
        let excesses: Vec<f64> = sorted[sorted.len() - size..]
            .iter()
            .map(|x| x - threshold)
            .collect();
        close(
            name,
            fit_tail(&excesses, 20).expect("a fit").index,
            number(entry, "xi_hat_m20"),
            1e-9,
        );
        close(
            name,
            fit_tail(&excesses, 30).expect("a fit").scale,
            number(entry, "sigma_hat_m30"),
            1e-9,
        );
        // The right tail alone, drawn towards one half.
        let shifted: Vec<f64> = sorted.iter().map(|x| x - sorted[0]).collect();
        let right = fit_tail(&excesses, 30).expect("a fit").index;
        let drawn = (size as f64 * right + 5.0) / (size as f64 + 10.0);
        close(name, drawn, number(entry, "xi_hat_m30_regularised"), 1e-9);
        assert!(super::tail::tail_index(&shifted, size).expect("a fit") >= drawn - 1e-9);
    }
}

/// Gaussian autoregressive chains x' = rho x + e, started from their stationary law.
fn autoregressive(rho: f64, chains: usize, draws: usize, seed: u8) -> Vec<Vec<f64>> {
    (0..chains)
        .map(|c| {
            let mut key = [seed; 32];
            key[0] = c as u8;
            let mut stream = Stream::new(&key, Purpose::Test);
            let mut x = normal_quantile(stream.open()) / (1.0 - rho * rho).sqrt();
            (0..draws)
                .map(|_| {
                    x = rho * x + normal_quantile(stream.open());
                    x
                })
                .collect()
        })
        .collect()
}

/// Long chains against theory. The relative standard deviation of an effective size by an initial sequence is
/// about sqrt(2 w / S) with a window of w lags (some 6 autocorrelation times), that of batch means with B
/// batches sqrt(2 / B) for the variance.
#[test]
fn autoregressive_theory() {
    let file = tables("08_ar1_theory.toml");
    for entry in entries(&file, "ar1") {
        let rho = number(entry, "rho");
        let (m, n) = (4, 50_000);
        let data = autoregressive(rho, m, n, 7);
        let chains = views(&data);
        let total = (m * n) as f64;
        let tau = number(entry, "tau");
        let window = 6.0 * if tau > 1.0 { tau } else { 1.0 };
        let allowed = 5.0 * (4.0 * window / total).sqrt();
        let e = estimate(&chains, false, &[0.05, 0.5]);
        let expect = |what: &str, got: Option<f64>, per_draw: f64, allowed: f64| {
            let got = got.expect(what) / total;
            assert!(
                absolute(got / per_draw - 1.0) < allowed,
                "{rho} {what}: {got} per draw, not {per_draw}"
            );
        };
        expect(
            "mean",
            e.effective_mean,
            number(entry, "ess_per_draw"),
            allowed,
        );
        expect(
            "bulk",
            e.effective_bulk,
            number(entry, "ess_per_draw"),
            allowed,
        );
        if rho != 0.0 {
            let at = |level: f64| {
                let sorted = Ordered::new(&chains).values;
                effective_at(&chains, quantile(&sorted, level).expect("finite")).map(|x| x.size)
            };
            expect(
                "median",
                at(0.5),
                number(entry, "ess_per_draw_median_indicator"),
                allowed,
            );
            expect(
                "5 %",
                at(0.05),
                number(entry, "ess_per_draw_indicator_5_percent"),
                allowed,
            );
            let square: Vec<Vec<f64>> = data
                .iter()
                .map(|c| c.iter().map(|x| x * x).collect())
                .collect();
            let size = effective(&views(&square)).map(|x| x.size);
            expect(
                "square",
                size,
                number(entry, "ess_per_draw_square"),
                allowed,
            );
        }
        let batches = batch_count(n).expect("long") as f64 * m as f64;
        let variance = number(entry, "longrun_variance") / total;
        let by_batches = e.mcse_batches.expect("an error");
        // Bias of batch means: tau over the batch length, about.
        let bias = tau * batches / total;
        let off = by_batches * by_batches / variance - 1.0;
        assert!(
            absolute(off) < 5.0 * (2.0 / batches).sqrt() + bias,
            "{rho}: {off}"
        );
        let error = e.mcse.expect("an error");
        assert!(absolute(e.value.expect("a mean")) < 5.0 * error, "{rho}");
        assert!(e.notes.is_empty(), "{rho}: {:?}", e.notes);
    }
}

/// Batch means have a known expectation at every length: the mean over many short chains must meet it.
#[test]
fn batch_means_expectation() {
    let file = tables("08_ar1_theory.toml");
    for entry in entries(&file, "ar1") {
        let rho = number(entry, "rho");
        let chains = autoregressive(rho, 250, 400, 11);
        let of = |batches: usize| {
            let all: Vec<f64> = chains
                .iter()
                .map(|c| 400.0 * pooled_batch_variance(&[c], batches).expect("many"))
                .collect();
            let centre = mean(&all);
            (centre, (squares(&all, centre) / (249.0 * 250.0)).sqrt())
        };
        for (batches, key) in [
            (20, "expected_batch_means_variance_n400_b20"),
            (40, "expected_batch_means_variance_n400_b10"),
        ] {
            let (got, error) = of(batches);
            let want = number(entry, key);
            assert!(
                absolute(got - want) < 4.5 * error,
                "{rho} {batches}: {got} +- {error}, not {want}"
            );
        }
        // A planted fault: twice as many batches have another expectation, and would be seen.
        let (got, error) = of(80);
        if rho > 0.0 {
            assert!(
                absolute(got - number(entry, "expected_batch_means_variance_n400_b20"))
                    > 4.5 * error
            );
        }
    }
}
