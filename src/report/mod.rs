//! What a reader sees, as pure functions of plan, summaries and grounds: `summary.json`, `summary.csv`,
//! `grounds.json`, the page, and plain text for a terminal.

mod crate_metadata;
mod csv;
mod figures;
mod grounds_html;
mod grounds_text;
mod html;
mod json;
mod layout;
mod outcome;
mod page;
#[cfg(test)]
mod samples;
#[cfg(test)]
mod snapshots;
mod sweep;
mod text;

pub use crate_metadata::crate_metadata;
pub use csv::summary_csv;
pub use figures::figures_text;
pub use grounds_text::grounds_text;
pub use json::{grounds_json, summary_json};
pub use outcome::{CLOSED_BEFORE, Outcome, grounds_of};
pub use page::report_html;
pub use sweep::sweep_text;
pub use text::{FOOT, run_text};

/// Columns of plain text.
pub const WIDTH: usize = 100;
