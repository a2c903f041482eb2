//! What the model says of its conditions before any draw, and what a chain that runs away leaves.

use super::*;
use crate::course::Standing;

fn said(model: &Arc<dyn Model>, name: &str) -> Option<(Standing, String)> {
    let conditions = model.conditions();
    let found = conditions.into_iter().find(|c| c.name == name)?;
    Some((found.standing, found.evidence))
}

#[test]
fn one_start_for_all_chains_is_told() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        a = { law = "normal(mean = 0, sd = 1)" }
        b = { law = "normal(mean = 0, sd = 1)" }
    "#;
    let start = |at: &str| StartSpec::At(section(at));
    let tables = BTreeMap::new();
    let model = resolve(study, &tables, &start("a = 1\nb = 2"), &[]).expect("a model");
    let (standing, evidence) = said(&model, "start forgotten").expect("is said");
    assert_eq!(standing, Standing::NotKnown);
    assert!(
        evidence.contains("all chains start at one point"),
        "{evidence}"
    );
    // The other one starts spread.
    let model = resolve(study, &tables, &start("a = 1"), &[]).expect("a model");
    assert_eq!(said(&model, "start forgotten"), None);
}

#[test]
fn a_divisor_that_may_be_near_0_leaves_the_mean_unknown() {
    let study = r#"
        [model]
        family = "density"
        [model.constant]
        ten = 10
        [model.unknown]
        a = { law = "normal(mean = 0, sd = 1)" }
        b = { law = "normal(mean = 3, sd = 1)" }
        p = { law = "uniform(from = 1, to = 2)" }
        s = { law = "exponential(rate = 1)" }
        v = { law = "exponential(rate = 1)", per = "stations" }
        [model.define]
        ratio = "(ten - a) / b"
    "#;
    let tables = stations(false);
    let asked = |of: &str| {
        let spec = EstimandSpec {
            name: Text::bare("asked"),
            of: Some(Text::bare(of)),
            unit: None,
        };
        let model = resolve(study, &tables, &StartSpec::Spread, &[spec]).expect(of);
        said(&model, "integrable")
    };
    for (of, divisor) in [
        ("a / b", "b"),
        ("1 + ratio", "b"),
        ("1 / s", "s"),
        ("s ^ -1", "s"),
        ("a / (p - 1)", "p - 1"),
        ("v[1] / v[2]", "v[2]"),
    ] {
        let (standing, evidence) = asked(of).expect(of);
        assert_eq!(standing, Standing::NotKnown, "{of}");
        let words = format!("`asked` divides by `{divisor}`");
        assert!(evidence.contains(&words), "{evidence}");
        assert!(evidence.contains("median"), "{evidence}");
    }
    for of in [
        "a / ten",
        "a / p",
        "a / (1 + s)",
        "a / b > 1",
        "s / (s + p)",
        "v[1] / sum(v)",
        "a / sum(stations.hours)",
        "a / exp(b)",
    ] {
        assert_eq!(asked(of), None, "{of}");
    }
}

#[test]
fn a_chain_that_runs_away_records_no_number() {
    for (method, law) in [("slice", "a^4"), ("metropolis", "a^4"), ("slice", "exp(a)")] {
        let study = format!(
            "[model]\nfamily = \"density\"\n[model.unknown]\na = {{ law = \"flat()\" }}\n[model.term]\nt = \"{law}\"\n\
             [sampler]\nmethod = \"{method}\"\n"
        );
        let start = StartSpec::At(section("a = 1"));
        let model = resolve(&study, &BTreeMap::new(), &start, &[]).expect("a model");
        let seed = ChainSeed {
            chain: 0,
            stream_key: [3; 32],
        };
        let mut course = model.course(&[seed]).expect("a start");
        course.advance(Phase::BurnIn, 2000);
        let block = &course.advance(Phase::Draws, 10)[0];
        assert!(
            block.values.iter().all(|x| x.is_nan()),
            "{:?}",
            block.values
        );
    }
}

#[test]
fn a_law_cut_by_what_it_is_used_for_is_told() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        p = { law = "normal(mean = 0.3, sd = 0.2)" }
        q = { law = "beta(alpha = 1, beta = 1)" }
        s = { law = "student(degrees = 4, location = 0, scale = 1)" }
        t = { law = "gamma(shape = q, rate = s)" }
        [model.observed]
        failures = { of = "stations.failures", law = "binomial(trials = 90, probability = p)" }
    "#;
    let model = resolve(study, &stations(false), &StartSpec::Spread, &[]).expect("a model");
    let (standing, evidence) = said(&model, "finite mass").expect("is said");
    assert_eq!(standing, Standing::ByConstruction);
    for (unknown, named) in [("p", true), ("s", true), ("q", false), ("t", false)] {
        let told = evidence.contains(&format!("the law of `{unknown}` reaches beyond"));
        assert_eq!(told, named, "{unknown}: {evidence}");
    }
    let bounded = study.replace(
        "normal(mean = 0.3, sd = 0.2)",
        "truncated(normal(mean = 0.3, sd = 0.2), from = 0, to = 1)",
    );
    let model = resolve(&bounded, &stations(false), &StartSpec::Spread, &[]).expect("a model");
    let (_, evidence) = said(&model, "finite mass").expect("is said");
    assert!(!evidence.contains("law of `p`"), "{evidence}");
}
