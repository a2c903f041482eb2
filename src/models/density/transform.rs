//! From the unconstrained coordinate of a kernel to the support of an unknown, with the Jacobian.

use crate::laws::{Algebra, Value};
use crate::maths::{Binary, Unary};

/// How an unknown is reached from its coordinate `z`. Bounds are values of the graph: they may depend on
/// other unknowns.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Transform {
    /// x = z; integers as well.
    Identity,
    /// x = lower + e^z
    Above { lower: Value },
    /// x = upper - e^z
    Below { upper: Value },
    /// x = lower + (upper - lower) / (1 + e^-z)
    Between { lower: Value, upper: Value },
}

impl Transform {
    /// The transform to a support with these bounds (`None`: infinite).
    pub fn to(lower: Option<Value>, upper: Option<Value>, integer: bool) -> Transform {
        match (lower, upper) {
            _ if integer => Transform::Identity,
            (None, None) => Transform::Identity,
            (Some(lower), None) => Transform::Above { lower },
            (None, Some(upper)) => Transform::Below { upper },
            (Some(lower), Some(upper)) => Transform::Between { lower, upper },
        }
    }

    /// The unknown at coordinate `z`, and the log of |dx/dz| (`None` where it is 0 everywhere).
    pub fn forward(self, a: &mut dyn Algebra, z: Value) -> (Value, Option<Value>) {
        match self {
            Transform::Identity => (z, None),
            Transform::Above { lower } => {
                let step = a.unary(Unary::Exp, z);
                (a.binary(Binary::Add, lower, step), Some(z))
            }
            Transform::Below { upper } => {
                let step = a.unary(Unary::Exp, z);
                (a.binary(Binary::Subtract, upper, step), Some(z))
            }
            Transform::Between { lower, upper } => {
                let width = a.binary(Binary::Subtract, upper, lower);
                let share = a.unary(Unary::Logistic, z);
                let step = a.binary(Binary::Multiply, width, share);
                let x = a.binary(Binary::Add, lower, step);
                // ln(s (1 - s)) = z - 2 ln(1 + e^z), which does not cancel in either tail.
                let two = a.constant(2.0);
                let soft = a.unary(Unary::Softplus, z);
                let both = a.binary(Binary::Multiply, two, soft);
                let slope = a.binary(Binary::Subtract, z, both);
                let ln_width = a.unary(Unary::Ln, width);
                (x, Some(a.binary(Binary::Add, ln_width, slope)))
            }
        }
    }

    /// The coordinate of the unknown's value `x`; not finite when `x` lies outside the support.
    pub fn inverse(self, a: &mut dyn Algebra, x: Value) -> Value {
        match self {
            Transform::Identity => x,
            Transform::Above { lower } => {
                let step = a.binary(Binary::Subtract, x, lower);
                a.unary(Unary::Ln, step)
            }
            Transform::Below { upper } => {
                let step = a.binary(Binary::Subtract, upper, x);
                a.unary(Unary::Ln, step)
            }
            Transform::Between { lower, upper } => {
                let below = a.binary(Binary::Subtract, x, lower);
                let above = a.binary(Binary::Subtract, upper, x);
                let odds = a.binary(Binary::Divide, below, above);
                a.unary(Unary::Ln, odds)
            }
        }
    }
}
