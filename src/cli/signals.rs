//! Ctrl-C, SIGTERM and SIGHUP: the first ends the run after its current blocks, the second at once.

use super::output::tell;
use super::status::Status;
use std::sync::atomic::{AtomicBool, Ordering};

/// Set by the first signal.
pub static STOP: AtomicBool = AtomicBool::new(false);

/// Whether a signal came.
pub fn stopped() -> bool {
    STOP.load(Ordering::Relaxed)
}

/// Puts the handler in place. Where that is not possible a signal ends the program at once; the journal
/// stands that too.
pub fn watch() {
    let handler = || {
        if STOP.swap(true, Ordering::Relaxed) {
            std::process::exit(Status::Interrupted.code().into());
        }
        tell("\nending after the current blocks; once more ends at once");
    };
    if ctrlc::set_handler(handler).is_err() {
        tell("signals cannot be caught here; the journal stands a sudden end as well");
    }
}
