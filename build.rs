//! Tells the program with what it was built: compiler, target and, of a release, the commit. Nothing of it reaches a
//! digit. Without git or outside a clone the commit is not known, and the build goes on.

#![expect(
    clippy::disallowed_macros,
    clippy::disallowed_methods,
    reason = "a build script speaks to cargo by its output and is asked by the environment"
)]

use std::env;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

fn main() {
    println!("cargo:rerun-if-changed=build.rs");
    let variable = |name: &str| env::var(name).unwrap_or_default();
    tell("TARGET", &variable("TARGET"));
    tell("RUSTC", &compiler(&variable("RUSTC")));
    // A build under development changes between commits, and would be made again at each: it names none.
    let commit = match variable("PROFILE").as_str() {
        "release" => commit(&Path::new(&variable("CARGO_MANIFEST_DIR")).join(".git")),
        _ => None,
    };
    tell("COMMIT", commit.as_deref().unwrap_or_default());
}

fn tell(name: &str, value: &str) {
    println!("cargo:rustc-env=ODOGRAPH_BUILT_{name}={value}");
}

/// The first line of `rustc --version`.
fn compiler(rustc: &str) -> String {
    let told = Command::new(rustc).arg("--version").output();
    let told = told.map_or(Vec::new(), |output| output.stdout);
    let told = String::from_utf8_lossy(&told).into_owned();
    told.lines().next().unwrap_or_default().to_owned()
}

/// The commit that is checked out, read from the files of the clone; what was changed since is not seen.
fn commit(git: &Path) -> Option<String> {
    let (own, shared) = folders(git)?;
    watch(&own.join("HEAD"));
    let head = fs::read_to_string(own.join("HEAD")).ok()?;
    let found = match head.trim().strip_prefix("ref: ") {
        None => head.trim().to_owned(),
        Some(name) => {
            watch(&shared.join(name));
            let loose = fs::read_to_string(shared.join(name)).ok();
            loose.or_else(|| packed(&shared, name))?.trim().to_owned()
        }
    };
    let whole = matches!(found.len(), 40 | 64) && found.bytes().all(|b| b.is_ascii_hexdigit());
    whole.then_some(found)
}

/// Where a clone keeps its own head, and where its branches: the same, but of a second working tree, whose `.git` is
/// a file that names the place.
fn folders(git: &Path) -> Option<(PathBuf, PathBuf)> {
    if git.is_dir() {
        return Some((git.to_owned(), git.to_owned()));
    }
    let named = fs::read_to_string(git).ok()?;
    let own = git.parent()?.join(named.trim().strip_prefix("gitdir: ")?);
    let shared = match fs::read_to_string(own.join("commondir")) {
        Ok(common) => own.join(common.trim()),
        Err(_) => own.clone(),
    };
    Some((own, shared))
}

fn packed(shared: &Path, name: &str) -> Option<String> {
    let list = shared.join("packed-refs");
    let text = fs::read_to_string(&list).ok()?;
    watch(&list);
    text.lines().find_map(|line| {
        line.strip_suffix(name)?
            .strip_suffix(' ')
            .map(str::to_owned)
    })
}

/// Builds anew when the file changes; of one that is not there, when its folder does, which is where it would come.
fn watch(file: &Path) {
    let there = file.ancestors().find(|path| path.exists());
    if let Some(there) = there {
        println!("cargo:rerun-if-changed={}", there.display());
    }
}
