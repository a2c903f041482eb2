use super::read;
use crate::canon::Json;
use crate::course::{Coordinate, CoordinateKind};
use crate::methods::{Adapt, Sampler, Settings};
use crate::place::{Faults, Source};
use crate::reading::parse;
use std::sync::Arc;

const REAL: CoordinateKind = CoordinateKind::Real;

fn integer(lower: i64, upper: Option<i64>) -> CoordinateKind {
    CoordinateKind::Integer {
        lower: Some(lower),
        upper,
    }
}

/// Reads the text of a sampler for unknowns `a` (real), `rate` (two real elements), `k` (1 .. 40) and `n`
/// (from 0 without end).
fn sampler(text: &str) -> (Option<Sampler>, Vec<String>) {
    let coordinate = |name: &str, unknown, kind| Coordinate {
        name: name.into(),
        unknown,
        kind,
    };
    let coordinates = [
        coordinate("a", 0, REAL),
        coordinate("rate[1]", 1, REAL),
        coordinate("rate[2]", 1, REAL),
        coordinate("k", 2, integer(1, Some(40))),
        coordinate("n", 3, integer(0, None)),
    ];
    let unknowns = ["a", "rate", "k", "n"].map(String::from);
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: text.into(),
    });
    let mut faults = Faults::default();
    let file = parse(&source, &mut faults);
    let section = file.section("sampler", &mut faults);
    let sampler = read(section.as_ref(), &coordinates, &unknowns, &mut faults);
    let told = |fault: &crate::place::Fault| {
        let place = fault
            .place
            .as_ref()
            .map(|place| &source.text[place.span.clone()]);
        let help = fault.help.as_deref().unwrap_or("-");
        format!("{} | {} | {help}", fault.what, place.unwrap_or("-"))
    };
    (sampler, faults.0.iter().map(told).collect())
}

fn sound(text: &str) -> Sampler {
    let (sampler, faults) = sampler(text);
    assert_eq!(faults, Vec::<String>::new());
    sampler.expect("a sampler without a fault")
}

/// The faults of a sampler that must have some.
fn faults(text: &str) -> Vec<String> {
    let (sampler, faults) = sampler(text);
    assert!(sampler.is_none() && !faults.is_empty());
    faults
}

fn outline(sampler: &Sampler) -> Vec<(String, String, u64)> {
    let steps = sampler.steps.iter();
    steps
        .map(|s| (s.name.clone(), s.on.join(" "), s.times))
        .collect()
}

fn told(name: &str, on: &str, times: u64) -> (String, String, u64) {
    (name.into(), on.into(), times)
}

#[test]
fn chosen_where_nothing_is_said() {
    let sampler = sound("");
    let expected = [
        told("slice", "a rate", 1),
        told("metropolis", "a rate", 9),
        told("conditional", "k", 1),
        told("metropolis on integers", "n", 1),
    ];
    assert_eq!(outline(&sampler), expected);
    assert_eq!(sampler.reasons.len(), 3);
    assert!(!sampler.reversible());
    // 5.5 x 3 of the sweep, 9 of the walk, 39 other values of k, 1 of n.
    assert_eq!(sampler.evaluations(), 65.5);
    sampler.kernel(3);
}

#[test]
fn one_method_and_the_rest_chosen() {
    let sampler = sound("[sampler]\nmethod = \"slice\"\nwidth = 2");
    let expected = [
        told("slice", "a rate", 1),
        told("conditional", "k", 1),
        told("metropolis", "n", 1),
    ];
    assert_eq!(outline(&sampler), expected);
    assert_eq!(sampler.reasons.len(), 2);
    let settings = Settings::Slice {
        width: 2.0,
        limit: 1000,
    };
    assert_eq!(sampler.steps[0].moves[0].settings, settings);

    let sampler = sound("[sampler]\nmethod = \"metropolis\"\nadapt = \"scale\"\ntimes = 4");
    assert_eq!(outline(&sampler), [told("metropolis", "a rate k n", 4)]);
    let [real, integer] = sampler.steps[0].moves.as_slice() else {
        panic!("a move for each kind");
    };
    assert_eq!(
        (&real.coordinates[..], &integer.coordinates[..]),
        (&[0, 1, 2][..], &[3, 4][..])
    );
    let scale = 2.38 / 3.0_f64.sqrt();
    let adapt = Adapt::Scale;
    assert_eq!(real.settings, Settings::RandomWalk { scale, adapt });
    assert_eq!(
        integer.settings,
        Settings::IntegerWalk {
            scale: 1.0,
            adapt: true
        }
    );
}

const STEPS: &str = r#"
[[sampler.step]]
name = "levels"
method = "metropolis"
on = ["rate", "a"]
scale = 0.5
[[sampler.step]]
name = "counts"
method = "metropolis"
on = ["k", "n"]
adapt = "none"
"#;

#[test]
fn a_cycle_and_a_mixture() {
    let cycle = sound(STEPS);
    assert_eq!(
        outline(&cycle),
        [told("levels", "a rate", 1), told("counts", "k n", 1)]
    );
    let Json::Object(members) = cycle.canonical() else {
        panic!("an object");
    };
    assert_eq!(members["combine"], Json::text("cycle"));
    assert!(!cycle.reversible());

    let mixture = STEPS.replace("name =", "weight = 2\nname =");
    let mixture = sound(&mixture);
    assert_eq!(mixture.steps[1].weight, Some(2.0));
    // Half of one evaluation, half of two.
    assert_eq!(mixture.evaluations(), 1.5);
    let Json::Object(members) = mixture.canonical() else {
        panic!("an object");
    };
    assert_eq!(members["combine"], Json::text("mixture"));
}

#[test]
fn every_setting_is_said() {
    let sampler = sound("[sampler]\nmethod = \"slice\"");
    let text = format!("{:?}", sampler.canonical());
    for word in ["width", "limit", "times", "rate[2]", "scale", "adapt"] {
        assert!(text.contains(word), "{word} is not in {text}");
    }
    assert_eq!(
        sampler.canonical(),
        sound("[sampler]\nmethod = \"slice\"\nwidth = 1").canonical()
    );
    assert_ne!(
        sampler.canonical(),
        sound("[sampler]\nmethod = \"slice\"\nwidth = 3").canonical()
    );
}

#[test]
fn faults_of_a_single_method() {
    assert_eq!(
        faults("[sampler]\nscale = 1"),
        [
            "[sampler] needs `method` | [sampler] | add `method`: one of those in `odograph catalogue`",
        ]
    );
    assert_eq!(
        faults("[sampler]\nmethod = \"slise\"\nwidth = 1\nstepp = 2"),
        [
            "`sampler.method` cannot be `slise` | \"slise\" | did you mean `slice`? It can be \
             `conditional`, `metropolis` or `slice`",
            "`stepp` is not a key of [sampler] | stepp | did you mean `step`?",
        ]
    );
    let told =
        faults("[sampler]\nmethod = \"metropolis\"\nwidth = 1\nscale = -1\nadapt = \"shape\"");
    assert_eq!(told.len(), 3, "{told:?}");
    assert_eq!(
        told[0],
        "`width` is not an option of `metropolis` | width | -"
    );
    assert_eq!(
        faults("[sampler]\nmethod = \"conditional\""),
        [
            "`n` has no finite range | method | use `metropolis`, or bound the unknown's law with `truncated`"
        ]
    );
    assert_eq!(faults("[sampler]\nmethod = \"slice\"\ntimes = 0").len(), 1);
}

#[test]
fn faults_of_steps_all_at_once() {
    let told = faults(
        r#"
[sampler]
method = "slice"
[[sampler.step]]
name = "one"
method = "slice"
on = ["a", "k", "rat", "a"]
weight = 1
[[sampler.step]]
name = "one"
method = "conditional"
on = ["rate"]
"#,
    );
    let expected = [
        "`method` and [[sampler.step]] exclude each other | method | write the method into each step",
        "`rat` is not an unknown | \"rat\" | did you mean `rate`?",
        "`a` is named twice | \"a\" | -",
        "two steps are called `one` | \"one\" | -",
        "`conditional` cannot move `rate` | \"rate\" | use `metropolis` or `slice`",
    ];
    assert_eq!(told, expected);
    let told =
        faults("[[sampler.step]]\nname = \"one\"\nmethod = \"slice\"\non = [\"a\", \"rate\"]");
    assert_eq!(
        told,
        ["no step moves `k`, `n` | step | add it to the `on` of a step"]
    );
    let told = faults(&STEPS.replacen("name =", "weight = 2\nname =", 1));
    assert_eq!(told.len(), 1);
    assert!(
        told[0].starts_with("step `counts` has no weight"),
        "{told:?}"
    );
}

#[test]
fn what_is_reversible() {
    let one = |text: &str| sound(text).reversible();
    // All unknowns by one method: reals together, then each integer.
    assert!(!one("[sampler]\nmethod = \"metropolis\""));
    let step = |name: &str, on: &str, method: &str, weight: &str| {
        format!(
            "[[sampler.step]]\nname = \"{name}\"\non = [{on}]\nmethod = \"{method}\"\n{weight}\n"
        )
    };
    let parts = |weight: &str| {
        step("reals", "\"a\", \"rate\"", "metropolis", weight)
            + &step("k", "\"k\"", "conditional", weight)
            + &step("n", "\"n\"", "metropolis", weight)
    };
    assert!(!one(&parts("")));
    assert!(one(&parts("weight = 1")));
    let conditions = sound(&parts("weight = 1")).conditions();
    let names: Vec<&str> = conditions.iter().map(|c| c.name).collect();
    assert_eq!(names, ["invariant", "recurrent", "aperiodic", "reversible"]);
    assert!(conditions[0].evidence.contains("Geman & Geman 1984"));
}

#[test]
fn a_covariance_too_large_to_learn_is_a_fault() {
    let coordinates: Vec<Coordinate> = (0..1001)
        .map(|i| Coordinate {
            name: format!("a[{}]", i + 1),
            unknown: 0,
            kind: REAL,
        })
        .collect();
    let read_with = |adapt: &str| {
        let source = Arc::new(Source {
            name: "study.toml".into(),
            text: format!("[sampler]\nmethod = \"metropolis\"\n{adapt}"),
        });
        let mut faults = Faults::default();
        let file = parse(&source, &mut faults);
        let section = file.section("sampler", &mut faults);
        let sampler = read(section.as_ref(), &coordinates, &["a".into()], &mut faults);
        (sampler.is_some(), faults.0.len())
    };
    assert_eq!(read_with(""), (false, 1));
    assert_eq!(read_with("adapt = \"scale\"\n"), (true, 0));
}
