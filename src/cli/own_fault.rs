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

#[cfg(test)]
mod tests {
    use super::*;
    use std::process::Command;

    const ASKED: &str = "ODOGRAPH_TEST_PANIC";

    /// Does nothing unless the next test asks: then this process is the child that panics.
    #[test]
    #[expect(clippy::disallowed_methods, reason = "the parent's word to the child")]
    fn child() {
        if std::env::var_os(ASKED).is_some() {
            watch();
            let walk = std::thread::spawn(|| panic!("planted {}", 7));
            let _ = walk.join();
            unreachable!("the hook ends the process");
        }
    }

    #[test]
    fn a_panic_on_any_thread_ends_with_70_and_plain_words() {
        let this = std::env::current_exe().unwrap();
        let ended = Command::new(this)
            .args(["--exact", "cli::own_fault::tests::child", "--nocapture"])
            .env(ASKED, "1")
            .output()
            .unwrap();
        let said = String::from_utf8_lossy(&ended.stderr);
        assert_eq!(ended.status.code(), Some(70), "{said}");
        assert!(
            said.contains("its own fault, not that of your study: planted 7 (src/cli"),
            "{said}"
        );
    }
}
