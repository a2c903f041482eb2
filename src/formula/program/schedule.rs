//! From a graph to a tape: which operations are needed, in which loop, in which registers.
//!
//! Numbers and vectors are put in levels. A level first computes its numbers, then runs one loop for each
//! axis; what needs a finished vector (a sum, an element, a product with a matrix) waits for the next level.

use super::super::graph::{Graph, Node, position};
use super::super::shape::Axis;
use super::cost;
use super::tape::{
    Loop, NOWHERE, Output, RowStep, Scalar, Slow, Step, Store, StoreForm, Tape, Tiles,
};
use crate::laws::Value;
use crate::maths::Ternary;
use std::collections::BTreeMap;
use std::sync::Arc;

/// Data vectors are laid out for all lanes beforehand while they take at most this many rows together.
const SPREAD_ROWS: usize = 4096;

pub(super) fn tape(graph: &Graph, outputs: &[Value]) -> Tape {
    let mut schedule = Schedule::new(graph, outputs);
    schedule.levels();
    schedule.late();
    schedule.placed();
    schedule.finish(outputs)
}

struct Schedule<'a> {
    graph: &'a Graph,
    needed: Vec<bool>,
    output: Vec<bool>,
    level: Vec<usize>,
    users: Vec<Vec<Value>>,
    /// Vectors kept whole: the others live in blocks.
    whole: Vec<bool>,
    tape: Tape,
    scalar: BTreeMap<Value, Scalar>,
    store: BTreeMap<Value, Store>,
    matrices: BTreeMap<usize, usize>,
    data: BTreeMap<usize, usize>,
    data_stores: BTreeMap<usize, Store>,
    constant_stores: BTreeMap<u64, Store>,
    spread_rows: usize,
}

/// Whether an operand is needed as a whole, not row by row.
fn needs_whole(node: &Node, operand: Value) -> bool {
    match *node {
        Node::Gather(vector, _) => vector == operand,
        Node::Element(..) | Node::Dot(..) => true,
        _ => false,
    }
}

impl<'a> Schedule<'a> {
    fn new(graph: &'a Graph, outputs: &[Value]) -> Schedule<'a> {
        let count = graph.nodes.len();
        let mut needed = vec![false; count];
        let mut output = vec![false; count];
        for v in outputs {
            needed[v.0 as usize] = true;
            output[v.0 as usize] = true;
        }
        let mut users: Vec<Vec<Value>> = vec![Vec::new(); count];
        for at in (0..count).rev() {
            if needed[at] {
                for operand in graph.operands(Value(at as u32)) {
                    needed[operand.0 as usize] = true;
                    users[operand.0 as usize].push(Value(at as u32));
                }
            }
        }
        Schedule {
            graph,
            needed,
            output,
            level: vec![0; count],
            users,
            whole: vec![false; count],
            tape: Tape {
                inputs: graph.slots(),
                scalar_inputs: Vec::new(),
                vector_inputs: Vec::new(),
                constants: Vec::new(),
                scalars: 0,
                stores: Vec::new(),
                data: Vec::new(),
                tables: Vec::new(),
                matrices: Vec::new(),
                steps: Vec::new(),
                outputs: Vec::new(),
                cost: 0.0,
            },
            scalar: BTreeMap::new(),
            store: BTreeMap::new(),
            matrices: BTreeMap::new(),
            data: BTreeMap::new(),
            data_stores: BTreeMap::new(),
            constant_stores: BTreeMap::new(),
            spread_rows: 0,
        }
    }

    fn values(&self) -> impl DoubleEndedIterator<Item = Value> + use<> {
        let needed: Vec<Value> = (0..self.needed.len())
            .filter(|&at| self.needed[at])
            .map(|at| Value(at as u32))
            .collect();
        needed.into_iter()
    }

    fn is_vector(&self, v: Value) -> bool {
        !self.graph.is_number(v)
    }

    /// A value that is there before the first step.
    fn is_given(&self, v: Value) -> bool {
        matches!(
            self.graph.node(v),
            Node::Constant(_) | Node::Input(_) | Node::Data(_)
        )
    }

    /// The earliest level of each value.
    fn levels(&mut self) {
        for v in self.values() {
            let node = self.graph.node(v);
            let after = |operand: Value| {
                let whole = needs_whole(&node, operand);
                let level = self.level[operand.0 as usize];
                match node {
                    Node::Reduce(..) => level + 1,
                    _ if whole && !self.is_given(operand) => level + 1,
                    _ => level,
                }
            };
            let level = self.graph.operands(v).into_iter().map(after).max();
            self.level[v.0 as usize] = level.unwrap_or(0);
        }
    }

    /// Moves vectors to the level of their first user, so that fewer must be kept whole.
    fn late(&mut self) {
        for v in self.values().rev() {
            if !self.is_vector(v) || self.is_given(v) {
                continue;
            }
            let before = |user: &Value| {
                let level = self.level[user.0 as usize];
                let node = self.graph.node(*user);
                if matches!(node, Node::Reduce(..)) || needs_whole(&node, v) {
                    level - 1
                } else {
                    level
                }
            };
            if let Some(level) = self.users[v.0 as usize].iter().map(before).min() {
                self.level[v.0 as usize] = level;
            }
        }
    }

    /// Decides which vectors are kept whole.
    fn placed(&mut self) {
        for v in self.values() {
            if !self.is_vector(v) || matches!(self.graph.node(v), Node::Data(_)) {
                continue;
            }
            let level = self.level[v.0 as usize];
            let elsewhere = |user: &Value| {
                let node = self.graph.node(*user);
                let other_loop =
                    !matches!(node, Node::Reduce(..)) && self.level[user.0 as usize] != level;
                needs_whole(&node, v) || other_loop
            };
            let given = matches!(self.graph.node(v), Node::Input(_));
            self.whole[v.0 as usize] = given
                || self.output[v.0 as usize]
                || self.users[v.0 as usize].iter().any(elsewhere);
        }
    }

    fn new_store(&mut self, form: StoreForm) -> Store {
        self.tape.stores.push(form);
        self.tape.stores.len() - 1
    }

    fn new_scalar(&mut self) -> Scalar {
        self.tape.scalars += 1;
        self.tape.scalars - 1
    }

    /// The tape's number for an entry of the graph's data.
    fn tape_data(&mut self, at: usize) -> usize {
        if let Some(&known) = self.data.get(&at) {
            return known;
        }
        self.tape.data.push(self.graph.data[at].clone());
        self.data.insert(at, self.tape.data.len() - 1);
        self.tape.data.len() - 1
    }

    /// Data laid out for all lanes.
    fn data_store(&mut self, at: usize) -> Store {
        if let Some(&store) = self.data_stores.get(&at) {
            return store;
        }
        let data = self.tape_data(at);
        let store = self.new_store(StoreForm::Data(data));
        self.data_stores.insert(at, store);
        store
    }

    /// The store that holds a whole vector, which other steps pick elements from.
    fn whole_store(&mut self, v: Value) -> Store {
        match self.graph.node(v) {
            Node::Data(at) => self.data_store(at),
            _ => self.store[&v],
        }
    }

    fn finish(mut self, outputs: &[Value]) -> Tape {
        let mut deepest = 0;
        for v in self.values() {
            deepest = deepest.max(self.level[v.0 as usize]);
            match self.graph.node(v) {
                Node::Constant(bits) => {
                    let register = self.new_scalar();
                    self.tape.constants.push((register, f64::from_bits(bits)));
                    self.scalar.insert(v, register);
                }
                Node::Input(slot) if self.is_vector(v) => {
                    let rows = self.graph.shape_of(v).len();
                    let store = self.new_store(StoreForm::Whole(rows));
                    self.tape.vector_inputs.push((slot, store));
                    self.store.insert(v, store);
                }
                Node::Input(slot) => {
                    let register = self.new_scalar();
                    self.tape.scalar_inputs.push((slot, register));
                    self.scalar.insert(v, register);
                }
                Node::Data(_) => {}
                _ if self.is_vector(v) => {
                    if self.whole[v.0 as usize] {
                        let rows = self.graph.shape_of(v).len();
                        let store = self.new_store(StoreForm::Whole(rows));
                        self.store.insert(v, store);
                    }
                }
                _ => {
                    let register = self.new_scalar();
                    self.scalar.insert(v, register);
                }
            }
        }
        let values: Vec<Value> = self.values().collect();
        for level in 0..=deepest {
            for &v in &values {
                if !self.is_vector(v) && self.level[v.0 as usize] == level {
                    self.scalar_step(v);
                }
            }
            for axis in self.axes_at(level, &values) {
                self.row_loop(level, &axis, &values);
            }
        }
        for &v in outputs {
            let output = if self.is_vector(v) {
                Output::Vector(self.whole_store(v), self.graph.shape_of(v).len())
            } else {
                Output::Scalar(self.scalar[&v])
            };
            self.tape.outputs.push(output);
        }
        self.tape
    }

    fn scalar_step(&mut self, v: Value) {
        let step = match self.graph.node(v) {
            Node::Constant(_)
            | Node::Input(_)
            | Node::Data(_)
            | Node::Reduce(..)
            | Node::Dot(..) => return,
            Node::Unary(op, a) if cost::is_slow_unary(op) => {
                self.slow(v, Slow::Unary(op), [a, a, a])
            }
            Node::Binary(op, a, b) if cost::is_slow_binary(op) => {
                self.slow(v, Slow::Binary(op), [a, b, b])
            }
            Node::Ternary(op, a, b, c) if op != Ternary::Select => {
                self.slow(v, Slow::Ternary(op), [a, b, c])
            }
            Node::Call(function, a, b, c) => self.slow(v, Slow::Call(function), [a, b, c]),
            Node::Unary(op, a) => Step::Unary(op, self.scalar[&v], self.scalar[&a]),
            Node::Binary(op, a, b) => {
                Step::Binary(op, self.scalar[&v], self.scalar[&a], self.scalar[&b])
            }
            Node::Ternary(op, a, b, c) => Step::Ternary(
                op,
                self.scalar[&v],
                self.scalar[&a],
                self.scalar[&b],
                self.scalar[&c],
            ),
            Node::Element(a, at) => {
                let store = self.whole_store(a);
                Step::Element(self.scalar[&v], store, at)
            }
            Node::Gather(a, index) => {
                let store = self.whole_store(a);
                let length = self.graph.shape_of(a).len();
                Step::Pick(self.scalar[&v], store, length, self.scalar[&index])
            }
        };
        self.tape.cost += cost::of(&self.graph.node(v));
        self.tape.steps.push(step);
    }

    fn slow(&self, v: Value, slow: Slow, operands: [Value; 3]) -> Step {
        Step::Slow(slow, self.scalar[&v], operands.map(|a| self.scalar[&a]))
    }

    /// The vector that a needed reduction at this level's loops works on.
    fn reduced_at(&self, v: Value, level: usize) -> Option<Value> {
        match self.graph.node(v) {
            Node::Reduce(_, a) if self.level[a.0 as usize] == level => Some(a),
            _ => None,
        }
    }

    fn axes_at(&self, level: usize, values: &[Value]) -> Vec<Arc<Axis>> {
        let mut axes: Vec<Arc<Axis>> = Vec::new();
        for &v in values {
            let works =
                if self.is_vector(v) && !self.is_given(v) && self.level[v.0 as usize] == level {
                    Some(v)
                } else {
                    self.reduced_at(v, level)
                };
            if let Some(axis) = works.and_then(|v| self.graph.shape_of(v).axis())
                && !axes.iter().any(|other| Arc::ptr_eq(axis, other))
            {
                axes.push(axis.clone());
            }
        }
        axes
    }

    fn row_loop(&mut self, level: usize, axis: &Arc<Axis>, values: &[Value]) {
        let over = |v: Value| {
            self.graph
                .shape_of(v)
                .axis()
                .is_some_and(|a| Arc::ptr_eq(a, axis))
        };
        let mut body: Vec<Value> = Vec::new();
        let mut reductions: Vec<Value> = Vec::new();
        for &v in values {
            if self.is_vector(v) {
                if over(v) && !self.is_given(v) && self.level[v.0 as usize] == level {
                    body.push(v);
                }
            } else if self.reduced_at(v, level).is_some_and(over) {
                reductions.push(v);
            }
        }
        let mut rows = RowLoop {
            schedule: self,
            rows: axis.len,
            body: Vec::new(),
            spreads: Vec::new(),
            spread_stores: BTreeMap::new(),
            blocks: BTreeMap::new(),
            free: Vec::new(),
            last: BTreeMap::new(),
        };
        rows.run(&body, &reductions);
        let (body, spreads, blocks) = (rows.body, rows.spreads, rows.blocks);
        let mut out = Vec::new();
        for v in reductions {
            let Node::Reduce(reduction, a) = self.graph.node(v) else {
                continue;
            };
            let store = match blocks.get(&a) {
                Some(&store) => store,
                None => self.whole_store(a),
            };
            self.tape.cost += axis.len as f64;
            out.push((reduction, store, self.scalar[&v]));
        }
        self.tape.steps.push(Step::Loop(Loop {
            rows: axis.len,
            spreads,
            body,
            reductions: out,
        }));
    }

    /// The table of positions that known numbers from 1 stand for.
    fn table(&mut self, index: Value, length: usize) -> usize {
        let known = self.graph.known_values(index).unwrap_or_default();
        let table: Vec<u32> = known
            .iter()
            .map(|&i| {
                position(i, length)
                    .and_then(|at| u32::try_from(at).ok())
                    .unwrap_or(NOWHERE)
            })
            .collect();
        if let Some(at) = self.tape.tables.iter().position(|other| *other == table) {
            return at;
        }
        self.tape.tables.push(table);
        self.tape.tables.len() - 1
    }

    fn tiles(&mut self, matrix: usize) -> usize {
        if let Some(&at) = self.matrices.get(&matrix) {
            return at;
        }
        let held = &self.graph.matrices[matrix];
        self.tape
            .matrices
            .push(Tiles::new(held.rows.len, &held.columns));
        self.matrices.insert(matrix, self.tape.matrices.len() - 1);
        self.tape.matrices.len() - 1
    }
}

/// One loop under construction: blocks are used again as soon as their vector is done with.
struct RowLoop<'s, 'a> {
    schedule: &'s mut Schedule<'a>,
    rows: usize,
    body: Vec<RowStep>,
    spreads: Vec<(Store, Scalar)>,
    spread_stores: BTreeMap<Value, Store>,
    /// Where the vectors of this loop stand that are not kept whole.
    blocks: BTreeMap<Value, Store>,
    free: Vec<Store>,
    /// The last position in the body that reads a value.
    last: BTreeMap<Value, usize>,
}

impl RowLoop<'_, '_> {
    fn run(&mut self, body: &[Value], reductions: &[Value]) {
        let graph = self.schedule.graph;
        for (at, &v) in body.iter().enumerate() {
            for operand in graph.operands(v) {
                self.last.insert(operand, at);
            }
        }
        for &v in reductions {
            for operand in graph.operands(v) {
                self.last.insert(operand, usize::MAX);
            }
        }
        self.free = (0..self.schedule.tape.stores.len())
            .filter(|&at| self.schedule.tape.stores[at] == StoreForm::Block)
            .collect();
        for (at, &v) in body.iter().enumerate() {
            let step = self.step(v);
            self.body.push(step);
            self.schedule.tape.cost += self.rows as f64 * cost::of(&graph.node(v));
            if let Node::Dot(matrix, _) = graph.node(v) {
                let columns = graph.matrices[matrix.0].columns.len();
                self.schedule.tape.cost += (self.rows * columns) as f64;
            }
            for operand in graph.operands(v) {
                if self.last.get(&operand) == Some(&at)
                    && let Some(store) = self.blocks.get(&operand)
                    && !self.free.contains(store)
                {
                    self.free.push(*store);
                }
            }
        }
    }

    /// The place for a vector made in this loop.
    fn target(&mut self, v: Value) -> Store {
        if let Some(&store) = self.schedule.store.get(&v) {
            return store;
        }
        let store = self.block();
        self.blocks.insert(v, store);
        store
    }

    fn block(&mut self) -> Store {
        match self.free.pop() {
            Some(store) => store,
            None => self.schedule.new_store(StoreForm::Block),
        }
    }

    /// Where an operand's rows stand, spread over rows and lanes if need be.
    fn operand(&mut self, v: Value) -> Store {
        if let Some(&store) = self.blocks.get(&v).or_else(|| self.schedule.store.get(&v)) {
            return store;
        }
        match self.schedule.graph.node(v) {
            Node::Data(at) => {
                let known = self.schedule.data_stores.get(&at);
                if known.is_some() || self.schedule.spread_rows + self.rows <= SPREAD_ROWS {
                    if known.is_none() {
                        self.schedule.spread_rows += self.rows;
                    }
                    return self.schedule.data_store(at);
                }
                let data = self.schedule.tape_data(at);
                let store = self.block();
                self.body.push(RowStep::Spread(store, data));
                self.blocks.insert(v, store);
                store
            }
            Node::Constant(bits) => {
                if let Some(&store) = self.schedule.constant_stores.get(&bits) {
                    return store;
                }
                let store = self
                    .schedule
                    .new_store(StoreForm::Constant(f64::from_bits(bits)));
                self.schedule.constant_stores.insert(bits, store);
                store
            }
            _ => {
                if let Some(&store) = self.spread_stores.get(&v) {
                    return store;
                }
                // Filled before the first block, so never shared with what the body makes.
                let store = self.schedule.new_store(StoreForm::Spread);
                self.spreads.push((store, self.schedule.scalar[&v]));
                self.spread_stores.insert(v, store);
                store
            }
        }
    }

    fn step(&mut self, v: Value) -> RowStep {
        match self.schedule.graph.node(v) {
            Node::Unary(op, a) => {
                let a = self.operand(a);
                RowStep::Unary(op, self.target(v), a)
            }
            Node::Binary(op, a, b) => {
                let (a, b) = (self.operand(a), self.operand(b));
                RowStep::Binary(op, self.target(v), a, b)
            }
            Node::Ternary(op, a, b, c) => {
                let (a, b, c) = (self.operand(a), self.operand(b), self.operand(c));
                RowStep::Ternary(op, self.target(v), a, b, c)
            }
            Node::Call(function, a, b, c) => {
                let arguments = [a, b, c].map(|a| self.operand(a));
                RowStep::Call(function, self.target(v), arguments)
            }
            Node::Gather(a, index) => {
                let from = self.schedule.whole_store(a);
                let length = self.schedule.graph.shape_of(a).len();
                if self.schedule.graph.known_values(index).is_some() {
                    let table = self.schedule.table(index, length);
                    return RowStep::Gather(self.target(v), from, table);
                }
                let index = self.operand(index);
                RowStep::Pick(self.target(v), from, length, index)
            }
            Node::Dot(matrix, x) => {
                let tiles = self.schedule.tiles(matrix.0);
                let x = self.schedule.whole_store(x);
                RowStep::Dot(self.target(v), tiles, x)
            }
            Node::Constant(_)
            | Node::Input(_)
            | Node::Data(_)
            | Node::Reduce(..)
            | Node::Element(..) => {
                unreachable!("given before the loop, or numbers")
            }
        }
    }
}
