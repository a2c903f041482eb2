//! The house rules that a compiler does not check: a room imports only from rooms above it, only `cli`
//! prints, files stay short.

use std::fs;
use std::path::{Path, PathBuf};

/// The rooms in their order; each may import from those before it.
const ROOMS: [&str; 19] = [
    "place",
    "canon",
    "maths",
    "random",
    "reading",
    "laws",
    "formula",
    "course",
    "plan",
    "study",
    "methods",
    "models",
    "estimates",
    "grounds",
    "engine",
    "report",
    "record",
    "replay",
    "cli",
];

/// Past this, look for the seam.
const LONGEST: usize = 600;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn rust_files(folder: &Path, into: &mut Vec<PathBuf>) {
    let mut entries: Vec<PathBuf> = fs::read_dir(folder)
        .expect("a readable folder")
        .map(|entry| entry.expect("a readable entry").path())
        .collect();
    entries.sort();
    for path in entries {
        if path.is_dir() {
            rust_files(&path, into);
        } else if path.extension().is_some_and(|e| e == "rs") {
            into.push(path);
        }
    }
}

fn files(folder: &str) -> Vec<PathBuf> {
    let mut found = Vec::new();
    rust_files(&root().join(folder), &mut found);
    found
}

/// The code of a file with comments and the inside of string literals blanked out, line by line.
fn code(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some(first) = rest.chars().next() {
        if rest.starts_with("//") {
            rest = rest.find('\n').map_or("", |end| &rest[end..]);
        } else if rest.starts_with("/*") {
            let end = rest.find("*/").map_or(rest.len(), |end| end + 2);
            out.extend(rest[..end].chars().filter(|&c| c == '\n'));
            rest = &rest[end..];
        } else if let Some((inside, after)) = string_at(rest) {
            out.push('"');
            out.extend(inside.chars().filter(|&c| c == '\n'));
            out.push('"');
            rest = after;
        } else if rest.starts_with("'\"'") || rest.starts_with("'\\\"'") {
            rest = &rest[rest[1..].find("'").map_or(rest.len(), |i| i + 2)..];
        } else {
            out.push(first);
            rest = &rest[first.len_utf8()..];
        }
    }
    out
}

/// The inside of a string literal that begins here, and what follows it.
fn string_at(text: &str) -> Option<(&str, &str)> {
    if let Some(raw) = text.strip_prefix('r') {
        let hashes = raw.chars().take_while(|&c| c == '#').count();
        let body = raw[hashes..].strip_prefix('"')?;
        let close = format!("\"{}", "#".repeat(hashes));
        let end = body.find(&close)?;
        return Some((&body[..end], &body[end + close.len()..]));
    }
    let body = text.strip_prefix('"')?;
    let mut escaped = false;
    for (i, c) in body.char_indices() {
        match c {
            _ if escaped => escaped = false,
            '\\' => escaped = true,
            '"' => return Some((&body[..i], &body[i + 1..])),
            _ => {}
        }
    }
    None
}

/// Every room that the code names by `crate::ROOM`, alone or in a group `crate::{a, b::c}`, with its line.
fn imports(code: &str) -> Vec<(usize, String)> {
    let mut found = Vec::new();
    for (at, _) in code.match_indices("crate::") {
        let before = code[..at].chars().next_back();
        if before.is_some_and(|c| c.is_alphanumeric() || c == '_' || c == '$') {
            continue;
        }
        let line = code[..at].matches('\n').count() + 1;
        let after = &code[at + "crate::".len()..];
        let word = |text: &str| -> String {
            text.trim_start()
                .chars()
                .take_while(|c| c.is_alphanumeric() || *c == '_')
                .collect()
        };
        if let Some(group) = after.strip_prefix('{') {
            let mut depth = 0;
            let mut item = true;
            for (i, c) in group.char_indices() {
                if item && depth == 0 {
                    found.push((line, word(&group[i..])));
                    item = false;
                }
                match c {
                    '{' => depth += 1,
                    '}' if depth == 0 => break,
                    '}' => depth -= 1,
                    ',' if depth == 0 => item = true,
                    _ => {}
                }
            }
        } else {
            found.push((line, word(after)));
        }
    }
    found.retain(|(_, room)| !room.is_empty());
    found
}

/// The index of the room that a source file stands in; `None` for `lib.rs` and `main.rs`.
fn room_of(path: &Path) -> Option<usize> {
    let inside = path.strip_prefix(root().join("src")).expect("under src");
    let first = inside.components().next()?.as_os_str().to_str()?;
    let name = first.strip_suffix(".rs").unwrap_or(first);
    ROOMS.iter().position(|room| *room == name)
}

fn shown(path: &Path) -> String {
    path.strip_prefix(root())
        .unwrap_or(path)
        .display()
        .to_string()
}

fn read(path: &Path) -> String {
    fs::read_to_string(path).expect("readable source")
}

#[test]
fn a_room_imports_only_from_rooms_above_it() {
    let mut wrong = Vec::new();
    for path in files("src") {
        let Some(room) = room_of(&path) else { continue };
        for (line, name) in imports(&code(&read(&path))) {
            match ROOMS.iter().position(|r| *r == name) {
                Some(other) if other <= room => {}
                Some(_) => wrong.push(format!(
                    "{}:{line}: {name} stands below {}",
                    shown(&path),
                    ROOMS[room]
                )),
                None => wrong.push(format!(
                    "{}:{line}: {name} is not a room (a macro or item at the root of the crate?)",
                    shown(&path)
                )),
            }
        }
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

#[test]
fn every_room_is_in_the_order_and_in_the_library() {
    let library = code(&read(&root().join("src/lib.rs")));
    for room in ROOMS {
        assert!(
            library.contains(&format!("pub mod {room};")),
            "src/lib.rs lacks {room}"
        );
    }
    for path in files("src") {
        let name = shown(&path);
        assert!(
            room_of(&path).is_some() || name == "src/lib.rs" || name == "src/main.rs",
            "{name} stands in no room"
        );
    }
}

#[test]
fn only_the_command_line_prints() {
    let mut wrong = Vec::new();
    for path in files("src") {
        if room_of(&path).is_some_and(|room| ROOMS[room] == "cli") {
            continue;
        }
        let code = code(&read(&path));
        for (i, line) in code.lines().enumerate() {
            let prints = ["println!", "print!", "dbg!", "stdout()", "stderr()"]
                .iter()
                .any(|word| line.contains(word));
            if prints {
                wrong.push(format!("{}:{}: {}", shown(&path), i + 1, line.trim()));
            }
        }
    }
    assert!(wrong.is_empty(), "\n{}", wrong.join("\n"));
}

#[test]
#[expect(clippy::disallowed_macros, reason = "the report of a test")]
fn files_are_short() {
    let mut sizes: Vec<(usize, String)> = ["src", "tests"]
        .into_iter()
        .flat_map(files)
        .map(|path| (read(&path).lines().count(), shown(&path)))
        .collect();
    sizes.sort();
    let median = sizes[sizes.len() / 2].0;
    println!("{} files, median {median} lines; the longest:", sizes.len());
    for (lines, name) in sizes.iter().rev().take(10) {
        println!("{lines:>5} {name}");
    }
    let long: Vec<&(usize, String)> = sizes.iter().filter(|(lines, _)| *lines > LONGEST).collect();
    assert!(long.is_empty(), "past {LONGEST} lines: {long:?}");
    let main = read(&root().join("src/main.rs")).lines().count();
    assert!(main < 80, "src/main.rs has {main} lines");
}

/// The reader of this file is itself put to faults that it must find.
#[test]
fn planted_imports_are_found() {
    let text = "// crate::cli\nuse crate::{maths::{a, b}, cli, place};\nlet s = \"crate::cli\"; \
                let r = r#\"crate::cli\"#;\ncrate::engine::go();\n/* crate::cli */ mycrate::cli();\n";
    let found: Vec<(usize, String)> = imports(&code(text));
    let names: Vec<(usize, &str)> = found.iter().map(|(l, n)| (*l, n.as_str())).collect();
    assert_eq!(
        names,
        [(2, "maths"), (2, "cli"), (2, "place"), (4, "engine")]
    );
}
