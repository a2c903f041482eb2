//! Odograph: Markov chain Monte Carlo studies from a text file, with the error of each figure and the
//! grounds it stands on.
//!
//! The way through the house, one direction only:
//!
//! ```text
//! study file -> Plan -> Courses -> Blocks of draws -> trail, estimates -> grounds -> report -> record
//! (parse,      (every   (chains    (unit of work,     (hash chain,       (why it     (pure       (folder with
//!  locate       default  under      checkpoint and     errors, R-hat)     holds)      functions)  checksums)
//!  errors)      said)    way)       digest)
//! ```
//!
//! A room imports only from rooms above it in this list; `tests/direction.rs` checks it.

pub mod canon;
pub mod cli;
pub mod course;
pub mod engine;
pub mod estimates;
pub mod formula;
pub mod grounds;
pub mod laws;
pub mod maths;
pub mod methods;
pub mod models;
pub mod place;
pub mod plan;
pub mod random;
pub mod reading;
pub mod record;
pub mod replay;
pub mod report;
pub mod study;
