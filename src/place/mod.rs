//! Places in files, faults found there, and nearest known names.

mod fault;
mod nearest;

pub use fault::{Fault, Faults, Place, Source, Text};
pub use nearest::nearest;
