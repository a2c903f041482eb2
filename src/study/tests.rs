//! Studies resolved with a family of the tests' own, whole and broken.

use super::resolve_text;
use crate::canon::{Json, hex};
use crate::course::{
    ChainSeed, Condition, Course, Family, Model, Quantity, Request, StartFault, StartSpec,
};
use crate::place::{Fault, Faults, Look, Source, show};
use crate::plan::{BurnIn, EstimandGoal, Give, Plan};
use crate::reading::Files;
use std::sync::Arc;

/// Records its estimands; refuses a negative constant.
struct Plain;

struct Resolved {
    canonical: Json,
    quantities: Vec<Quantity>,
}

impl Family for Plain {
    fn name(&self) -> &'static str {
        "plain"
    }
    fn about(&self) -> &'static str {
        "for tests"
    }
    fn resolve(&self, request: &Request, faults: &mut Faults) -> Option<Arc<dyn Model>> {
        let mut numbers = Vec::new();
        if let Some(constant) = request.model.section("constant", faults) {
            for (name, value) in constant.entries() {
                let number = value.number(faults)?;
                if number < 0.0 {
                    // Where the law stands, not where the number does.
                    let law = request.model.value("law")?;
                    faults.push(Fault::at(law.place, "the rate is negative").label("here"));
                }
                numbers.push((name.text, Json::real(number)));
            }
        }
        let law = request.model.text("law", faults);
        request.model.finish(faults);
        let method = request.sampler.and_then(|sampler| {
            let method = sampler.word("method", &["metropolis", "slice"], faults);
            sampler.finish(faults);
            method
        });
        let start = match request.start {
            StartSpec::Spread => Json::text("spread"),
            StartSpec::Prior => Json::text("prior"),
            StartSpec::At(section) => Json::text(section.path()),
            StartSpec::File { table, .. } => Json::text(&*table.sha256),
        };
        let quantity = |(estimand, name): (usize, &str)| Quantity {
            name: name.to_string(),
            unit: None,
            condition: false,
            estimand,
        };
        let names: Vec<&str> = match request.estimands {
            [] => vec!["a", "b"],
            some => some.iter().map(|e| e.name.text.as_str()).collect(),
        };
        let data = request.tables.iter();
        Some(Arc::new(Resolved {
            canonical: Json::object([
                ("constant", Json::object(numbers)),
                ("law", law.map_or(Json::Null, |law| Json::text(law.text))),
                ("method", Json::text(method.unwrap_or("slice"))),
                ("start", start),
                (
                    "rows",
                    Json::array(data.map(|(_, t)| Json::Count(t.rows as u64))),
                ),
            ]),
            quantities: names.into_iter().enumerate().map(quantity).collect(),
        }))
    }
}

impl Model for Resolved {
    fn canonical(&self) -> Json {
        self.canonical.clone()
    }
    fn quantities(&self) -> &[Quantity] {
        &self.quantities
    }
    fn cost(&self) -> f64 {
        1e5
    }
    fn state_size(&self) -> usize {
        100
    }
    fn course(self: Arc<Self>, _: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault> {
        Err(StartFault("never run".into()))
    }
    fn conditions(&self) -> Vec<Condition> {
        Vec::new()
    }
    fn reasons(&self) -> Vec<String> {
        Vec::new()
    }
}

fn resolved(text: &str) -> Result<Plan, Vec<Fault>> {
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: text.into(),
    });
    resolve_text(source, &Files::Folder("manifests".into()), &[&Plain])
}

fn plan(text: &str) -> Plan {
    resolved(text).unwrap_or_else(|faults| panic!("{}", show(&faults, Look::PLAIN)))
}

fn shown(text: &str) -> String {
    let faults = resolved(text).expect_err("a faulty study");
    show(&faults, Look::PLAIN)
}

const HEAD: &str = "title = \"T\"\nseeds.root = 7\n";
const SHORT: &str = "title = \"T\"\nseeds.root = 7\nmodel.family = \"plain\"\n";

/// What each fault says, and where.
fn told(text: &str) -> Vec<(String, (usize, usize))> {
    let faults = resolved(text).expect_err("a faulty study");
    let told = |fault: Fault| {
        let place = fault.place.map(|place| place.line_column());
        (fault.what, place.unwrap_or_default())
    };
    faults.into_iter().map(told).collect()
}

#[test]
fn defaults_are_said() {
    let plan = plan(SHORT);
    assert_eq!((plan.title.as_str(), plan.question.as_str()), ("T", ""));
    assert_eq!(plan.root, "7");
    let point = &plan.points[0];
    assert_eq!((point.ensemble.chains, point.ensemble.draws), (8, 2000));
    assert_eq!(point.ensemble.every, 1);
    let chosen = BurnIn::Chosen {
        from: 1000,
        at_most: 20_000,
    };
    assert_eq!(point.ensemble.burn_in, chosen);
    assert_eq!(point.goal, None);
    let names: Vec<&str> = point.estimands.iter().map(|e| e.name.as_str()).collect();
    assert_eq!(names, ["a", "b"], "every unknown that the family records");
    assert_eq!(point.estimands[0].give.len(), 4);
    assert_eq!(point.block, 200);
    assert!(point.values.is_empty());
}

#[test]
fn every_section_is_read() {
    let plan = plan(
        "title = \"T\"\nquestion = \"Q\"\nkeep = \"summary\"\nseeds.root = \"x\"\n\
         model = { family = \"plain\", law = \"f\" }\n\
         [data.stations]\nfile = \"data/ostrey-stations.csv\"\nnames = \"station\"\nunit.hours = \"h\"\n\
         [predict]\nnext = \"poisson( mean=a )\"\n\
         [[estimand]]\nname = \"a\"\nof = \"1+a*2\"\nunit = \"m\"\ngive = [\"value\", { quantile = 0.9 }, \"interval\"]\n\
         goal = { digits = 2 }\n\
         [ensemble]\nchains = 4\nburn_in = 0\ndraws = 1e3\nevery = 5\nstart = \"prior\"\n\
         [goal]\nerror = 0.1\n\
         [grounds]\naccept = [\"irreducible\", \"finite mass\"]\nbecause = \"so\"\n",
    );
    let point = &plan.points[0];
    assert_eq!(plan.accepted.conditions, ["finite mass", "irreducible"]);
    assert_eq!(point.data[0].rows, 14);
    assert_eq!(point.data[0].units, [("hours".into(), "h".into())]);
    assert_eq!(point.ensemble.burn_in, BurnIn::Fixed(0));
    assert_eq!(point.ensemble.draws, 1000);
    let estimand = &point.estimands[0];
    assert_eq!(estimand.of, "1 + a * 2");
    assert_eq!(
        estimand.give,
        [Give::Value, Give::Quantile(0.9), Give::Interval(0.95)]
    );
    assert_eq!(estimand.goal, Some(EstimandGoal::Digits(2)));
    let goal = point.goal.as_ref().expect("a goal");
    assert_eq!(
        (goal.error, goal.r_hat, goal.effective),
        (Some(0.1), 1.01, 400.0)
    );
    assert_eq!(goal.at_most, 100_000);
    let next = &point.predict[0];
    assert_eq!((&*next.name, &*next.law), ("next", "poisson(mean = a)"));
    assert_eq!(plan.inputs.len(), 1);
}

#[test]
fn the_goal_of_an_estimand_implies_one_for_the_point() {
    let plan = plan(&format!(
        "{SHORT}[[estimand]]\nname = \"a\"\ngoal = {{ absolute = 0.1 }}\n"
    ));
    let goal = plan.points[0].goal.as_ref().expect("a goal");
    assert_eq!((goal.error, goal.r_hat), (None, 1.01));
}

/// The order of tables and keys, comments, the writing of numbers and formulas, line ends, 7 and "7": none
/// of them moves the plan.
#[test]
fn the_writing_of_a_study_does_not_move_its_digest() {
    let one = "title = \"T\"\nseeds.root = 7\n[model]\nfamily = \"plain\"\nconstant.c = 1\nconstant.d = 0.5\n\
               [[estimand]]\nname = \"a\"\nof = \"1+a\"\n[goal]\nerror = 0.1\n";
    let other = "\u{feff}# a comment\n[goal]\nerror = 1e-1\n[[estimand]]\nof = '(1 +  a)'\nname = 'a'\n[model.constant]\nd = 5e-1\nc = 1.0\n\
                 [model]\nfamily = \"plain\"\n[seeds]\nroot = \"7\"\n[ensemble]\nchains = 8.0\n";
    let other = other.replace("\n[goal]", "\ntitle = \"T\"\n[goal]");
    for text in [other.clone(), other.replace('\n', "\r\n")] {
        let text = text.trim_start_matches('\u{feff}');
        assert_eq!(plan(one).json(), plan(text).json());
    }
    let moved = plan(&one.replace("constant.d = 0.5", "constant.d = 0.25"));
    assert_ne!(plan(one).digest(), moved.digest());
}

#[test]
fn faults_of_the_top_level_come_in_one_go() {
    assert_eq!(
        told(
            "titel = \"T\"\nquestion = 1\nseeds.root = 7.5\nkeep = \"all\"\n[model]\nfamily = \"plan\"\n[sweep]\n"
        ),
        [
            ("`titel` is not a key of the study".into(), (1, 1)),
            (
                "`question` must be text in quotes, not a number".into(),
                (2, 12)
            ),
            (
                "`seeds.root` must be text or a whole number, not 7.5".into(),
                (3, 14)
            ),
            ("`keep` cannot be `all`".into(), (4, 8)),
            ("`model.family` cannot be `plan`".into(), (6, 10)),
            ("[sweep] needs `axis`".into(), (7, 1)),
        ]
    );
}

#[test]
fn faults_of_syntax_are_told_without_faults_that_follow_from_them() {
    assert_eq!(
        told("title = \nseeds.root = 7\n[model\nfamily = plain\n"),
        [
            ("a value is missing".into(), (1, 9)),
            (
                "this is not TOML: unclosed table, expected `]`".into(),
                (3, 7)
            ),
        ]
    );
    assert_eq!(
        told(&format!("{SHORT}[seeds]\nroot = 7\n"))[0],
        ("`seeds` stands here a second time".into(), (4, 2))
    );
}

#[test]
fn a_start_file_needs_a_row_for_each_chain() {
    let start = "start = { file = \"data/ostrey-stations.csv\" }";
    plan(&format!("{SHORT}[ensemble]\nchains = 14\n{start}\n"));
    assert_eq!(
        told(&format!("{SHORT}[ensemble]\nchains = 15\n{start}\n"))[0].0,
        "manifests/data/ostrey-stations.csv starts 14 chains, and there are 15"
    );
}

fn swept(axes: &str) -> String {
    format!(
        "{HEAD}[model]\nfamily = \"plain\"\nlaw = \"c + d\"\nconstant = {{ c = 1, d = 2 }}\n{axes}"
    )
}

fn values(plan: &Plan) -> Vec<String> {
    let of = |point: &crate::plan::Point| {
        let values: Vec<String> = point.values.iter().map(|(_, v)| v.canonical()).collect();
        values.join(" ")
    };
    plan.points.iter().map(of).collect()
}

#[test]
fn a_grid_takes_every_value_with_every_other() {
    let plan = plan(&swept(
        "[sweep.axis]\n\"model.constant.c\" = [1, 2.5]\n\"ensemble.draws\" = { from = 1000, to = 3000, count = 3 }\n",
    ));
    let all = [
        "1 1000", "1 2000", "1 3000", "2.5 1000", "2.5 2000", "2.5 3000",
    ];
    assert_eq!(values(&plan), all);
    assert_eq!(plan.points[4].ensemble.draws, 2000);
    let canonical = plan.points[4].model.canonical().canonical();
    assert!(canonical.contains("{\"c\":2.5,\"d\":2}"), "{canonical}");
}

#[test]
fn pairs_go_side_by_side_and_ranges_end_exactly() {
    let plan = plan(&swept(
        "[sweep]\ncombine = \"pair\"\n[sweep.axis]\n\"model.constant.c\" = { from = 0.1, to = 0.7, count = 4 }\n\
         \"model.constant.d\" = { from = 1, to = 1000, count = 4, scale = \"log\" }\n",
    ));
    let ends = [&values(&plan)[0], &values(&plan)[3]];
    assert_eq!(ends, ["0.1 1", "0.7 1000"]);
    let Json::Real(ten) = plan.points[1].values[1].1 else {
        panic!("a number");
    };
    assert!((ten - 10.0).abs() < 1e-12);
}

#[test]
fn entries_of_an_array_of_tables_go_by_name() {
    let estimands = "[[estimand]]\nname = \"a\"\n[[estimand]]\nname = \"b\"\nunit = \"m\"\n";
    let text = swept(&format!(
        "{estimands}[sweep.axis]\n\"estimand.b.unit\" = [\"m\", \"km\"]\n\"sampler.method\" = [\"slice\", \"metropolis\"]\n"
    ));
    let plan = plan(&text);
    let units: Vec<_> = plan
        .points
        .iter()
        .map(|p| p.estimands[1].unit.clone())
        .collect();
    assert_eq!(units, ["m", "m", "km", "km"].map(|unit| Some(unit.into())));
    assert!(
        plan.points[1]
            .model
            .canonical()
            .canonical()
            .contains("metropolis")
    );
    let lost = told(&text.replace("estimand.b", "estimand.c"));
    assert_eq!(lost[0].0, "`estimand` has no `c` to be swept");
}

#[test]
fn shared_streams_share_keys_across_points() {
    let axes = "[sweep]\nstreams = \"shared\"\n[sweep.axis]\n\"model.constant.c\" = [1, 2]\n";
    let shared = plan(&swept(axes));
    let own = plan(&swept(&axes.replace("shared", "own")));
    assert_eq!(shared.stream_key(0, 0), shared.stream_key(1, 0));
    assert_ne!(own.stream_key(0, 0), own.stream_key(1, 0));
    assert_ne!(shared.chain_key(0, 0), shared.chain_key(1, 0));
    // Other values of the same sweep are driven by the same streams; another model is not.
    let more = plan(&swept(&axes.replace("[1, 2]", "[3, 1]")));
    assert_eq!(shared.stream_key(0, 0), more.stream_key(0, 0));
    assert_eq!(shared.chain_key(0, 0), more.chain_key(1, 0));
    let formula = plan(&swept(axes).replace("c + d", "c+d"));
    assert_eq!(shared.stream_key(0, 0), formula.stream_key(0, 0));
    let other = plan(&swept(axes).replace("c + d", "c - d"));
    assert_ne!(shared.stream_key(0, 0), other.stream_key(0, 0));
    let base = plan(&swept(axes).replace("c = 1", "c = 9"));
    assert_eq!(shared.stream_key(0, 0), base.stream_key(0, 0), "c is swept");
}

#[test]
fn a_point_of_a_sweep_has_the_keys_of_a_point_of_a_longer_one() {
    let axes = "[sweep.axis]\n\"model.constant.c\" = [1, 2]\n";
    let short = plan(&swept(axes));
    let long = plan(&swept(&axes.replace("[1, 2]", "[5, 2, 1]")));
    assert_eq!(short.chain_key(1, 3), long.chain_key(1, 3));
    assert_eq!(hex(&short.point_key(0)), hex(&long.point_key(2)));
    assert_ne!(short.digest(), long.digest());
}

#[test]
fn faults_of_a_point_show_the_axis_and_the_key() {
    let text = swept("[sweep.axis]\n\"model.constant.c\" = [1, -1]\n");
    assert_eq!(
        shown(&text),
        "error: the rate is negative\n --> study.toml:5:7\n  |\n5 | law = \"c + d\"\n  |       ^^^^^^^ here\n...\n8 | \"model.constant.c\" = [1, -1]\n  |                          -- where `model.constant.c` is -1\n\n"
    );
    let text = swept("[sweep.axis]\n\"model.constant.c\" = [1, \"x\"]\n");
    assert_eq!(
        shown(&text),
        "error: `model.constant.c` must be a number, not text\n --> study.toml:8:26\n  |\n6 | constant = { c = 1, d = 2 }\n  |              - `model.constant.c` is swept\n7 | [sweep.axis]\n8 | \"model.constant.c\" = [1, \"x\"]\n  |                          ^^^ this is text\n\n"
    );
    // A fault of the study itself is shown once, and not laid at the door of the sweep.
    let text = swept("goal.error = -1\n[sweep.axis]\n\"model.constant.c\" = [1, 2, 3]\n");
    let text = text
        .replace("goal.error = -1\n", "")
        .replace("[model]", "[goal]\nerror = -1\n[model]");
    let faults = resolved(&text).expect_err("a faulty study");
    assert_eq!(faults.len(), 1);
    assert!(faults[0].related.is_empty());
}

#[test]
fn faults_of_a_sweep() {
    let one = |axes: &str| {
        let mut told = told(&swept(axes));
        assert_eq!(told.len(), 1, "{told:?}");
        told.remove(0).0
    };
    let axis = |line: &str| one(&format!("[sweep.axis]\n{line}\n"));
    assert_eq!(axis("\"title\" = [1]"), "`title` cannot be swept");
    assert_eq!(
        axis("\"model\" = [1]"),
        "`model` is a whole section and cannot be swept"
    );
    assert_eq!(
        axis("\"model.constant.e\" = [1]"),
        "`model.constant` has no `e` to be swept"
    );
    assert_eq!(
        axis("\"predict.x\" = [1]"),
        "the study has no [predict] to sweep in"
    );
    assert_eq!(
        axis("\"model.law.x\" = [1]"),
        "`model.law.x` leads into `model.law`, which is not a table"
    );
    assert_eq!(
        axis("\"model..c\" = [1]"),
        "`model..c` is not a dotted path"
    );
    assert_eq!(
        axis("\"model.constant.c\" = []"),
        "the axis `model.constant.c` has no values"
    );
    assert_eq!(
        axis("model.constant.c = [1]"),
        "the axis `model` has no values"
    );
    assert_eq!(
        axis("\"sampler.methd\" = [\"slice\"]"),
        "`methd` is not a key of [sampler]"
    );
    assert_eq!(
        axis("\"model.constant.c\" = [1, 1.0]"),
        "`model.constant.c` takes the value 1 twice"
    );
    assert_eq!(
        axis("\"model.constant\" = [{ c = 1 }]\n\"model.constant.c\" = [1]"),
        "`model.constant` and `model.constant.c` sweep the same value"
    );
    assert_eq!(
        axis(
            "\"model.constant.c\" = { from = 1, to = 2, count = 1e4 }\n\"model.constant.d\" = [1, 2]"
        ),
        "the sweep has 20000 points, and at most 10000 can be run"
    );
    assert_eq!(
        axis("\"model.constant.c\" = { from = 0, to = 2, count = 3, scale = \"log\" }"),
        "`sweep.axis.\"model.constant.c\"` must run between positive numbers on a log scale"
    );
    assert_eq!(
        one(
            "[sweep]\ncombine = \"pair\"\n[sweep.axis]\n\"model.constant.c\" = [1, 2, 1]\n\"model.constant.d\" = [1, 2, 1]\n"
        ),
        "points 1 and 3 of the sweep are the same"
    );
    assert_eq!(
        axis("\"ensemble.chains\" = { from = 1, to = 4, count = 3 }"),
        "`ensemble.chains` must be a whole number, not 2.5"
    );
}

/// A sweep over data reads each file, and its digest is in the keys.
#[test]
fn data_files_can_be_swept() {
    let plan = plan(&swept(
        "[data.t]\nfile = \"data/ostrey-slips.csv\"\n[sweep.axis]\n\"data.t.file\" = [\"data/ostrey-slips.csv\", \"data/ostrey-stations.csv\"]\n",
    ));
    assert_ne!(plan.points[0].data[0].sha256, plan.points[1].data[0].sha256);
    assert_eq!(plan.inputs.len(), 2);
}

/// Under shared streams, what a start file holds is in the keys, and where it lies is not.
#[test]
fn a_shared_start_file_counts_by_its_bytes() {
    let with = |file: &str| {
        plan(&swept(&format!(
            "[ensemble]\nchains = 2\nstart.file = \"data/{file}\"\n[sweep]\nstreams = \"shared\"\n\
             [sweep.axis]\n\"model.constant.c\" = [1, 2]\n"
        )))
    };
    let one = with("ostrey-stations.csv");
    let same = with("../data/ostrey-stations.csv");
    let other = with("ostrey-slips.csv");
    assert_eq!(one.digest(), same.digest());
    assert_ne!(one.stream_key(0, 0), other.stream_key(0, 0));
    assert_ne!(one.chain_key(0, 0), other.chain_key(0, 0));
}

/// Law, number and unit of a prediction are in the plan, however it is written.
#[test]
fn predictions_are_in_the_digest() {
    let with = |entry: &str| plan(&format!("{SHORT}[predict]\nnext = {entry}\n"));
    let base = with("{ law = \"poisson(mean = a)\", per = 3, unit = \"1\" }");
    for other in [
        "{ law = \"poisson(mean = b)\", per = 3, unit = \"1\" }",
        "{ law = \"poisson(mean = a)\", per = 4, unit = \"1\" }",
        "{ law = \"poisson(mean = a)\", per = 3, unit = \"m\" }",
        "{ law = \"poisson(mean = a)\" }",
    ] {
        assert_ne!(base.digest(), with(other).digest(), "{other}");
    }
    let (text, table) = (
        with("\"poisson(mean=a)\""),
        with("{ law = \"poisson(mean = a)\" }"),
    );
    assert_eq!(text.digest(), table.digest());
}

#[test]
fn a_goal_for_a_value_not_given_is_a_fault() {
    let text = format!(
        "{SHORT}[[estimand]]\nname = \"a\"\ngive = [\"median\"]\ngoal = {{ absolute = 0.1 }}\n"
    );
    assert_eq!(
        told(&text)[0].0,
        "a goal is for the value, which `give` leaves out"
    );
}

#[test]
fn chains_over_all_points_are_bounded() {
    let axes = "[ensemble]\nchains = 100_000\n[sweep.axis]\n\"model.constant.c\" = { from = 0, to = 1, count = 11 }\n";
    assert_eq!(
        told(&swept(axes))[0].0,
        "the study has 1100000 chains over all 11 points, and at most 1000000 can be run"
    );
}

/// What no estimate can take is refused before it is drawn.
#[test]
fn draws_over_all_chains_are_bounded() {
    let of = |ensemble: &str| format!("{SHORT}{ensemble}");
    let most = plan(&of("[ensemble]\nchains = 3\ndraws = 1431655765\n[goal]\n"));
    let goal = most.points[0].goal.as_ref().expect("a goal");
    assert_eq!(goal.at_most, 1_431_655_765);
    assert_eq!(
        told(&of("[ensemble]\nchains = 3\ndraws = 1431655766\n"))[0].0,
        "4294967298 draws over all chains are too many for one estimate"
    );
    let text = of("[ensemble]\nchains = 3\n[goal]\nat_most = 1431655766\n");
    assert!(told(&text)[0].0.contains("at_most"));
}

#[test]
fn paths_of_all_kinds() {
    use super::overlay::segments;
    let all = |path: &str| segments(path).map(|list| list.join("|"));
    assert_eq!(all("a.b"), Some("a|b".into()));
    assert_eq!(all("a.\"b.c\".d"), Some("a|b.c|d".into()));
    for path in ["", ".", "a.", ".a", "a..b", "a.\"b", "a.\"b\"c", "\"\""] {
        assert_eq!(all(path), None, "{path}");
    }
}
