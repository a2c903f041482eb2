//! Arguments, one file a command, the registry of families and methods, progress, exit status, and the
//! only printing.

mod arguments;
mod catalogue;
mod check;
mod list;
mod outcome;
mod output;
mod own_fault;
mod progress;
mod registry;
mod run;
mod seal;
mod signals;
mod status;
mod study;
mod taken;
mod verify;

pub use own_fault::watch as watch_own_faults;
pub use registry::FAMILIES;
pub use status::Status;

use arguments::{Arguments, Command};
use clap::Parser;

/// Runs one command line and gives the exit status.
pub fn run(arguments: impl Iterator<Item = std::ffi::OsString>) -> u8 {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(told) => {
            let _ = told.print();
            let status = if told.use_stderr() {
                Status::Usage
            } else {
                Status::Done
            };
            return status.code();
        }
    };
    let status = match arguments.command {
        Command::Check { study } => check::check(&study),
        Command::Run {
            study,
            into,
            threads,
            json,
        } => run::run(&study, &into, threads, json),
        Command::Seal { study, into } => seal::seal(&study, &into),
        Command::Verify {
            record,
            blocks,
            fresh,
            seed,
            threads,
            json,
        } => {
            let ask = verify::Ask {
                blocks,
                fresh,
                seed: seed.as_deref(),
                threads,
                json,
            };
            verify::verify(&record, &ask)
        }
        Command::List {
            folder,
            with,
            only,
            json,
        } => list::list(&folder, with.as_deref(), only, json),
        Command::Catalogue { list } => catalogue::catalogue(list),
    };
    status.code()
}
