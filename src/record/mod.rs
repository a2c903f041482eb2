//! The folder that a run leaves: its layout, its lock, its journal, its circumstances, the room it needs.

mod circumstances;
mod fault;
mod folder;
mod frame;
mod inputs;
mod journal;
mod lock;
mod moment;
mod room;
mod scan;
mod seal;
mod sync;

pub use circumstances::Circumstances;
pub use fault::RecordFault;
pub use folder::{Entry, Folder, Open, read};
pub use inputs::keep as keep_inputs;
pub use journal::JournalFile;
pub use room::{Needs, check as check_room, needs, size};
pub use scan::Cut;
pub use seal::check as check_seal;
