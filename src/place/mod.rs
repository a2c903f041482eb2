//! Places in files, faults found there, and nearest known names.

mod fault;
mod nearest;
mod show;
mod source;

pub use fault::{Fault, Faults};
pub use nearest::nearest;
pub use show::{Look, show};
pub use source::{Place, Source, Text};
