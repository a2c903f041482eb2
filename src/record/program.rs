//! With which program and on which machine a run was worked on, for its circumstances; outside every digest.

use super::{bag, moment};
use crate::canon::{self, Json};
use std::env;
use std::num::NonZeroUsize;

/// The locked versions of everything this program was built from.
const LOCK: &[u8] = include_bytes!("../../Cargo.lock");

/// What is known of program and machine; null where it is not.
pub fn members() -> Vec<(&'static str, Json)> {
    let known = |text: &str| match text {
        "" => Json::Null,
        text => Json::text(text),
    };
    let executable = executable().map_or(Json::Null, Json::text);
    vec![
        ("version", known(env!("CARGO_PKG_VERSION"))),
        ("commit", known(env!("ODOGRAPH_BUILT_COMMIT"))),
        ("executable_sha256", executable),
        ("cargo_lock_sha256", Json::text(canon::sha256_hex(LOCK))),
        ("compiler", known(env!("ODOGRAPH_BUILT_RUSTC"))),
        ("target", known(env!("ODOGRAPH_BUILT_TARGET"))),
        ("host", Json::text(moment::host())),
        ("system", known(env::consts::OS)),
        ("processor", known(env::consts::ARCH)),
        (
            "processor_features",
            Json::array(features().into_iter().map(Json::text)),
        ),
        ("cores", cores()),
        ("process", Json::Count(std::process::id().into())),
    ]
}

/// SHA-256 of the file of the running program.
fn executable() -> Option<String> {
    let sha256 = bag::sha256(&env::current_exe().ok()?).ok()?;
    Some(sha256)
}

#[expect(
    clippy::disallowed_methods,
    reason = "circumstances; no digit sees the number of cores"
)]
fn cores() -> Json {
    let cores = std::thread::available_parallelism().map(NonZeroUsize::get);
    cores.map_or(Json::Null, |cores| Json::Count(cores as u64))
}

/// Instructions that the processor has beyond those of every processor of its kind, as found at run time.
fn features() -> Vec<&'static str> {
    let mut found = Vec::new();
    #[cfg(any(target_arch = "x86", target_arch = "x86_64"))]
    {
        macro_rules! ask {
            ($($name:tt)*) => {
                $(if std::arch::is_x86_feature_detected!($name) { found.push($name); })*
            };
        }
        ask!("sse2" "sse4.1" "sse4.2" "popcnt" "avx" "avx2" "fma" "bmi1" "bmi2" "avx512f" "avx512dq" "avx512bw" "avx512vl" "sha");
    }
    #[cfg(target_arch = "aarch64")]
    {
        macro_rules! ask {
            ($($name:tt)*) => {
                $(if std::arch::is_aarch64_feature_detected!($name) { found.push($name); })*
            };
        }
        ask!("neon" "fp16" "sha2" "sve" "sve2");
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_always_known_is_said() {
        let members = members();
        let find = |name: &str| {
            let found = members.iter().find(|(member, _)| *member == name);
            found.expect("a member").1.clone()
        };
        for digest in ["executable_sha256", "cargo_lock_sha256"] {
            let digest = find(digest);
            assert!(digest.as_text().and_then(canon::unhex).is_some());
        }
        let compiler = find("compiler");
        assert!(compiler.as_text().is_some_and(|c| c.starts_with("rustc ")));
        let target = find("target");
        let arch = env::consts::ARCH;
        // i686 calls itself x86.
        let alike = |target: &str| target.starts_with(arch) || arch == "x86";
        assert!(target.as_text().is_some_and(alike), "{target:?}");
    }
}
