//! The machine against plain evaluation, bit for bit.

use super::super::graph::{Graph, Node, Reduction, dot_rows, element};
use super::super::shape::{Axis, Over, Shape};
use super::Program;
use crate::laws::{self, Algebra, Domain, Value};
use crate::maths::{self, Binary, Ternary, Unary};
use crate::random::{Purpose, Stream};
use proptest::prelude::*;
use std::sync::Arc;

/// Evaluates a graph node by node, one lane, without any of the machinery.
pub(crate) fn plain(graph: &Graph, outputs: &[Value], inputs: &[f64]) -> Vec<f64> {
    let mut values: Vec<Vec<f64>> = Vec::new();
    for (at, node) in graph.nodes.iter().enumerate() {
        let v = Value(at as u32);
        let length = graph.shape(v).len();
        let of = |v: Value| &values[v.0 as usize];
        let at = |v: Value, i: usize| {
            if graph.is_number(v) {
                of(v)[0]
            } else {
                of(v)[i]
            }
        };
        let each = |f: &dyn Fn(usize) -> f64| (0..length).map(f).collect::<Vec<f64>>();
        let value = match *node {
            Node::Constant(bits) => vec![f64::from_bits(bits)],
            Node::Input(slot) => inputs[slot..slot + length].to_vec(),
            Node::Data(data) => graph.data[data].to_vec(),
            Node::Unary(op, a) => each(&|i| op.apply(at(a, i))),
            Node::Binary(op, a, b) => each(&|i| op.apply(at(a, i), at(b, i))),
            Node::Ternary(op, a, b, c) => each(&|i| op.apply(at(a, i), at(b, i), at(c, i))),
            Node::Reduce(Reduction::Sum, a) => vec![crate::maths::sum(of(a))],
            Node::Reduce(reduction, a) => vec![reduction.of(of(a))],
            Node::Gather(a, index) => each(&|i| element(of(a), at(index, i))),
            Node::Element(a, i) => vec![of(a)[i]],
            Node::Dot(matrix, x) => {
                let held = &graph.matrices[matrix.0];
                dot_rows(&held.columns, of(x), held.rows.len)
            }
            Node::Call(f, a, b, c) => each(&|i| (f.evaluate)(at(a, i), at(b, i), at(c, i))),
        };
        values.push(value);
    }
    outputs
        .iter()
        .flat_map(|v| values[v.0 as usize].iter().copied())
        .collect()
}

fn axis(name: &str, len: usize) -> Arc<Axis> {
    Arc::new(Axis {
        over: Over::Rows { table: name.into() },
        len,
        labels: Vec::new(),
    })
}

/// A spread of numbers, some of them awkward.
fn number(seed: u64) -> f64 {
    let mix = seed.wrapping_mul(0x9e37_79b9_7f4a_7c15) ^ (seed >> 7);
    match mix % 23 {
        0 => 0.0,
        1 => -0.0,
        2 => f64::INFINITY,
        3 => f64::NAN,
        4 => 1.0,
        5 => 3.0,
        _ => ((mix >> 11) as f64 / (1_u64 << 53) as f64 - 0.4) * 6.0,
    }
}

const UNARY: &[Unary] = &[
    Unary::Negate,
    Unary::Absolute,
    Unary::Square,
    Unary::Sqrt,
    Unary::Exp,
    Unary::Ln,
    Unary::Log1p,
    Unary::Expm1,
    Unary::Sin,
    Unary::Tanh,
    Unary::Floor,
    Unary::Not,
    Unary::LnGamma,
    Unary::Softplus,
    Unary::Logistic,
    Unary::NormalCdf,
];
const BINARY: &[Binary] = &[
    Binary::Add,
    Binary::Add,
    Binary::Subtract,
    Binary::Multiply,
    Binary::Multiply,
    Binary::Divide,
    Binary::Power,
    Binary::Minimum,
    Binary::Maximum,
    Binary::Less,
    Binary::Equal,
    Binary::And,
    Binary::Or,
];

/// A graph made from random choices over two axes, with all its outputs.
fn random(rows: usize, choices: &[(u8, u16, u16, u16)]) -> (Graph, Vec<Value>) {
    let mut g = Graph::new();
    let (long, short) = (axis("long", rows), axis("short", 3));
    let data = |from: u64, len: usize| {
        (0..len as u64)
            .map(|i| number(from + 31 * i))
            .collect::<Arc<[f64]>>()
    };
    let mut made = vec![
        g.input(Shape::Number),
        g.input(Shape::Vector(long.clone())),
        g.input(Shape::Vector(short.clone())),
        g.input(Shape::Number),
        g.data(long.clone(), data(5, rows)),
        g.data(long.clone(), data(77, rows)),
        g.data(short.clone(), data(9, 3)),
        g.constant(0.5),
        g.constant(2.0),
        g.constant(1.0),
    ];
    let level = g.data(
        long.clone(),
        (0..rows).map(|i| (i * 7 % 4 + 1) as f64).collect(),
    );
    let matrix = g.matrix(long.clone(), (0..3).map(|c| data(1000 * c, rows)).collect());
    for &(what, a, b, c) in choices {
        let pick = |x: u16| made[made.len() - 1 - (x as usize % made.len())];
        let (a, b, c) = (pick(a), pick(b), pick(c));
        let together = |g: &Graph, x: Value, y: Value| {
            g.is_number(x) || g.is_number(y) || g.shape(x) == g.shape(y)
        };
        let over_short = |g: &Graph, v: Value| g.shape(v) == Shape::Vector(short.clone());
        let at = what as usize / 8;
        let v = match what % 8 {
            0 | 1 if together(&g, a, b) => g.binary(BINARY[at % BINARY.len()], a, b),
            2 => g.unary(UNARY[at % UNARY.len()], a),
            3 if together(&g, a, b) && together(&g, b, c) && together(&g, a, c) => {
                let test = g.binary(Binary::Less, a, b);
                g.ternary(Ternary::Select, test, b, c)
            }
            4 => match at % 4 {
                0 | 1 => g.sum(a),
                2 => g.minimum(a),
                _ => g.maximum(a),
            },
            5 if over_short(&g, a) => match at % 3 {
                0 => g.gather(a, level),
                1 => g.dot(matrix, a),
                _ => g.element(a, at % 3),
            },
            6 => {
                let index = g.unary(Unary::Floor, b);
                g.gather(a, index)
            }
            _ => g.unary(Unary::Square, a),
        };
        made.push(v);
    }
    let outputs = made.split_off(7);
    (g, outputs)
}

/// Values of a parameter inside and outside its domain.
fn choices(domain: Domain) -> (&'static [f64], &'static [f64]) {
    match domain {
        Domain::Real => (&[0.3, -1.2, 2.5], &[f64::NAN]),
        Domain::Positive | Domain::NonNegative => {
            (&[0.7, 1.9, 3.2], &[-1.0, f64::NAN, f64::INFINITY])
        }
        Domain::Unit | Domain::PositiveUnit => (&[0.35, 0.6, 0.9], &[-0.5, 1.5, f64::NAN]),
        Domain::Count => (&[6.0, 9.0, 4.0], &[2.5, -1.0, f64::NAN]),
        Domain::Probabilities => (&[0.2, 0.3, 0.5], &[-0.2]),
    }
}

/// The sum of log densities as the graph simplifies it, against the law row by row.
#[test]
fn sums_of_log_densities_keep_their_meaning_and_their_guards() {
    const ROWS: usize = 11;
    let mut stream = Stream::new(&[7; 32], Purpose::Test);
    for law in laws::table() {
        let forms: Vec<(Domain, usize)> = law
            .parameters()
            .iter()
            .map(|p| {
                (
                    p.domain,
                    if p.domain == Domain::Probabilities {
                        3
                    } else {
                        1
                    },
                )
            })
            .collect();
        let domains: Vec<Domain> = forms.iter().flat_map(|&(d, n)| vec![d; n]).collect();
        let bounds = law.name() == "uniform";
        let good = |at: usize, which: usize| match domains[at] {
            Domain::Probabilities => choices(domains[at]).0[at % 3],
            _ if bounds => [-3.0, 4.0][at] + 0.1 * which as f64,
            domain => choices(domain).0[which],
        };
        let base: Vec<f64> = (0..domains.len()).map(|at| good(at, 0)).collect();
        let mut x: Vec<f64> = (0..ROWS)
            .map(|i| law.at(&base).draw(&mut stream).unwrap_or(0.4 + i as f64))
            .collect();
        for arrangement in 0..6 {
            if arrangement == 5 {
                x[ROWS / 2] = -3.5;
            }
            let mut g = Graph::new();
            let (long, short) = (axis("long", ROWS), axis("short", 3));
            let level: Vec<usize> = (0..ROWS).map(|i| i * 7 % 3).collect();
            let index = g.data(
                long.clone(),
                level.iter().map(|&l| (l + 1) as f64).collect(),
            );
            let point = if arrangement == 2 {
                g.input(Shape::Vector(long.clone()))
            } else {
                g.data(long.clone(), x.clone().into())
            };
            // How each parameter is made, and its inputs for the three choices.
            let mut parameters = Vec::new();
            for &domain in &domains {
                let exp = arrangement == 3 && domain == Domain::Positive;
                let vector = matches!(arrangement, 1 | 3) && domain != Domain::Probabilities;
                let shape = if vector {
                    Shape::Vector(short.clone())
                } else {
                    Shape::Number
                };
                let mut v = g.input(shape);
                if exp {
                    v = g.unary(Unary::Exp, v);
                }
                if vector {
                    v = g.gather(v, index);
                }
                parameters.push((v, vector, exp));
            }
            let values: Vec<Value> = parameters.iter().map(|p| p.0).collect();
            let density = law.log_density(&mut g, point, &values);
            let total = g.sum(density);
            let mut machine = Program::compile(&g, &[total]).machine(1);
            let mut trials: Vec<Option<(usize, f64)>> = vec![None];
            for (at, &domain) in domains.iter().enumerate() {
                trials.extend(choices(domain).1.iter().map(|&bad| Some((at, bad))));
            }
            for trial in trials {
                let value = |at: usize, which: usize| match trial {
                    Some((bad, x)) if bad == at && (which == 1 || !parameters[at].1) => x,
                    _ => good(at, if parameters[at].1 { which } else { 0 }),
                };
                let mut inputs = if arrangement == 2 {
                    x.clone()
                } else {
                    Vec::new()
                };
                for (at, (_, vector, exp)) in parameters.iter().enumerate() {
                    for which in 0..if *vector { 3 } else { 1 } {
                        let v = value(at, which);
                        inputs.push(if *exp { maths::ln(v) } else { v });
                    }
                }
                let rows: Vec<f64> = (0..ROWS)
                    .map(|i| {
                        let p: Vec<f64> = (0..domains.len())
                            .map(|at| {
                                let v = value(at, level[i]);
                                if parameters[at].2 {
                                    maths::exp(maths::ln(v))
                                } else {
                                    v
                                }
                            })
                            .collect();
                        law.at(&p).log_density(x[i])
                    })
                    .collect();
                let want: f64 = rows.iter().sum();
                let size: f64 = rows.iter().map(|r| r.abs()).sum();
                let mut out = [0.0];
                machine.run(&inputs, &mut out);
                let at = format!(
                    "{} arrangement {arrangement} trial {trial:?}: {} for {want}",
                    law.usage(),
                    out[0]
                );
                if want.is_finite() {
                    assert!((out[0] - want).abs() <= 1e-10 * (1.0 + size), "{at}");
                } else {
                    assert!(
                        out[0].is_nan() || out[0] == f64::NEG_INFINITY || out[0] == want,
                        "{at}"
                    );
                }
            }
        }
    }
}

fn same(a: f64, b: f64) -> bool {
    a.to_bits() == b.to_bits() || (a.is_nan() && b.is_nan())
}

fn check(graph: &Graph, outputs: &[Value], seed: u64) -> Result<(), TestCaseError> {
    let program = Program::compile(graph, outputs);
    for (lanes, block) in [
        (1, 8),
        (1, 32),
        (2, 8),
        (7, 16),
        (8, 32),
        (8, 128),
        (11, 32),
    ] {
        let mut machine = program.machine_with(lanes, block);
        let inputs: Vec<f64> = (0..program.inputs() * lanes)
            .map(|i| number(seed + i as u64))
            .collect();
        let mut out = vec![0.0; program.outputs() * lanes];
        machine.run(&inputs, &mut out);
        for lane in 0..lanes {
            let mine: Vec<f64> = inputs.iter().skip(lane).step_by(lanes).copied().collect();
            let want = plain(graph, outputs, &mine);
            for (slot, want) in want.iter().enumerate() {
                let got = out[slot * lanes + lane];
                prop_assert!(
                    same(got, *want),
                    "output {slot}, lane {lane} of {lanes}, block {block}: {got:e} for {want:e}"
                );
            }
        }
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]
    #[test]
    fn machine_is_plain_evaluation(
        rows in prop_oneof![Just(1_usize), Just(5), Just(8), 9_usize..70, Just(1023), Just(2100)],
        choices in prop::collection::vec(any::<(u8, u16, u16, u16)>(), 1..40),
        keep in any::<u64>(),
        seed in 0_u64..1_000_000,
    ) {
        let (graph, outputs) = random(rows, &choices);
        check(&graph, &outputs, seed)?;
        let some: Vec<Value> = outputs.iter().enumerate().filter(|(i, _)| keep >> (i % 64) & 1 == 1).map(|(_, v)| *v).collect();
        check(&graph, &some, seed)?;
    }
}
