//! Formulas: tokens, parser, tree, shapes, function table, compiler, tape.

pub mod shape;

pub use shape::{Axis, Kind, Over, Shape};
