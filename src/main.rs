//! Arguments in, exit status out.

use odograph::cli;
use std::process::ExitCode;

fn main() -> ExitCode {
    cli::watch_own_faults();
    ExitCode::from(cli::run(std::env::args_os()))
}
