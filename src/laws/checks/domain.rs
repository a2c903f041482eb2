//! Outside the domain of a parameter and outside the support.

use super::cases::cases;
use crate::laws::{Domain, table};
use crate::random::trial::stream;

fn outside(domain: Domain) -> &'static [f64] {
    const NAN: f64 = f64::NAN;
    const INF: f64 = f64::INFINITY;
    match domain {
        Domain::Real => &[],
        Domain::Positive => &[0.0, -0.0, -1.0, 1e-320, NAN, INF, -INF],
        Domain::NonNegative => &[-1e-300, -1.0, NAN, INF, -INF],
        Domain::Unit | Domain::Probabilities => &[-1e-9, 1.0 + 1e-9, NAN, INF, -INF],
        Domain::PositiveUnit => &[0.0, -0.5, 1.0 + 1e-9, NAN, INF],
        Domain::Count => &[-1.0, 2.5, NAN, INF],
    }
}

#[test]
fn parameters_outside_their_domain_have_no_density_and_no_draws() {
    for law in table() {
        for p in cases(*law) {
            let inner = law.at(&p).quantile(0.4).expect("a proper law");
            for index in 0..p.len() {
                let parameter = law.parameters()[index.min(law.parameters().len() - 1)];
                for &wrong in outside(parameter.domain) {
                    assert!(!parameter.domain.holds(wrong));
                    let mut p = p.clone();
                    p[index] = wrong;
                    let at = law.at(&p);
                    for x in [inner, 0.0, 0.5, 1.0, 2.0, -3.0] {
                        let place = format!("{} {p:?} at {x}", law.usage());
                        assert_eq!(at.log_density(x), f64::NEG_INFINITY, "{place}");
                        assert_eq!(at.ln_survival(x), Some(f64::NEG_INFINITY), "{place}");
                        assert_eq!(at.ln_distribution(x), Some(f64::NEG_INFINITY), "{place}");
                        assert_eq!(
                            at.ln_between(x, x + 1.0),
                            Some(f64::NEG_INFINITY),
                            "{place}"
                        );
                        assert!(at.distribution(x).is_some_and(f64::is_nan), "{place}");
                        assert!(at.survival(x).is_some_and(f64::is_nan), "{place}");
                    }
                    assert!(at.quantile(0.5).is_some_and(f64::is_nan));
                    assert!(at.upper_quantile(0.5).is_some_and(f64::is_nan));
                    let draw = at.draw(&mut stream(1));
                    assert!(
                        draw.is_some_and(f64::is_nan),
                        "{} {p:?}: {draw:?}",
                        law.usage()
                    );
                }
            }
        }
    }
}

#[test]
fn conditions_between_parameters() {
    let find = |name, arguments: &[&str]| crate::laws::find(name, arguments).expect("in the table");
    let uniform = find("uniform", &["from", "to"]);
    assert_eq!(uniform.at(&[2.0, 2.0]).log_density(2.0), f64::NEG_INFINITY);
    assert!(
        uniform
            .at(&[3.0, 2.0])
            .draw(&mut stream(1))
            .is_some_and(f64::is_nan)
    );
    let categorical = find("categorical", &["probabilities"]);
    assert_eq!(
        categorical.at(&[0.5, 0.4]).log_density(1.0),
        f64::NEG_INFINITY
    );
    assert!(
        categorical
            .at(&[0.5, 0.4])
            .draw(&mut stream(1))
            .is_some_and(f64::is_nan)
    );
    // Shape and rate of these moments are no doubles.
    let gamma = find("gamma", &["mean", "sd"]);
    assert_eq!(
        gamma.at(&[1e-200, 1e200]).log_density(1.0),
        f64::NEG_INFINITY
    );
    assert_eq!(
        gamma.at(&[1e200, 1e-200]).log_density(1.0),
        f64::NEG_INFINITY
    );
}

#[test]
fn points_outside_the_support_have_no_density() {
    for law in table() {
        let support = law.support();
        for p in cases(*law) {
            let at = law.at(&p);
            let (lower, upper) = support.ends(&p);
            let mut points = vec![];
            if lower > f64::NEG_INFINITY {
                points.extend([
                    lower - 1e-9,
                    lower - 1.0,
                    f64::NEG_INFINITY,
                    f64::INFINITY,
                    f64::NAN,
                ]);
                if !support.closed {
                    points.push(lower);
                }
            }
            if upper < f64::INFINITY {
                points.extend([upper + 1e-6 * (1.0 + upper), upper + 1.0]);
                if !support.closed {
                    points.push(upper);
                }
            }
            if support.integer {
                points.extend([lower + 0.5, lower + 1e-6]);
            }
            for x in points {
                let density = at.log_density(x);
                assert_eq!(density, f64::NEG_INFINITY, "{} {p:?} at {x}", law.usage());
                assert!(!support.holds(x, &p));
            }
            if lower > f64::NEG_INFINITY {
                assert_eq!(at.distribution(lower - 1.0), Some(0.0));
                assert_eq!(at.survival(lower - 1.0), Some(1.0));
                assert_eq!(at.ln_survival(lower - 1.0), Some(0.0));
                assert_eq!(at.ln_distribution(lower - 1.0), Some(f64::NEG_INFINITY));
            }
            for (x, below) in [(f64::NEG_INFINITY, 0.0), (f64::INFINITY, 1.0)] {
                assert_eq!(
                    at.distribution(x),
                    Some(below),
                    "{} {p:?} at {x}",
                    law.usage()
                );
                assert_eq!(
                    at.survival(x),
                    Some(1.0 - below),
                    "{} {p:?} at {x}",
                    law.usage()
                );
            }
            assert_eq!(at.quantile(0.0), Some(lower));
            assert_eq!(at.quantile(1.0), Some(upper));
            for q in [-0.1, 1.1, f64::NAN] {
                assert!(at.quantile(q).is_some_and(f64::is_nan));
                assert!(at.upper_quantile(q).is_some_and(f64::is_nan));
            }
        }
    }
}

#[test]
fn densities_far_out_are_minus_infinity_or_finite_never_no_number() {
    for law in table() {
        for p in cases(*law) {
            let at = law.at(&p);
            // Incomplete beta and gamma functions are good up to counts of 1e12 or so.
            let far =
                |x: &f64| !law.support().integer || x.abs() < 1e12 || x.abs() == f64::INFINITY;
            let points = [
                1e-308,
                1e11,
                1e-100,
                1e100,
                1e300,
                -1e100,
                -1e300,
                f64::MAX,
                f64::INFINITY,
                f64::NEG_INFINITY,
            ];
            for x in points.into_iter().filter(far) {
                let density = at.log_density(x);
                assert!(
                    density < f64::INFINITY,
                    "{} {p:?} at {x}: {density}",
                    law.usage()
                );
                for value in [at.ln_distribution(x), at.ln_survival(x)] {
                    let fine = value.is_some_and(|value| value <= 0.0);
                    assert!(fine, "{} {p:?} at {x}: {value:?}", law.usage());
                }
            }
        }
    }
}

/// A formula can make a parameter infinite (`ln(0)`): nothing finite is likely then, except the one outcome
/// that infinite odds leave.
#[test]
fn infinite_parameters_leave_no_finite_density() {
    let mut tried = 0;
    for law in table() {
        let support = law.support();
        for p in cases(*law) {
            for at in 0..p.len() {
                let parameter = law.parameters()[at.min(law.parameters().len() - 1)];
                for end in [f64::NEG_INFINITY, f64::INFINITY] {
                    let mut q = p.clone();
                    q[at] = end;
                    let (lower, upper) = support.ends(&p);
                    let odds = parameter.name == "log_odds";
                    let likely = if end < 0.0 { lower } else { upper };
                    for x in [-3.0, 0.0, 0.25, 1.0, 2.0, lower, upper] {
                        if !support.holds(x, &p) {
                            continue;
                        }
                        tried += 1;
                        let wanted = if odds && x == likely {
                            0.0
                        } else {
                            f64::NEG_INFINITY
                        };
                        let found = law.at(&q).log_density(x);
                        assert!(
                            (found - wanted).abs() < 1e-9 || found == wanted,
                            "{} {q:?} at {x}: {found}",
                            law.usage()
                        );
                    }
                }
            }
        }
    }
    assert!(tried > 300);
}

#[test]
fn binomial_outcomes_that_odds_rule_out() {
    let binomial = crate::laws::find("binomial", &["trials", "log_odds"]).expect("in the table");
    for odds in [1e300, 1e308, f64::INFINITY] {
        for (trials, x, density) in [
            (20.0, 0.0, 0.0),
            (20.0, 1.0, f64::NEG_INFINITY),
            (20.0, 20.0, f64::NEG_INFINITY),
            (0.0, 0.0, 0.0),
        ] {
            let [low, high] = [-odds, odds].map(|odds| binomial.at(&[trials, odds]).log_density(x));
            assert!((low - density).abs() < 1e-9 || low == density, "{low}");
            let mirrored = binomial.at(&[trials, odds]).log_density(trials - x);
            assert!(
                (mirrored - density).abs() < 1e-9 || mirrored == density,
                "{mirrored}"
            );
            assert!(!high.is_nan());
        }
    }
    assert!(binomial.at(&[20.0, f64::NAN]).log_density(1.0).is_nan());
}

#[test]
fn flat_laws_have_a_density_only() {
    let expected = [
        ("flat", -2.0, 0.0),
        ("flat_positive", 2.0, 0.0),
        ("log_flat", 2.0, -std::f64::consts::LN_2),
    ];
    for (name, x, density) in expected {
        let law = crate::laws::find(name, &[]).expect("in the table");
        let at = law.at(&[]);
        assert_eq!(at.log_density(x), density);
        assert_eq!(at.distribution(x), None);
        assert_eq!(at.quantile(0.5), None);
        assert_eq!(at.ln_between(x, 3.0), None);
        assert_eq!(at.draw(&mut stream(1)), None);
        if name != "flat" {
            assert_eq!(at.log_density(-1.0), f64::NEG_INFINITY);
            assert_eq!(at.log_density(0.0), f64::NEG_INFINITY);
        }
    }
}
