//! The folder that a run leaves: its lock and journal while it is worked on, the record when it is sealed.

mod bag;
mod begun;
pub mod checkpoints;
mod circumstances;
mod columnar;
pub mod draws_file;
mod fault;
mod folder;
mod frame;
mod index;
mod inputs;
mod journal;
mod lock;
mod moment;
mod program;
mod room;
mod scan;
mod seal;
pub mod survey;
mod sync;
pub mod trail_file;

pub use bag::{
    CIRCUMSTANCES, check as check_bag, label, label_differences, payload, pitfalls,
    write as write_bag,
};
pub use checkpoints::Checkpoints;
pub use circumstances::Circumstances;
pub use draws_file::DrawsFile;
pub use fault::RecordFault;
pub use folder::{Entry, Folder, Open, Seen, read};
pub use index::{Index, written};
pub use inputs::{keep as keep_inputs, kept};
pub use journal::JournalFile;
pub use room::{Needs, check as check_room, needs, size};
pub use scan::Cut;
pub use seal::{CRATE_METADATA, Sealing, seal, starts};
