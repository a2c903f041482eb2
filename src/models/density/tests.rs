use super::*;
use crate::course::{Block, EstimandSpec, Phase, StartSpec, State};
use crate::maths::Unary;
use crate::place::{Source, Text};
use crate::reading::{Files, Section, Table, data, parse};
use std::collections::BTreeMap;

mod grounds;

fn ln(x: f64) -> f64 {
    Unary::Ln.apply(x)
}

fn section(text: &str) -> Section {
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: text.into(),
    });
    let mut faults = Faults::default();
    let section = parse(&source, &mut faults);
    assert!(faults.is_empty(), "{faults:?}");
    section
}

/// Three stations with failures (the last one missing if `missing`) and hours.
fn stations(missing: bool) -> BTreeMap<String, Arc<Table>> {
    let folder = tempfile::tempdir().expect("a folder");
    let last = if missing { "" } else { "4" };
    let text = format!("station,failures,hours\nCawdle,5,94\nFleam,1,15\nOstrey,{last},62\n");
    std::fs::write(folder.path().join("stations.csv"), text).expect("a file");
    let declared = section("file = \"stations.csv\"\nnames = \"station\"\nmissing = \"unknown\"\n");
    let mut faults = Faults::default();
    let files = Files::Folder(folder.path().into());
    let table = data("stations", &declared, &files, &mut faults).expect("a table");
    BTreeMap::from([("stations".to_string(), Arc::new(table))])
}

fn resolve(
    study: &str,
    tables: &BTreeMap<String, Arc<Table>>,
    start: &StartSpec,
    estimands: &[EstimandSpec],
) -> Result<Arc<dyn Model>, Vec<String>> {
    let study = section(study);
    let mut faults = Faults::default();
    let model = study.section("model", &mut faults).expect("a model");
    model.has("family");
    let predict = study.section("predict", &mut faults);
    let sampler = study.section("sampler", &mut faults);
    let request = Request {
        model: &model,
        sampler: sampler.as_ref(),
        predict: predict.as_ref(),
        estimands,
        start,
        tables,
        every: 1,
    };
    let resolved = DensityFamily.resolve(&request, &mut faults);
    match resolved {
        Some(model) if faults.is_empty() => Ok(model),
        _ => Err(faults.0.into_iter().map(|fault| fault.what).collect()),
    }
}

const PUMPS: &str = r#"
    [model]
    family = "density"
    [model.constant]
    prior = 1
    [model.unknown]
    rate = { law = "gamma(shape = a, rate = b)", per = "stations" }
    a = { law = "exponential(rate = prior)" }
    b = { law = "gamma(shape = 0.1, rate = 1)" }
    [model.observed]
    failures = { of = "stations.failures", law = "poisson(mean = expected)" }
    [model.define]
    expected = "rate * stations.hours"
"#;

fn posterior(study: &str, tables: &BTreeMap<String, Arc<Table>>) -> Posterior {
    let study = section(study);
    let mut faults = Faults::default();
    let model = study.section("model", &mut faults).expect("a model");
    model.has("family");
    let declared = Declared::read(&model, None, &mut faults);
    let posterior = Posterior::build(&declared, tables, model.place(), &mut faults);
    assert!(faults.is_empty(), "{faults:?}");
    posterior.expect("no fault")
}

/// The same by hand: laws, Jacobians of the logarithms, and the Poisson counts.
#[test]
fn the_log_density_is_that_of_the_model_written_out() {
    let posterior = posterior(PUMPS, &stations(false));
    assert_eq!(posterior.order, ["a", "b", "rate", "expected"]);
    let z = [0.3, -0.2, -2.0, -3.0, -2.5];
    let mut found = [0.0];
    posterior.target.machine(1).run(&z, &mut found);
    let exp = |x| Unary::Exp.apply(x);
    let ln_gamma = |x| Unary::LnGamma.apply(x);
    let (a, b) = (exp(z[0]), exp(z[1]));
    let gamma = |x: f64, shape: f64, rate: f64| {
        shape * ln(rate) - ln_gamma(shape) + (shape - 1.0) * ln(x) - rate * x
    };
    let mut wanted = -a + z[0] + gamma(b, 0.1, 1.0) + z[1];
    for (i, (count, hours)) in [(5.0, 94.0), (1.0, 15.0), (4.0, 62.0)]
        .into_iter()
        .enumerate()
    {
        let rate = exp(z[2 + i]);
        wanted += gamma(rate, a, b) + z[2 + i];
        wanted += count * ln(rate * hours) - rate * hours - ln_gamma(count + 1.0);
    }
    assert!(
        (found[0] - wanted).abs() < 1e-12 * wanted.abs(),
        "{} is not {wanted}",
        found[0]
    );
}

/// A bounded unknown, its Jacobian checked by integrating the density over the coordinate: to 1 for a law
/// alone. Without the Jacobian the integral is far off.
#[test]
fn transforms_keep_the_mass_of_a_law() {
    for law in [
        "beta(alpha = 2, beta = 3)",
        "uniform(from = -1, to = 4)",
        "gamma(shape = 2.5, rate = 0.7)",
        "truncated(normal(mean = 0, sd = 1), from = 0.5, to = 2)",
        "truncated(normal(mean = 0, sd = 1), to = -0.5)",
    ] {
        let study =
            format!("[model]\nfamily = \"density\"\n[model.unknown]\nx = {{ law = \"{law}\" }}\n");
        let posterior = posterior(&study, &BTreeMap::new());
        let mut machine = posterior.target.machine(1);
        let mut mass = 0.0;
        let step = 1.0 / 256.0;
        for i in -10_000..10_000 {
            let mut out = [0.0];
            machine.run(&[f64::from(i) * step], &mut out);
            mass += Unary::Exp.apply(out[0]) * step;
        }
        assert!((mass - 1.0).abs() < 1e-9, "{law}: {mass}");
    }
}

/// Laws of infinite density at an end have a good part of their mass where no double lies: 2.5 % of beta(0.1,
/// 0.1) above the last double under 1, 6e-4 of gamma(0.01, 1) below the first above 0. The coordinate reaches it.
#[test]
fn mass_nearer_to_an_end_than_any_double_is_kept() {
    for law in [
        "beta(alpha = 0.1, beta = 0.1)",
        "beta(alpha = 2, beta = 0.05)",
        "gamma(shape = 0.01, rate = 1)",
    ] {
        let study =
            format!("[model]\nfamily = \"density\"\n[model.unknown]\nx = {{ law = \"{law}\" }}\n");
        let posterior = posterior(&study, &BTreeMap::new());
        let mut machine = posterior.target.machine(1);
        let mut mass = 0.0;
        let step = 1.0 / 32.0;
        for i in -96_000..22_000 {
            let mut out = [0.0];
            machine.run(&[f64::from(i) * step], &mut out);
            mass += Unary::Exp.apply(out[0]) * step;
        }
        assert!((mass - 1.0).abs() < 1e-9, "{law}: {mass}");
    }
}

#[test]
fn starts_lie_in_the_middle_half_and_may_be_stated() {
    let posterior = posterior(PUMPS, &stations(false));
    for chain in 0..20 {
        let seed = ChainSeed {
            chain,
            stream_key: [chain as u8; 32],
        };
        let z = Start::Spread.of_chain(&posterior, &seed).unwrap();
        let a = Unary::Exp.apply(z[0]);
        // Quartiles of the exponential law.
        assert!(a > ln(4.0 / 3.0) && a < ln(4.0), "{a}");
        let at = Start::At(BTreeMap::from([("rate".to_string(), vec![0.1, 0.2, 0.3])]));
        let stated = at.of_chain(&posterior, &seed).unwrap();
        assert!((stated[4] - ln(0.3)).abs() < 1e-15);
        assert_eq!(stated[..2], z[..2], "what is not stated is spread as ever");
    }
    let wrong = Start::At(BTreeMap::from([("a".to_string(), vec![-1.0])]));
    let seed = ChainSeed {
        chain: 0,
        stream_key: [0; 32],
    };
    let fault = wrong.of_chain(&posterior, &seed).unwrap_err();
    assert!(
        fault.0.contains("-1, lies outside the support"),
        "{}",
        fault.0
    );
}

#[test]
fn one_or_many_lanes_give_the_same_blocks_and_a_saved_state_goes_on() {
    let model = resolve(PUMPS, &stations(false), &StartSpec::Spread, &[]).unwrap();
    let seeds: Vec<ChainSeed> = (0..3)
        .map(|chain| ChainSeed {
            chain,
            stream_key: [chain as u8 + 1; 32],
        })
        .collect();
    let mut together = model.clone().course(&seeds).unwrap();
    let burn = together.advance(Phase::BurnIn, 50);
    let state = together.save(1);
    let draws = together.advance(Phase::Draws, 50);
    let mut alone = model.clone().course(&seeds[1..2]).unwrap();
    assert_eq!(alone.advance(Phase::BurnIn, 50)[0], burn[1]);
    assert_eq!(alone.save(0), state);
    let mut later = model.course(&seeds[1..2]).unwrap();
    later.load(0, &state).unwrap();
    assert_eq!(later.advance(Phase::Draws, 50)[0], draws[1]);
    assert_ne!(draws[0], draws[1]);
}

/// A missing cell of a predictor, whose column has a law of its own, learns from what it predicts: with x ~ N(0, 3)
/// and y = 62 ~ N(50 + 2 x, 4), the precision of x is 1/9 + 4/16 and its mean 1.5 over that, 4.154.
#[test]
fn a_missing_predictor_learns_from_what_it_predicts() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        level = { law = "normal(mean = 0, sd = 1)" }
        [model.define]
        expected = "50 + 2 * stations.failures"
        [model.observed]
        failures = { of = "stations.failures", law = "normal(mean = 0, sd = 3)" }
        hours = { of = "stations.hours", law = "normal(mean = expected, sd = 4)" }
    "#;
    let estimands = [EstimandSpec {
        name: Text::bare("filled"),
        of: Some(Text::bare("stations.failures[\"Ostrey\"]")),
        unit: None,
    }];
    let model = resolve(study, &stations(true), &StartSpec::Spread, &estimands).unwrap();
    let seed = ChainSeed {
        chain: 0,
        stream_key: [8; 32],
    };
    let mut course = model.course(&[seed]).unwrap();
    course.advance(Phase::BurnIn, 500);
    let draws = 20_000;
    let block = &course.advance(Phase::Draws, draws)[0];
    let mean = block.values.iter().sum::<f64>() / draws as f64;
    // A spread of 1.66 and a walk's autocorrelation time of about 6: an error of 0.03.
    assert!((mean - 4.154).abs() < 0.12, "{mean}");
}

/// A missing count with everything else known is drawn from its law: its mean is the law's.
#[test]
fn a_missing_cell_follows_the_observed_law() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        level = { law = "normal(mean = 0, sd = 1)" }
        [model.observed]
        failures = { of = "stations.failures", law = "poisson(mean = stations.hours / 10)" }
        [predict]
        again = "poisson(mean = 4 + level^2)"
    "#;
    let estimand = |name: &str, of: &str| EstimandSpec {
        name: Text::bare(name),
        of: Some(Text::bare(of)),
        unit: None,
    };
    let estimands = [
        estimand("filled", "stations.failures[\"Ostrey\"]"),
        estimand("again", "again"),
    ];
    let model = resolve(study, &stations(true), &StartSpec::Spread, &estimands).unwrap();
    let mut course = model
        .course(&[ChainSeed {
            chain: 0,
            stream_key: [7; 32],
        }])
        .unwrap();
    course.advance(Phase::BurnIn, 500);
    let draws = 20_000;
    let block = &course.advance(Phase::Draws, draws)[0];
    let mean = |values: &[f64]| values.iter().sum::<f64>() / values.len() as f64;
    let filled = mean(&block.values[..draws]);
    // Mean 6.2; the walk on integers is correlated: an error of about sqrt(6.2 * 30 / 20000).
    assert!((filled - 6.2).abs() < 0.4, "{filled}");
    // E(4 + level^2) = 5, variance 5 + 2: an error of sqrt(7 / 20000) = 0.019, a little more for the walk.
    let again = mean(&block.values[draws..]);
    assert!((again - 5.0).abs() < 0.12, "{again}");
}

/// Without estimands every unknown is one; a completed column that comes before another unknown is none.
#[test]
fn quantities_belong_to_estimands_without_gaps() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        zeta = { law = "normal(mean = 0, sd = 1)" }
        eta = { law = "normal(mean = 0, sd = 1)" }
        [model.observed]
        failures = { of = "stations.failures", law = "poisson(mean = stations.hours / 10)" }
    "#;
    let model = resolve(study, &stations(true), &StartSpec::Spread, &[]).unwrap();
    let named = |q: &Quantity| (q.name.clone(), q.estimand);
    let quantities: Vec<_> = model.quantities().iter().map(named).collect();
    assert_eq!(quantities, [("eta".into(), 0), ("zeta".into(), 1)]);
}

/// What was seen to have ended by some time, after it entered, ended between the two: for an exponential law
/// of rate r, (e^(-r entered) - e^(-r of)) / e^(-r entered).
#[test]
fn left_censored_rows_that_entered_late_ended_after_their_entry() {
    let study = r#"
        [model]
        family = "density"
        [model.unknown]
        r = { law = "flat()" }
        [model.observed]
        hours = { of = "stations.hours", law = "exponential(rate = r)", left = "stations.hours > 0", entered = "10" }
    "#;
    let posterior = posterior(study, &stations(false));
    for rate in [0.003, 0.02, 0.4] {
        let mut density = [0.0];
        posterior.target.machine(1).run(&[rate], &mut density);
        let terms =
            [94.0, 15.0, 62.0].map(|of: f64| ln(1.0 - crate::maths::exp(-rate * (of - 10.0))));
        let expected: f64 = terms.iter().sum();
        assert!((density[0] - expected).abs() < 1e-10, "{rate}: {density:?}");
    }
}

#[test]
fn improper_posteriors_that_can_be_seen_are_faults() {
    let tables = stations(false);
    let unread = r#"
        [model]
        family = "density"
        [model.unknown]
        a = { law = "flat()" }
        b = { law = "normal(mean = a, sd = 1)" }
    "#;
    let faults = resolve(unread, &tables, &StartSpec::Prior, &[])
        .err()
        .unwrap();
    assert!(
        faults
            .iter()
            .any(|f| f.contains("nothing observed depends on `a`")),
        "{faults:?}"
    );
    let spread = r#"
        [model]
        family = "density"
        [model.unknown]
        spread = { law = "log_flat()" }
        effect = { law = "normal(mean = 0, sd = spread)", per = "stations" }
        [model.observed]
        failures = { of = "stations.failures", law = "poisson(mean = exp(effect))" }
    "#;
    let faults = resolve(spread, &tables, &StartSpec::Spread, &[])
        .err()
        .unwrap();
    assert!(
        faults.iter().any(|f| f.contains("scale of unknowns alone")),
        "{faults:?}"
    );
}

#[test]
fn a_cycle_and_a_value_outside_the_support_are_named() {
    let tables = stations(false);
    let cycle = PUMPS.replace(
        "exponential(rate = prior)",
        "exponential(rate = expected[1])",
    );
    let faults = resolve(&cycle, &tables, &StartSpec::Spread, &[])
        .err()
        .unwrap();
    assert!(
        faults.iter().any(|f| f.contains("defined by each other")),
        "{faults:?}"
    );
    let negative = PUMPS.replace(
        "of = \"stations.failures\"",
        "of = \"2 - stations.failures\"",
    );
    let faults = resolve(&negative, &tables, &StartSpec::Spread, &[])
        .err()
        .unwrap();
    assert!(
        faults
            .iter()
            .any(|f| f.contains("can't have been observed") && f.contains("and 1 more")),
        "{faults:?}"
    );
}

/// Neither the order of the file nor the way a formula is spaced can move a key.
#[test]
fn the_canonical_form_does_not_know_the_order_of_the_file() {
    let tables = stations(false);
    let other = r#"
        [model]
        family = "density"
        [model.define]
        expected = "(rate*stations.hours)"
        [model.observed]
        failures = { law = "poisson( mean = expected )", of = "stations.failures" }
        [model.unknown]
        b = { law = "gamma(shape = 0.10, rate = 1.0)" }
        a = { law = "exponential(rate = prior)" }
        rate = { per = "stations", law = "gamma(shape = a, rate = b)" }
        [model.constant]
        prior = 1.0
    "#;
    let canonical = |study: &str| {
        resolve(study, &tables, &StartSpec::Spread, &[])
            .unwrap()
            .canonical()
    };
    assert_eq!(canonical(PUMPS), canonical(other));
    assert_ne!(canonical(PUMPS), canonical(&other.replace("0.10", "0.11")));
}

/// A density with a cliff to run away up, which some chains meet and others do not.
#[test]
fn a_lane_that_ran_away_leaves_its_neighbours_alone() {
    let study = "[model]\nfamily = \"density\"\n[model.unknown]\na = { law = \"normal(mean = 0, sd = 1)\" }\n\
                 b = { law = \"normal(mean = 0, sd = 1)\" }\n[model.term]\nt = \"if(a > 5.4, 2e15, 0)\"\n\
                 [sampler]\nmethod = \"metropolis\"\nadapt = \"none\"\n";
    let start = StartSpec::At(section("a = 0\nb = 0"));
    let model = resolve(study, &BTreeMap::new(), &start, &[]).expect("a model");
    let seeds: Vec<ChainSeed> = (0..8)
        .map(|chain| ChainSeed {
            chain,
            stream_key: [chain as u8; 32],
        })
        .collect();
    let mut together = model.clone().course(&seeds).expect("a start");
    let mut blocks = together.advance(Phase::Draws, 150);
    let still: Vec<State> = (0..8).map(|lane| together.save(lane)).collect();
    blocks.extend(together.advance(Phase::Draws, 150));
    let mut away = 0;
    for (lane, seed) in seeds.iter().enumerate() {
        let mut alone = model
            .clone()
            .course(std::slice::from_ref(seed))
            .expect("a start");
        for half in [lane, 8 + lane] {
            let mine = alone.advance(Phase::Draws, 150).remove(0);
            let bits = |block: &Block| block.values.iter().map(|x| x.to_bits()).collect::<Vec<_>>();
            assert_eq!(bits(&blocks[half]), bits(&mine), "chain {lane}");
        }
        assert_eq!(together.save(lane), alone.save(0), "chain {lane}");
        let gone = |block: &Block| block.values.iter().all(|x| x.is_nan());
        if gone(&blocks[8 + lane]) {
            away += 1;
            let first = blocks[lane].values.iter().position(|x| x.is_nan());
            assert!(first.is_none_or(|first| first > 0), "it did walk before");
            if blocks[lane].values[149].is_nan() {
                // All but the count of draws: the place, the density, the stream, the counts of the kernel.
                let end = together.save(lane);
                assert_eq!(still[lane].moving[8..], end.moving[8..], "chain {lane}");
            }
        } else if blocks[lane].values[149].is_finite() {
            let moved = still[lane].moving[8..] != together.save(lane).moving[8..];
            assert!(moved, "chain {lane}");
        }
    }
    assert!(0 < away && away < 8, "{away} of 8 ran away");
}
