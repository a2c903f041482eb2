//! Formulas: tokens, parser, tree, shapes, function table, compiler, tape.
//!
//! ```text
//! text -> words -> tree (Expr) -> operations (Graph) -> Program -> Machine
//!         token    parser         lower, simplify       program
//! ```

pub mod shape;

mod expr;
mod function;
mod graph;
mod law_term;
mod lower;
mod parser;
mod program;
mod scope;
mod simplify;
mod token;

pub use expr::{Call, Expr, Form, Infix, Prefix};
pub use function::{Function, functions};
pub use graph::{Graph, Matrix};
pub use law_term::LawTerm;
pub use lower::{lower, lower_law};
pub use parser::parse;
pub use program::{Machine, Program};
pub use scope::{Entity, Scope, Term};
pub use shape::{Axis, Kind, Over, Shape};

#[cfg(test)]
mod tests;
