//! Programs: what a graph says about some of its values, made ready to run on numbers.

use super::graph::{Graph, Node, dot_rows, element};
use crate::laws::Value;
use std::sync::Arc;

#[derive(Debug, Clone)]
enum Held {
    Operation(Node),
}

/// Outputs as functions of the inputs.
#[derive(Debug, Clone)]
pub struct Program {
    inner: Arc<Inner>,
}

#[derive(Debug)]
struct Inner {
    nodes: Vec<Held>,
    lengths: Vec<usize>,
    data: Vec<Arc<[f64]>>,
    matrices: Vec<(usize, Vec<Arc<[f64]>>)>,
    outputs: Vec<Value>,
    inputs: usize,
}

/// A program with the memory it works in, for a number of lanes.
#[derive(Debug)]
pub struct Machine {
    program: Arc<Inner>,
    lanes: usize,
}

impl Program {
    /// Makes a program that computes these values.
    pub fn compile(graph: &Graph, outputs: &[Value]) -> Program {
        Program {
            inner: Arc::new(Inner {
                nodes: graph
                    .nodes
                    .iter()
                    .map(|node| Held::Operation(*node))
                    .collect(),
                lengths: (0..graph.nodes.len())
                    .map(|i| graph.shape(Value(i as u32)).len())
                    .collect(),
                data: graph.data.clone(),
                matrices: graph
                    .matrices
                    .iter()
                    .map(|m| (m.rows.len, m.columns.clone()))
                    .collect(),
                outputs: outputs.to_vec(),
                inputs: graph.slots(),
            }),
        }
    }

    /// Length of the input vector.
    pub fn inputs(&self) -> usize {
        self.inner.inputs
    }

    /// Length of the output vector: the outputs one after the other, vectors element by element.
    pub fn outputs(&self) -> usize {
        self.inner
            .outputs
            .iter()
            .map(|v| self.inner.lengths[v.0 as usize])
            .sum()
    }

    /// Arithmetic operations an evaluation, about; from the program alone.
    pub fn cost(&self) -> f64 {
        self.inner.lengths.iter().map(|n| *n as f64).sum()
    }

    /// A machine for 1 to 16 lanes.
    pub fn machine(&self, lanes: usize) -> Machine {
        Machine {
            program: self.inner.clone(),
            lanes,
        }
    }
}

impl Machine {
    pub fn lanes(&self) -> usize {
        self.lanes
    }

    /// Computes the outputs: slot s of lane l is at `s * lanes + l` on both sides.
    pub fn run(&mut self, inputs: &[f64], outputs: &mut [f64]) {
        for lane in 0..self.lanes {
            let slots: Vec<f64> = inputs
                .iter()
                .skip(lane)
                .step_by(self.lanes)
                .copied()
                .collect();
            let out = self.program.evaluate(&slots);
            for (slot, value) in out.iter().enumerate() {
                outputs[slot * self.lanes + lane] = *value;
            }
        }
    }
}

impl Inner {
    fn evaluate(&self, inputs: &[f64]) -> Vec<f64> {
        let mut values: Vec<Vec<f64>> = Vec::with_capacity(self.nodes.len());
        for (held, &length) in self.nodes.iter().zip(&self.lengths) {
            let Held::Operation(node) = held;
            let of = |v: Value| &values[v.0 as usize];
            let at = |v: Value, i: usize| {
                let x = of(v);
                if x.len() == 1 { x[0] } else { x[i] }
            };
            let each = |f: &dyn Fn(usize) -> f64| (0..length).map(f).collect::<Vec<f64>>();
            let value = match *node {
                Node::Constant(bits) => vec![f64::from_bits(bits)],
                Node::Input(slot) => inputs[slot..slot + length].to_vec(),
                Node::Data(data) => self.data[data].to_vec(),
                Node::Unary(op, a) => each(&|i| op.apply(at(a, i))),
                Node::Binary(op, a, b) => each(&|i| op.apply(at(a, i), at(b, i))),
                Node::Ternary(op, a, b, c) => each(&|i| op.apply(at(a, i), at(b, i), at(c, i))),
                Node::Call(f, a, b, c) => each(&|i| (f.evaluate)(at(a, i), at(b, i), at(c, i))),
                Node::Reduce(reduction, a) => vec![reduction.of(of(a))],
                Node::Gather(a, index) => each(&|i| element(of(a), of(index)[i])),
                Node::Element(a, i) => vec![of(a)[i]],
                Node::Dot(matrix, x) => {
                    let (rows, columns) = &self.matrices[matrix.0];
                    dot_rows(columns, of(x), *rows)
                }
            };
            values.push(value);
        }
        self.outputs
            .iter()
            .flat_map(|v| values[v.0 as usize].iter().copied())
            .collect()
    }
}
