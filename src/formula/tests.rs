//! Formulas from text to value: round trips, faults with their places, meaning.

use super::expr::{Call, Expr, Form, Infix, Prefix};
use super::function::functions;
use super::*;
use crate::laws;
use crate::maths;
use crate::place::{Faults, Place, Source, Text};
use crate::reading::{Cells, Matrix as Columns, RowNames, Table};
use proptest::prelude::*;
use std::sync::Arc;

mod faults;

fn place() -> Place {
    Place {
        source: Arc::new(Source {
            name: "t".into(),
            text: String::new(),
        }),
        span: 0..0,
    }
}

fn table() -> Arc<Table> {
    let text = "station,site,kind,y,x1,x2\n\
        Cawdle,north,old,1,1,0.5\n\
        Thorney Drove,south,new,2,0,1.5\n\
        Sloe Fen,north,new,3.5,2,-1\n\
        Cawdle End,east,old,8,1,0\n";
    let mut table = Table::bare("t", text).unwrap();
    let sites = ["Cawdle", "Thorney Drove", "Sloe Fen", "Cawdle End"];
    table.names = Some(RowNames {
        column: "station".into(),
        values: sites.map(String::from).to_vec(),
    });
    table.matrices = vec![Columns {
        name: "x".into(),
        columns: vec![4, 5],
    }];
    Arc::new(table)
}

/// Unknowns: `a`, `b` numbers; `rate` a row of t; `effect` a level of t.site; `cross` of t.site and t.kind;
/// `beta` a column of t.x; `k` a number.
struct Names {
    terms: Vec<(&'static str, Term)>,
    table: Arc<Table>,
}

impl Scope for Names {
    fn find(&self, name: &str) -> Option<Entity> {
        if name == "t" {
            return Some(Entity::Table(self.table.clone()));
        }
        let found = self.terms.iter().find(|(known, _)| *known == name);
        found.map(|(_, term)| Entity::Term(term.clone()))
    }
    fn names(&self) -> Vec<String> {
        self.terms
            .iter()
            .map(|(name, _)| (*name).to_string())
            .chain(["t".to_string()])
            .collect()
    }
}

fn scope(graph: &mut Graph) -> Names {
    let table = table();
    let level = |name: &str| match &table.column(name).unwrap().cells {
        Cells::Labels { levels, .. } => levels.clone(),
        Cells::Numbers { .. } => Vec::new(),
    };
    let (site, kind) = (level("site"), level("kind"));
    let shapes = [
        ("a", Shape::Number),
        ("b", Shape::Number),
        ("k", Shape::Number),
        ("rate", Shape::Vector(Axis::rows(&table))),
        ("effect", Shape::Vector(Axis::levels(&table, "site", &site))),
        (
            "cross",
            Shape::Vector(Axis::crossed(&table, ("site", &site), ("kind", &kind))),
        ),
        (
            "beta",
            Shape::Vector(Axis::columns(&table, table.matrix("x").unwrap())),
        ),
    ];
    let terms = shapes.map(|(name, shape)| {
        let value = graph.input(shape.clone());
        (
            name,
            Term {
                value,
                shape,
                kind: Kind::Number,
            },
        )
    });
    Names {
        terms: terms.to_vec(),
        table,
    }
}

/// a, b, k, rate (4), effect (north, south, east), cross (6), beta (2)
const INPUTS: [f64; 18] = [
    0.5, 2.0, 2.0, 0.1, 0.2, 0.3, 0.4, 10.0, 20.0, 30.0, 1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 0.25, -0.5,
];

fn value_at(text: &str, inputs: &[f64]) -> Result<Vec<f64>, Vec<String>> {
    let mut faults = Faults::default();
    let mut graph = Graph::new();
    let names = scope(&mut graph);
    let term = parse(&Text::bare(text), &mut faults)
        .and_then(|expr| lower(&expr, &names, &mut graph, &mut faults));
    let Some(term) = term else {
        let words = |f: &crate::place::Fault| {
            let place = f
                .place
                .as_ref()
                .map_or("", |p| &p.source.text[p.span.clone()]);
            format!(
                "{place} | {} | {}",
                f.what,
                f.help.clone().unwrap_or_default()
            )
        };
        return Err(faults.0.iter().map(words).collect());
    };
    assert!(faults.is_empty(), "{text}: a value and a fault: {faults:?}");
    let program = Program::compile(&graph, &[term.value]);
    let mut out = vec![0.0; program.outputs()];
    program.machine(1).run(inputs, &mut out);
    Ok(out)
}

fn value(text: &str) -> Vec<f64> {
    value_at(text, &INPUTS).unwrap_or_else(|faults| panic!("{text}: {faults:?}"))
}

fn faults(text: &str) -> Vec<String> {
    value_at(text, &INPUTS).expect_err(text)
}

#[track_caller]
fn close(text: &str, want: &[f64]) {
    let got = value(text);
    assert_eq!(got.len(), want.len(), "{text}");
    for (g, w) in got.iter().zip(want) {
        assert!(
            (g - w).abs() <= 1e-12 * (1.0 + w.abs()),
            "{text}: {got:?} for {want:?}"
        );
    }
}

#[test]
fn arithmetic() {
    close("1 + 2 * 3", &[7.0]);
    close("-2^2", &[-4.0]);
    close("2^-1", &[0.5]);
    close("2^3^2", &[512.0]);
    close("8 / 4 / 2", &[1.0]);
    close("8 - 4 - 2", &[2.0]);
    close("-a * -b", &[1.0]);
    close("a - -b", &[2.5]);
    close("(a + b)^2 / 5", &[1.25]);
    close("1e-3 * 2.5E2", &[0.25]);
    close("if(a < b and not (a == 1), 3, 4)", &[3.0]);
    close("1 < 2 or a > 3", &[1.0]);
    close("rate * t.y", &[0.1, 0.4, 1.05, 3.2]);
    close("sum(rate)", &[1.0]);
    close("mean(t.y)", &[3.625]);
    close("min(rate) + max(rate)", &[0.5]);
    close("max(rate, 0.25)", &[0.25, 0.25, 0.3, 0.4]);
    close("variance(t.y)", &[9.5625]);
    close("sd(rate)^2", &[0.05 / 3.0]);
    close("count(t.y > 1.5)", &[3.0]);
    close("any(rate > 0.35)", &[1.0]);
    close("all(rate > 0.35)", &[0.0]);
    close("length(beta)", &[2.0]);
    close("dot(t.x, beta)", &[0.0, -0.75, 1.0, 0.25]);
    close("dot(rate, t.y)", &[0.1 + 0.4 + 1.05 + 3.2]);
    close("ln_choose(5, 2)", &[maths::ln(10.0)]);
    close("log_odds(probability(a))", &[0.5]);
    close("ln_sum_exp(rate * 0 - 1000)", &[-1000.0 + maths::ln(4.0)]);
    close("t.site == \"north\"", &[1.0, 0.0, 1.0, 0.0]);
    close("\"north\" != t.site", &[0.0, 1.0, 0.0, 1.0]);
}

#[test]
fn sums_taken_apart() {
    let y = [1.0, 2.0, 3.5, 8.0];
    let rate = [0.1, 0.2, 0.3, 0.4];
    let effect = [10.0, 20.0, 10.0, 30.0];
    let eta = [0.0, -0.75, 1.0, 0.25];
    let over = |f: &dyn Fn(usize) -> f64| (0..4).map(f).sum::<f64>();
    close(
        "sum((t.y - a)^2)",
        &[over(&|i| (y[i] - 0.5) * (y[i] - 0.5))],
    );
    close(
        "sum(((a - t.y) / b)^2)",
        &[over(&|i| maths::power((y[i] - 0.5) / 2.0, 2.0))],
    );
    close(
        "sum((effect[t.site] - a) * t.y / b)",
        &[over(&|i| (effect[i] - 0.5) * y[i] / 2.0)],
    );
    close(
        "sum(t.y * dot(t.x, beta) + a)",
        &[over(&|i| y[i] * eta[i] + 0.5)],
    );
    close(
        "sum(t.y * (a - b * dot(t.x, beta)))",
        &[over(&|i| y[i] * (0.5 - 2.0 * eta[i]))],
    );
    close("mean(-rate / b)", &[-0.125]);
    close("sum(3 - rate)", &[11.0]);
    close("sum(if(a > 0, rate, 0))", &[1.0]);
    close("sum(if(rate > 0.15, rate * b, 1))", &[1.0 + 1.8]);
    close("sum(ln(exp(rate) ^ b))", &[2.0]);
    close(
        "sum(-0.5 * ((t.y - effect[t.site]) / b)^2 - ln(b))",
        &[over(&|i| {
            -0.5 * maths::power((y[i] - effect[i]) / 2.0, 2.0) - maths::ln(2.0)
        })],
    );
    close("sum(rate * b * 3 * t.y / 6)", &[over(&|i| rate[i] * y[i])]);
    close("sum(b * t.y * 2)", &[58.0]);
    close("sum(1 / rate^2)", &[over(&|i| 1.0 / (rate[i] * rate[i]))]);
}

#[test]
fn indexing() {
    close("rate[3]", &[0.3]);
    close("rate[\"Sloe Fen\"]", &[0.3]);
    close("effect[t.site]", &[10.0, 20.0, 10.0, 30.0]);
    close("effect[\"east\"]", &[30.0]);
    close("cross[t.site, t.kind]", &[1.0, 4.0, 2.0, 5.0]);
    close("cross[\"south\", t.kind]", &[3.0, 4.0, 4.0, 3.0]);
    close("rate[t.station] - rate", &[0.0; 4]);
    close("rate[k]", &[0.2]);
    close("t.y[k + 1]", &[3.5]);
    close("(rate * 2)[2]", &[0.4]);
    close("sum(effect[t.site])", &[70.0]);
    close("rate[3] == max(rate)", &[0.0]);
    assert!(value("rate[k + 3]")[0].is_nan());
    assert!(value("rate[k + 0.5]")[0].is_nan());
    assert!(value("rate[k / 0]")[0].is_nan());
}

#[test]
fn functions_of_laws() {
    let normal = laws::find("normal", &["mean", "sd"]).unwrap();
    let at = normal.at(&[0.5, 2.0]);
    close(
        "log_density(normal(mean = a, sd = b), 1)",
        &[at.log_density(1.0)],
    );
    close(
        "log_density(normal(sd = b, mean = a), 1)",
        &[at.log_density(1.0)],
    );
    close(
        "distribution(normal(mean = a, sd = b), 1)",
        &[at.distribution(1.0).unwrap()],
    );
    close(
        "survival(normal(mean = a, sd = b), 1)",
        &[at.survival(1.0).unwrap()],
    );
    close(
        "quantile(normal(mean = a, sd = b), 0.9)",
        &[at.quantile(0.9).unwrap()],
    );
    let cut = at.truncated(Some(0.0), Some(3.0));
    close(
        "log_density(truncated(normal(mean = a, sd = b), from = 0, to = 3), 1)",
        &[cut.log_density(1.0)],
    );
    close(
        "quantile(truncated(normal(mean = a, sd = b), from = 0, to = 3), 0.25)",
        &[cut.quantile(0.25).unwrap()],
    );
    close(
        "sum(log_density(normal(mean = effect[t.site], sd = b), t.y))",
        &[[10.0, 20.0, 10.0, 30.0]
            .iter()
            .zip([1.0, 2.0, 3.5, 8.0])
            .map(|(m, y)| normal.at(&[*m, 2.0]).log_density(y))
            .sum()],
    );
}

#[test]
fn lists_of_probabilities() {
    close(
        "log_density(categorical(probabilities = [0.2, 0.3, 0.5]), 2)",
        &[maths::ln(0.3)],
    );
    close(
        "log_density(categorical(probabilities = [a, 1 - a]), 1)",
        &[maths::ln(0.5)],
    );
    let outside = value_at(
        "log_density(categorical(probabilities = [a, 1 - a]), 1)",
        &[1.5; 18],
    );
    assert_eq!(outside, Ok(vec![f64::NEG_INFINITY]));
    let one = |text: &str| {
        let found = faults(text);
        assert_eq!(found.len(), 1, "{text}: {found:?}");
        found[0].clone()
    };
    let law = |list: &str| format!("log_density(categorical(probabilities = {list}), 1)");
    assert!(one(&law("[0.2, 0.3]")).contains("must sum to 1; the sum is 0.5"));
    assert!(one(&law("[1.2, a]")).starts_with("1.2 | `probabilities` of `categorical` must be"));
    assert!(one(&law("[rate, a]")).starts_with("rate | `rate` is not one number"));
    assert!(one(&law("[]")).starts_with("] | `]` cannot stand here"));
    assert!(one(&law("[0.5, 0.5")).starts_with(") | `)` cannot stand here"));
    assert!(one(&law("1")).ends_with("`[0.2, 0.3, 0.5]`, or an unknown with `per`"));
    for text in ["[1, 2]", "sum([1, 2])", "a * [1]", "[1, 2][1]", "[[1]]"] {
        assert!(
            one(text).contains(" | a list of values cannot stand here | "),
            "{text}"
        );
    }
    let deep = format!("{}1{}", "[".repeat(500), "]".repeat(500));
    assert!(one(&deep).contains("stand one inside the other"));
}

#[test]
fn the_table_of_functions_is_in_order_and_each_can_be_called() {
    let names: Vec<&str> = functions().iter().map(|f| f.name).collect();
    assert!(names.is_sorted(), "{names:?}");
    for function in functions() {
        let call = function.usage.split(" or ").next().unwrap();
        let law = "exponential(rate = 2)";
        let call = call
            .replace("condition", "a < 1")
            .replace("law", law)
            .replace("probability(log_odds)", "probability(a)")
            .replace("(p)", "(0.5)")
            .replace(", p)", ", 0.5)")
            .replace("(x)", "(a)")
            .replace(", x)", ", a)")
            .replace("(n, k)", "(5, 2)");
        let call = if function.name == "dot" {
            "dot(rate, rate)".into()
        } else {
            call
        };
        if function.name == "truncated" {
            assert!(faults(&call)[0].contains("a law is not a value"), "{call}");
        } else {
            assert!(
                value(&call)[0].is_finite() || function.name == "variance" || function.name == "sd",
                "{call}"
            );
        }
    }
}

#[test]
fn canonical_text() {
    for (text, want) in [
        (" a+b *  c ", "a + b * c"),
        ("((a))+(b*c)", "a + b * c"),
        ("(a+b)*c", "(a + b) * c"),
        ("a-(b-c)", "a - (b - c)"),
        ("(a-b)-c", "a - b - c"),
        ("(-a)^2", "(-a)^2"),
        ("-(a^2)", "-a^2"),
        ("(a^b)^c", "(a^b)^c"),
        ("a^(b^c)", "a^b^c"),
        ("not (a<b)", "not a < b"),
        ("(not a) == b", "(not a) == b"),
        ("1.50e+2", "150"),
        ("0.000001", "1e-6"),
        ("x[ 'North' ]", "x[\"North\"]"),
        ("normal(mean=0,sd=1)", "normal(mean = 0, sd = 1)"),
    ] {
        let mut faults = Faults::default();
        let expr =
            parse(&Text::bare(text), &mut faults).unwrap_or_else(|| panic!("{text}: {faults:?}"));
        assert_eq!(expr.to_string(), want);
    }
}

fn expression() -> impl Strategy<Value = Expr> {
    let expr = |form: Form| Expr {
        form,
        place: place(),
        depth: 0,
    };
    let name = "[a-z][a-z0-9_]{0,3}".prop_filter("not a word of the language", |n| {
        !["and", "or", "not"].contains(&n.as_str())
    });
    let leaf = prop_oneof![
        any::<f64>().prop_filter_map("finite", |x| x.is_finite().then(|| Form::Number(x.abs()))),
        (0_u32..1000).prop_map(|x| Form::Number(f64::from(x))),
        name.clone().prop_map(Form::Name),
        (name.clone(), name.clone()).prop_map(|(table, column)| Form::Column { table, column }),
        "[A-Za-z ']{0,5}".prop_map(Form::Label),
    ]
    .prop_map(expr);
    leaf.prop_recursive(6, 40, 4, move |inner| {
        let infix = prop::sample::select(vec![
            Infix::Add,
            Infix::Subtract,
            Infix::Multiply,
            Infix::Divide,
            Infix::Power,
            Infix::Equal,
            Infix::NotEqual,
            Infix::Less,
            Infix::LessEqual,
            Infix::Greater,
            Infix::GreaterEqual,
            Infix::And,
            Infix::Or,
        ]);
        let some = prop::collection::vec(inner.clone(), 1..3);
        let arguments = prop::collection::vec(inner.clone(), 0..3);
        let named = prop::collection::btree_map("[a-z]{1,3}x", inner.clone(), 0..3);
        prop_oneof![
            (infix, inner.clone(), inner.clone()).prop_map(|(op, a, b)| Form::Infix(
                op,
                a.into(),
                b.into()
            )),
            (any::<bool>(), inner.clone()).prop_map(|(not, a)| {
                Form::Prefix(if not { Prefix::Not } else { Prefix::Negate }, a.into())
            }),
            some.clone().prop_map(Form::List),
            (inner, some).prop_map(|(of, at)| Form::Index { of: of.into(), at }),
            (name.clone(), arguments, named).prop_map(|(name, arguments, named)| {
                Form::Call(Call {
                    name,
                    name_place: place(),
                    arguments,
                    named: named
                        .into_iter()
                        .map(|(key, value)| (key, place(), value))
                        .collect(),
                })
            }),
        ]
        .prop_map(expr)
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 500, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn text_reads_back_as_the_same_tree(expr in expression()) {
        let text = expr.to_string();
        let mut faults = Faults::default();
        let again = parse(&Text::bare(&text), &mut faults);
        prop_assert!(again.is_some(), "{text}: {faults:?}");
        let again = again.unwrap();
        prop_assert_eq!(&again, &expr, "{}", text);
        prop_assert_eq!(again.to_string(), text);
    }

    #[test]
    fn any_text_is_read_or_refused(text in "\\PC{0,60}") {
        let mut faults = Faults::default();
        let read = parse(&Text::bare(&text), &mut faults);
        prop_assert_eq!(read.is_none(), !faults.is_empty());
    }

    #[test]
    fn any_words_are_lowered_or_refused(
        words in prop::collection::vec(prop::sample::select(vec![
            "a", "b", "k", "rate", "effect", "cross", "beta", "t", "t.y", "t.x", "t.site", "t.kind", "\"north\"", "1", "2.5", "3",
            "+", "-", "*", "/", "^", "==", "<", ">", "and", "or", "not", "(", ")", "(", ")", "[", "]", ",", "=", ".",
            "if(", "sum(", "max(", "dot(", "sd(", "any(", "length(", "ln_sum_exp(", "log_density(", "quantile(", "normal(mean = ",
            "sd = ", "poisson(mean = ", "truncated(", "from = ", "categorical(probabilities = ", "nothing",
        ]), 1..25)
    ) {
        let text = words.join(" ");
        if let Err(found) = value_at(&text, &INPUTS) {
            prop_assert!(!found.is_empty(), "{text}");
        }
    }
}
