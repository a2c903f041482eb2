//! Walks every field of a plan: a change of it moves exactly the digests that the table says.

use crate::canon::Json;
use crate::course::{ChainSeed, Condition, Course, Model, Quantity, StartFault};
use crate::plan::*;
use std::sync::Arc;

struct Fake {
    canonical: Json,
}

impl Model for Fake {
    fn canonical(&self) -> Json {
        self.canonical.clone()
    }
    fn quantities(&self) -> &[Quantity] {
        &[]
    }
    fn cost(&self) -> f64 {
        1.0
    }
    fn state_size(&self) -> usize {
        1
    }
    fn course(self: Arc<Self>, _: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault> {
        Err(StartFault("never run".into()))
    }
    fn conditions(&self) -> Vec<Condition> {
        Vec::new()
    }
    fn reasons(&self) -> Vec<String> {
        vec!["no reason".into()]
    }
}

fn model(part: &str, value: u64) -> Arc<dyn Model> {
    let part_of = |name: &str| Json::Count(if name == part { value } else { 1 });
    let canonical = Json::object(["model", "sampler", "start"].map(|name| (name, part_of(name))));
    Arc::new(Fake { canonical })
}

fn point(value: f64) -> Point {
    Point {
        values: vec![("model.constant.c".into(), Json::real(value))],
        data: vec![Data {
            name: "t".into(),
            sha256: "00".into(),
            read: Json::Null,
            units: vec![("x".into(), "m".into())],
            rows: 3,
            missing: 0,
            dropped: 0,
        }],
        model: model("model", 1),
        ensemble: Ensemble {
            chains: 2,
            burn_in: BurnIn::Fixed(10),
            draws: 100,
            every: 1,
        },
        goal: Some(Goal {
            error: Some(0.1),
            r_hat: 1.01,
            effective: 100.0,
            at_most: 1000,
        }),
        estimands: vec![Estimand {
            name: "a".into(),
            of: "a".into(),
            unit: None,
            give: vec![Give::Value],
            goal: None,
        }],
        predict: vec![Prediction {
            name: "next".into(),
            law: "poisson(mean = a)".into(),
            per: Json::Null,
            unit: None,
        }],
        block: 50,
    }
}

pub(crate) fn plan() -> Plan {
    Plan {
        title: "T".into(),
        question: "Q".into(),
        root: "7".into(),
        axes: vec![SweepAxis {
            path: "model.constant.c".into(),
            values: vec![Json::real(1.0), Json::real(2.0)],
        }],
        combine: Combine::Grid,
        streams: Streams::Own,
        shared: None,
        points: vec![point(1.0), point(2.0)],
        keep: Keep::Draws,
        accepted: Accepted::default(),
        inputs: Vec::new(),
        numerics: NUMERICS,
        closed: None,
    }
}

fn shared_plan() -> Plan {
    Plan {
        streams: Streams::Shared,
        shared: Some(Json::text("the study without the swept values")),
        ..plan()
    }
}

/// Which of stream key (of the first chain of the first point), chain key and plan digest moved.
fn moved(before: &Plan, after: &Plan) -> [bool; 3] {
    [
        before.stream_key(0, 0) != after.stream_key(0, 0),
        before.chain_key(0, 0) != after.chain_key(0, 0),
        before.digest() != after.digest(),
    ]
}

const ALL: [bool; 3] = [true, true, true];
const CHAIN: [bool; 3] = [false, true, true];
const PLAN: [bool; 3] = [false, false, true];
const NONE: [bool; 3] = [false, false, false];

type Change = fn(&mut Plan);

/// Every field of the plan, with what its change moves under own and under shared streams.
const FIELDS: &[(&str, Change, [bool; 3], [bool; 3])] = &[
    ("title", |p| p.title = "U".into(), PLAN, PLAN),
    ("question", |p| p.question = "R".into(), PLAN, PLAN),
    ("root", |p| p.root = "8".into(), ALL, ALL),
    ("keep", |p| p.keep = Keep::Summary, PLAN, PLAN),
    (
        "accepted",
        |p| p.accepted.conditions.push("finite mass".into()),
        PLAN,
        PLAN,
    ),
    (
        "closed",
        |p| p.closed = Some(vec![None, Some((10, 50))]),
        PLAN,
        PLAN,
    ),
    ("numerics of draws", |p| p.numerics.draws += 1, CHAIN, CHAIN),
    (
        "numerics of estimates",
        |p| p.numerics.estimates += 1,
        PLAN,
        PLAN,
    ),
    ("because", |p| p.accepted.because = "so".into(), PLAN, PLAN),
    (
        "value",
        |p| p.points[0].values[0].1 = Json::real(3.0),
        ALL,
        CHAIN,
    ),
    // Under shared streams the streams follow `shared`, what the points have in common.
    (
        "model",
        |p| p.points[0].model = model("model", 2),
        ALL,
        CHAIN,
    ),
    (
        "sampler",
        |p| p.points[0].model = model("sampler", 2),
        ALL,
        CHAIN,
    ),
    (
        "start",
        |p| p.points[0].model = model("start", 2),
        ALL,
        CHAIN,
    ),
    (
        "shared",
        |p| p.shared = p.shared.as_ref().map(|_| Json::text("other")),
        NONE,
        ALL,
    ),
    (
        "data sha256",
        |p| p.points[0].data[0].sha256 = "01".into(),
        ALL,
        CHAIN,
    ),
    (
        "data read",
        |p| p.points[0].data[0].read = Json::Bool(true),
        ALL,
        CHAIN,
    ),
    (
        "data name",
        |p| p.points[0].data[0].name = "u".into(),
        ALL,
        CHAIN,
    ),
    (
        "units",
        |p| p.points[0].data[0].units[0].1 = "km".into(),
        PLAN,
        PLAN,
    ),
    (
        "burn-in",
        |p| p.points[0].ensemble.burn_in = BurnIn::Fixed(11),
        ALL,
        CHAIN,
    ),
    ("every", |p| p.points[0].ensemble.every = 2, ALL, CHAIN),
    ("chains", |p| p.points[0].ensemble.chains = 3, PLAN, PLAN),
    ("draws", |p| p.points[0].ensemble.draws = 101, PLAN, PLAN),
    ("no goal", |p| p.points[0].goal = None, PLAN, PLAN),
    ("goal error", |p| goal(p).error = None, PLAN, PLAN),
    ("goal r_hat", |p| goal(p).r_hat = 1.02, PLAN, PLAN),
    ("goal effective", |p| goal(p).effective = 101.0, PLAN, PLAN),
    ("goal at_most", |p| goal(p).at_most = 1001, PLAN, PLAN),
    (
        "estimand name",
        |p| p.points[0].estimands[0].name = "b".into(),
        PLAN,
        PLAN,
    ),
    (
        "estimand of",
        |p| p.points[0].estimands[0].of = "b".into(),
        PLAN,
        PLAN,
    ),
    (
        "estimand unit",
        |p| p.points[0].estimands[0].unit = Some("m".into()),
        PLAN,
        PLAN,
    ),
    (
        "give",
        |p| p.points[0].estimands[0].give.push(Give::Quantile(0.5)),
        PLAN,
        PLAN,
    ),
    (
        "interval",
        |p| p.points[0].estimands[0].give.push(Give::Interval(0.5)),
        PLAN,
        PLAN,
    ),
    (
        "estimand goal",
        |p| p.points[0].estimands[0].goal = Some(EstimandGoal::Digits(2)),
        PLAN,
        PLAN,
    ),
    (
        "predict",
        |p| p.points[0].predict[0].law = "a".into(),
        PLAN,
        PLAN,
    ),
    (
        "predict per",
        |p| p.points[0].predict[0].per = Json::Count(2),
        PLAN,
        PLAN,
    ),
    (
        "predict unit",
        |p| p.points[0].predict[0].unit = Some("m".into()),
        PLAN,
        PLAN,
    ),
    ("block", |p| p.points[0].block = 51, PLAN, PLAN),
    // These follow from others.
    ("rows", |p| p.points[0].data[0].rows = 4, NONE, NONE),
    ("missing", |p| p.points[0].data[0].missing = 1, NONE, NONE),
    ("dropped", |p| p.points[0].data[0].dropped = 1, NONE, NONE),
    ("axes", |p| p.axes.clear(), NONE, NONE),
    ("combine", |p| p.combine = Combine::Pair, NONE, NONE),
];

fn goal(plan: &mut Plan) -> &mut Goal {
    plan.points[0].goal.as_mut().expect("a goal")
}

#[test]
fn each_field_moves_what_the_table_says() {
    for (name, change, own, shared) in FIELDS {
        for (base, want) in [(plan(), own), (shared_plan(), shared)] {
            let mut changed = base.clone();
            change(&mut changed);
            assert_eq!(moved(&base, &changed), *want, "{name}, {:?}", base.streams);
        }
    }
}

/// With a burn-in that ends when the chains agree, the draws after it depend on all of them.
#[test]
fn a_chosen_burn_in_ties_the_chains_together() {
    let mut base = plan();
    base.points[0].ensemble.burn_in = BurnIn::Chosen {
        from: 10,
        at_most: 100,
    };
    let with = |change: Change| {
        let mut changed = base.clone();
        change(&mut changed);
        moved(&base, &changed)
    };
    assert_eq!(with(|p| p.points[0].ensemble.chains = 3), CHAIN);
    assert_eq!(with(|p| p.points[0].estimands[0].of = "b".into()), CHAIN);
    assert_eq!(with(|p| p.points[0].predict[0].law = "a".into()), CHAIN);
    assert_eq!(
        with(|p| p.points[0].predict[0].unit = Some("m".into())),
        PLAN
    );
    assert_eq!(
        with(|p| p.points[0].estimands[0].unit = Some("m".into())),
        PLAN
    );
    assert_eq!(with(|p| p.points[0].ensemble.draws = 101), PLAN);
    let longer: Change = |p| {
        p.points[0].ensemble.burn_in = BurnIn::Chosen {
            from: 10,
            at_most: 101,
        };
    };
    assert_eq!(with(longer), ALL);
}

#[test]
fn chains_and_points_have_keys_of_their_own() {
    let (own, shared) = (plan(), shared_plan());
    assert_ne!(own.stream_key(0, 0), own.stream_key(0, 1));
    assert_ne!(own.stream_key(0, 0), own.stream_key(1, 0));
    assert_eq!(shared.stream_key(0, 0), shared.stream_key(1, 0));
    assert_ne!(shared.stream_key(0, 0), shared.stream_key(0, 1));
    for plan in [own, shared] {
        assert_ne!(plan.chain_key(0, 0), plan.chain_key(0, 1));
        assert_ne!(plan.chain_key(0, 0), plan.chain_key(1, 0));
        assert_ne!(plan.point_key(0), plan.point_key(1));
        assert_ne!(plan.chain_key(0, 0), plan.stream_key(0, 0));
    }
}

/// The order of the axes in the file shows in the order of the points and nowhere else.
#[test]
fn the_order_of_axes_moves_no_draw() {
    let with = |paths: [&str; 2]| {
        let mut plan = plan();
        plan.points[0].values = paths.map(|p| (p.to_string(), Json::real(1.0))).to_vec();
        plan
    };
    let (one, other) = (with(["model.a", "model.b"]), with(["model.b", "model.a"]));
    assert_eq!(moved(&one, &other), NONE);
    assert_eq!(one.point_key(0), other.point_key(0));
}

/// A longer sweep keeps the digits of the points it shares with a shorter one.
#[test]
fn a_point_does_not_know_the_others() {
    let (long, mut short) = (plan(), plan());
    short.points.remove(0);
    short.axes[0].values.remove(0);
    assert_eq!(long.chain_key(1, 0), short.chain_key(0, 0));
    assert_eq!(long.point_key(1), short.point_key(0));
}

#[test]
fn plan_json_holds_the_base_once() {
    let mut plan = plan();
    plan.points[1].ensemble.draws = 200;
    let Json::Object(members) = plan.json() else {
        panic!("an object");
    };
    let Json::Object(base) = &members["base"] else {
        panic!("an object");
    };
    let base: Vec<&str> = base.keys().map(String::as_str).collect();
    assert_eq!(
        base,
        [
            "block",
            "data",
            "estimands",
            "goal",
            "model",
            "predict",
            "reasons",
            "rows"
        ]
    );
    let Json::Array(points) = &members["points"] else {
        panic!("an array");
    };
    for point in points {
        let Json::Object(point) = point else {
            panic!("an object");
        };
        let point: Vec<&str> = point.keys().map(String::as_str).collect();
        assert_eq!(point, ["ensemble", "key", "values"]);
    }
}
