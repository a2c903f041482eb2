//! Arguments in, exit status out.

fn main() -> std::process::ExitCode {
    std::process::ExitCode::from(odograph::cli::run(std::env::args_os()))
}
