//! Elementary and special functions with the same bits on every target, sums of fixed shape, and the
//! operations that formulas are made of.

pub mod operation;

pub use operation::{Binary, Ternary, Unary};
