//! A panic is the program's own fault, and is said plainly.

use super::output::tell;
use super::status::Status;
use std::panic::PanicHookInfo;

/// From here on a panic anywhere ends the program with its own exit status.
pub fn watch() {
    std::panic::set_hook(Box::new(|panic| {
        tell(&words(panic));
        std::process::exit(Status::Own.code().into());
    }));
}

fn words(panic: &PanicHookInfo) -> String {
    let said = panic.payload();
    let said = said
        .downcast_ref::<&str>()
        .copied()
        .or_else(|| said.downcast_ref::<String>().map(String::as_str))
        .unwrap_or("no words");
    let place = panic.location().map_or(String::new(), |at| {
        format!(" ({}:{})", at.file(), at.line())
    });
    format!(
        "\nodograph failed, and this is its own fault, not that of your study: {said}{place}\n\
         What was journalled stands; the same command goes on from there. Please report this with the \
         study that led to it."
    )
}
