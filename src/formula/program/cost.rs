//! What an operation costs, in additions, about. Enters plans (block lengths), so it is the same everywhere.

use super::super::graph::Node;
use crate::maths::{Binary, Ternary, Unary};

/// Of one element.
pub(super) fn of(node: &Node) -> f64 {
    match node {
        Node::Constant(_) | Node::Input(_) | Node::Data(_) => 0.0,
        Node::Unary(op, _) => unary(*op),
        Node::Binary(op, ..) => binary(*op),
        Node::Ternary(Ternary::Select, ..) => 1.0,
        Node::Ternary(..) => 600.0,
        Node::Reduce(..) | Node::Element(..) | Node::Dot(..) => 1.0,
        Node::Gather(..) => 2.0,
        Node::Call(..) => 1000.0,
    }
}

/// Whether an operation on one number is done faster lane by lane than in eight lanes at once.
pub(super) fn is_slow_unary(op: Unary) -> bool {
    matches!(
        op,
        Unary::Tan
            | Unary::Asin
            | Unary::Acos
            | Unary::Atan
            | Unary::Sinh
            | Unary::Cosh
            | Unary::Digamma
            | Unary::Erf
            | Unary::Erfc
    )
}

pub(super) fn is_slow_binary(op: Binary) -> bool {
    matches!(
        op,
        Binary::GammaP
            | Binary::GammaQ
            | Binary::LnGammaP
            | Binary::LnGammaQ
            | Binary::GammaQuantile
            | Binary::LnBeta
    )
}

fn unary(op: Unary) -> f64 {
    match op {
        Unary::Negate
        | Unary::Absolute
        | Unary::Sign
        | Unary::Square
        | Unary::Floor
        | Unary::Ceil
        | Unary::Round
        | Unary::Not => 1.0,
        Unary::Sqrt => 4.0,
        Unary::Exp | Unary::Ln | Unary::Sin | Unary::Cos | Unary::Logistic => 10.0,
        Unary::Expm1 | Unary::Log1p | Unary::Tanh | Unary::Softplus => 15.0,
        Unary::Sinh | Unary::Cosh | Unary::Tan | Unary::Asin | Unary::Acos | Unary::Atan => 30.0,
        Unary::LnGamma | Unary::Digamma | Unary::Erf | Unary::Erfc | Unary::NormalCdf => 50.0,
        Unary::LnNormalCdf | Unary::NormalQuantile => 80.0,
    }
}

fn binary(op: Binary) -> f64 {
    match op {
        Binary::Divide => 4.0,
        Binary::Power => 40.0,
        Binary::LnBeta => 150.0,
        Binary::GammaP | Binary::GammaQ | Binary::LnGammaP | Binary::LnGammaQ => 400.0,
        Binary::GammaQuantile => 3000.0,
        _ => 1.0,
    }
}
