//! The functions of `maths` against tables in `reference/07_special` (each with its source in
//! `reference/07_special.toml` or `reference/scripts/incomplete.py`), under the bound that each function's
//! page states; mean and variance against the univariate sets of NIST StRD.

use std::fs;
use std::path::PathBuf;

use odograph::maths;

fn reference(name: &str) -> String {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("tests/reference")
        .join(name);
    fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}

/// A table's rows without its heading. Numbers are decimal, or the 64 bits in hexadecimal.
fn rows(name: &str) -> Vec<Vec<f64>> {
    let number = |cell: &str| match cell.strip_prefix("0x") {
        Some(bits) if !bits.contains('.') => {
            f64::from_bits(u64::from_str_radix(bits, 16).expect("bits"))
        }
        _ => cell.parse().unwrap_or(f64::NAN),
    };
    let text = reference(&format!("07_special/{name}.csv"));
    let rows: Vec<Vec<f64>> = text
        .lines()
        .skip(1)
        .map(|l| l.split(',').map(number).collect())
        .collect();
    assert!(rows.len() > 75, "{name} has lost rows");
    rows
}

/// The distance of two numbers in units of the last place of the wanted one.
fn ulps(got: f64, want: f64) -> f64 {
    if got == want {
        return 0.0;
    }
    let size = want.abs();
    let unit = if size < f64::MIN_POSITIVE {
        f64::from_bits(1)
    } else {
        size - f64::from_bits(size.to_bits() - 1)
    };
    (got - want).abs() / unit
}

/// The greatest error over a table must be at most `bound`.
fn check(name: &str, bound: f64, error: impl Fn(&[f64]) -> f64) {
    let mut worst = (0.0, Vec::new());
    for row in rows(name) {
        let e = error(&row);
        assert!(!e.is_nan(), "{name} at {row:?}: not a number");
        if e > worst.0 {
            worst = (e, row);
        }
    }
    assert!(
        worst.0 <= bound,
        "{name}: {} at {:?}, allowed {bound}",
        worst.0,
        worst.1
    );
}

/// Tables of the 64 bits of argument (third column) and correctly rounded value (fourth).
fn check_bits(name: &str, bound: f64, f: impl Fn(f64) -> f64) {
    check(name, bound, |row| ulps(f(row[2]), row[3]));
}

fn check_decimal(name: &str, bound: f64, f: impl Fn(f64) -> f64) {
    check(name, bound, |row| ulps(f(row[0]), row[1]));
}

/// The error beside the greater of 1 and the value.
fn beside_one(got: f64, want: f64) -> f64 {
    if got == want {
        return 0.0;
    }
    let size = want.abs();
    (got - want).abs() / if size > 1.0 { size } else { 1.0 }
}

#[test]
fn elementary_within_one_ulp() {
    check_bits("exp", 1.0, maths::exp);
    check_bits("ln", 1.0, maths::ln);
    check_bits("log1p", 1.0, maths::log1p);
    check_bits("expm1", 1.0, maths::expm1);
    check_bits("sin", 1.0, maths::sin);
    check_bits("cos", 1.0, maths::cos);
    check_bits("tanh", 1.0, maths::tanh);
}

#[test]
fn other_elementary_within_their_bounds() {
    check_decimal("tan", 1.0, maths::tan);
    check_decimal("asin", 1.0, maths::asin);
    check_decimal("acos", 1.0, maths::acos);
    check_decimal("atan", 1.0, maths::atan);
    check_decimal("sinh", 2.0, maths::sinh);
    check_decimal("cosh", 2.0, maths::cosh);
    check_decimal("softplus", 2.0, maths::softplus);
    check_decimal("logistic", 2.0, maths::logistic);
    check("power", 1.0, |row| {
        ulps(maths::power(row[0], row[1]), row[2])
    });
}

#[test]
fn normal_law_within_its_bounds() {
    check_bits("erf", 1.0, maths::erf);
    check_bits("erfc", 3.0, maths::erfc);
    check_bits("normal_cdf", 4.0, maths::normal_cdf);
    check_bits("normal_quantile", 6.0, maths::normal_quantile);
    check_decimal("ln_normal_cdf", 4.0, maths::ln_normal_cdf);
}

#[test]
fn gamma_function_within_its_bounds() {
    let either = |got: f64, x: f64, want: f64, bound: f64| {
        if x > 0.0 {
            ulps(got, want) / bound
        } else {
            beside_one(got, want) / 4e-15
        }
    };
    check("lgamma", 1.0, |row| {
        either(maths::ln_gamma(row[2]), row[2], row[3], 5.0)
    });
    // just at the zero its own digits count, and the last one of the argument moves it by a quarter
    check("digamma", 1.0, |row| {
        either(maths::digamma(row[2]), row[2], row[3], 6.0)
    });
    check("ln_beta", 2e-15, |row| {
        beside_one(maths::ln_beta(row[0], row[1]), row[2])
    });
}

/// The error of a probability relative to itself, beside the greater of 1 and its logarithm.
fn tail_error(got: f64, want: f64, ln_want: f64) -> f64 {
    if want < 1e-300 {
        return if got < 1e-299 { 0.0 } else { f64::INFINITY };
    }
    let size = ln_want.abs();
    (got / want - 1.0).abs() / if size > 1.0 { size } else { 1.0 }
}

#[test]
fn incomplete_gamma_within_its_bound() {
    const BOUND: f64 = 1e-14;
    check("incomplete_gamma", BOUND, |r| {
        tail_error(maths::gamma_p(r[0], r[1]), r[2], r[4])
    });
    check("incomplete_gamma", BOUND, |r| {
        tail_error(maths::gamma_q(r[0], r[1]), r[3], r[5])
    });
    check("incomplete_gamma", BOUND, |r| {
        beside_one(maths::ln_gamma_p(r[0], r[1]), r[4])
    });
    check("incomplete_gamma", BOUND, |r| {
        beside_one(maths::ln_gamma_q(r[0], r[1]), r[5])
    });
}

#[test]
fn incomplete_beta_within_its_bound() {
    const BOUND: f64 = 2e-14;
    check("incomplete_beta", BOUND, |r| {
        tail_error(maths::beta_i(r[0], r[1], r[2]), r[3], r[5])
    });
    check("incomplete_beta", BOUND, |r| {
        tail_error(maths::beta_ic(r[0], r[1], r[2]), r[4], r[6])
    });
    check("incomplete_beta", BOUND, |r| {
        beside_one(maths::ln_beta_i(r[0], r[1], r[2]), r[5])
    });
    check("incomplete_beta", BOUND, |r| {
        beside_one(maths::ln_beta_ic(r[0], r[1], r[2]), r[6])
    });
}

/// Chi-squared, Student and F quantiles of the usual printed tables (Pearson & Hartley 1966; from memory).
#[test]
fn printed_quantiles() {
    let near = |got: f64, want: f64| assert!((got - want).abs() <= 0.5e-3, "{got} for {want}");
    for (degrees, p, want) in [
        (1.0, 0.95, 3.841),
        (2.0, 0.95, 5.991),
        (10.0, 0.95, 18.307),
        (10.0, 0.05, 3.940),
        (30.0, 0.99, 50.892),
        (100.0, 0.975, 129.561),
    ] {
        near(2.0 * maths::gamma_quantile(0.5 * degrees, p), want);
    }
    for (degrees, p, want) in [
        (1.0, 0.975, 12.706),
        (5.0, 0.975, 2.571),
        (30.0, 0.95, 1.697),
    ] {
        // I_x(n/2, 1/2) = 2 P(T > t) with x = n / (n + t^2)
        let x = maths::beta_quantile(0.5 * degrees, 0.5, 2.0 * (1.0 - p));
        near((degrees * (1.0 - x) / x).sqrt(), want);
    }
}

/// NIST/ITL StRD, univariate summary statistics: certified means and standard deviations.
#[test]
fn nist_univariate() {
    let text = reference("02_nist_univariate.toml");
    let table: toml::Table = text.parse().expect("a TOML file");
    let sets = table["set"].as_array().expect("sets");
    assert_eq!(sets.len(), 9);
    for set in sets {
        let name = set["name"].as_str().expect("a name");
        let certified = |key: &str| set[key].as_float().expect("a number");
        let pairs = |first: f64, low: f64, high: f64| {
            let mut x = vec![first];
            for _ in 0..500 {
                x.extend([low, high]);
            }
            x
        };
        let x: Vec<f64> = match name {
            "numacc1" => vec![10000001.0, 10000003.0, 10000002.0],
            "numacc2" => pairs(1.2, 1.1, 1.3),
            "numacc3" => pairs(1000000.2, 1000000.1, 1000000.3),
            "numacc4" => pairs(10000000.2, 10000000.1, 10000000.3),
            "pidigits" => reference("02_nist_univariate_pidigits.csv")
                .lines()
                .skip(1)
                .flat_map(|line| line.bytes().map(|b| f64::from(b - b'0')))
                .collect(),
            _ => reference(set["data"].as_str().expect("a file"))
                .lines()
                .skip(1)
                .map(|line| line.trim().parse().expect("a number"))
                .collect(),
        };
        let mean = certified("certified_mean");
        let sd = certified("certified_sd");
        // the data as printed are not doubles: their own rounding moves the spread
        let rounding = 1.2e-16 * mean.abs() / sd;
        let allowed = 5e-15 + rounding;
        assert!(
            (maths::mean(&x) / mean - 1.0).abs() <= 1e-15,
            "{name}: mean"
        );
        let got = maths::variance(&x).sqrt();
        assert!((got / sd - 1.0).abs() <= allowed, "{name}: {got} for {sd}");
        let mut spread = maths::Spread::default();
        let (mut left, mut right) = (maths::Spread::default(), maths::Spread::default());
        for (i, v) in x.iter().enumerate() {
            spread.add(*v);
            if i < x.len() / 3 {
                left.add(*v)
            } else {
                right.add(*v)
            }
        }
        for s in [spread, left.merge(&right)] {
            let got = s.variance().sqrt();
            assert!(
                (s.mean / mean - 1.0).abs() <= 1e-13,
                "{name}: mean met one by one"
            );
            let allowed = 1e-12 + rounding;
            assert!(
                (got / sd - 1.0).abs() <= allowed,
                "{name}: {got} one by one, for {sd}"
            );
        }
    }
}
