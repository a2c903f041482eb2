//! The only printing. A reader who has gone away (`| head`) is not an error.

use std::io::{self, Write};

/// Writes text to stdout. Fails only when the bytes could not be written to a reader who is there.
pub fn say(text: &str) -> io::Result<()> {
    let mut out = io::stdout().lock();
    let written = out.write_all(text.as_bytes()).and_then(|()| out.flush());
    match written {
        Err(fault) if fault.kind() == io::ErrorKind::BrokenPipe => Ok(()),
        other => other,
    }
}

/// Writes a message to stderr, best as can be: there is nobody left to tell when that fails.
pub fn tell(text: &str) {
    let mut err = io::stderr().lock();
    let _ = err.write_all(text.as_bytes());
    let _ = err.write_all(b"\n");
}
