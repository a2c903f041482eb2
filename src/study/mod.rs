//! The file's top level, the sweep, and resolution into a Plan.

mod ensemble;
mod estimand;
mod frame;
mod goal;
mod overlay;
mod point;
mod resolve;
mod shared;
mod sweep;

#[cfg(test)]
mod tests;

pub use resolve::{resolve, resolve_text};
