//! Two operations of plain arithmetic as one step: small programs spend most of their time on the way from one
//! step to the next, and on results that wait in memory for the next step.

use super::tape::{Output, Scalar, Step, Tape};
use crate::maths::{Binary, Unary};

/// The first operation of a pair, of two numbers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum First {
    Add,
    Subtract,
    Multiply,
}

/// What is done with its result, and a third number.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Second {
    Add,
    Subtract,
    SubtractFrom,
    Multiply,
    Square,
    Negate,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Pair {
    pub first: First,
    pub second: Second,
}

impl Pair {
    /// The pair on each of eight numbers.
    #[inline(always)]
    pub fn pack(self, a: &[f64; 8], b: &[f64; 8], c: &[f64; 8], out: &mut [f64; 8]) {
        macro_rules! each {
            ($x:ident, $y:ident, $z:ident => $value:expr) => {
                for k in 0..8 {
                    let ($x, $y, $z) = (a[k], b[k], c[k]);
                    out[k] = $value;
                }
            };
        }
        macro_rules! second {
            ($x:ident, $y:ident => $first:expr) => {
                match self.second {
                    Second::Add => each!($x, $y, z => $first + z),
                    Second::Subtract => each!($x, $y, z => $first - z),
                    Second::SubtractFrom => each!($x, $y, z => z - $first),
                    Second::Multiply => each!($x, $y, z => $first * z),
                    Second::Square => each!($x, $y, _z => $first * $first),
                    Second::Negate => each!($x, $y, _z => -$first),
                }
            };
        }
        match self.first {
            First::Add => second!(x, y => (x + y)),
            First::Subtract => second!(x, y => (x - y)),
            First::Multiply => second!(x, y => (x * y)),
        }
    }
}

/// Joins each operation whose result one other operation alone reads to that one. Every register is written
/// once, so operands may be read later than they were.
pub(super) fn join(tape: &mut Tape) {
    let mut reads = vec![0_usize; tape.scalars];
    for register in tape.steps.iter().flat_map(Step::reads) {
        reads[register] += 1;
    }
    for output in &tape.outputs {
        if let Output::Scalar(register) = *output {
            reads[register] += 1;
        }
    }
    let mut steps: Vec<Option<Step>> = Vec::with_capacity(tape.steps.len());
    // For each register the place of the step that makes it, if that can be the first of a pair.
    let mut firsts: Vec<Option<(usize, First, [Scalar; 2])>> = vec![None; tape.scalars];
    for step in std::mem::take(&mut tape.steps) {
        // Of two operands the one made later: the other has had time to arrive.
        let found = seconds(&step)
            .into_iter()
            .filter(|(made, ..)| reads[*made] == 1)
            .filter_map(|(made, second, out, other)| {
                let (from, first, [a, b]) = firsts[made]?;
                Some((
                    from,
                    Pair { first, second },
                    out,
                    [a, b, other.unwrap_or(a)],
                ))
            })
            .max_by_key(|(from, ..)| *from);
        let at = steps.len();
        if let Some((from, pair, out, operands)) = found {
            steps[from] = None;
            steps.push(Some(Step::Pair(pair, out, operands)));
            continue;
        }
        if let Some((first, out, operands)) = first(&step) {
            firsts[out] = Some((at, first, operands));
        }
        steps.push(Some(step));
    }
    tape.steps = steps.into_iter().flatten().collect();
}

/// A step as the first of a pair, with the register that it makes.
fn first(step: &Step) -> Option<(First, Scalar, [Scalar; 2])> {
    Some(match *step {
        Step::Binary(Binary::Add, out, a, b) => (First::Add, out, [a, b]),
        Step::Binary(Binary::Subtract, out, a, b) => (First::Subtract, out, [a, b]),
        Step::Binary(Binary::Multiply, out, a, b) => (First::Multiply, out, [a, b]),
        Step::Unary(Unary::Square, out, a) => (First::Multiply, out, [a, a]),
        _ => return None,
    })
}

/// The ways of a step to be the second of a pair: the operand from the first, the register that it makes, the
/// other operand.
fn seconds(step: &Step) -> Vec<(Scalar, Second, Scalar, Option<Scalar>)> {
    match *step {
        Step::Binary(op, out, a, b) => {
            let (left, right) = match op {
                Binary::Add => (Second::Add, Second::Add),
                Binary::Subtract => (Second::Subtract, Second::SubtractFrom),
                Binary::Multiply => (Second::Multiply, Second::Multiply),
                _ => return Vec::new(),
            };
            vec![(a, left, out, Some(b)), (b, right, out, Some(a))]
        }
        Step::Unary(Unary::Square, out, a) => vec![(a, Second::Square, out, None)],
        Step::Unary(Unary::Negate, out, a) => vec![(a, Second::Negate, out, None)],
        _ => Vec::new(),
    }
}
