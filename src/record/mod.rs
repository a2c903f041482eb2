//! The folder that a run leaves: its layout, its lock, its journal.

mod fault;
mod frame;
mod journal;
mod scan;
mod sync;

pub use fault::RecordFault;
pub use journal::JournalFile;
