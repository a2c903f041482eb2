//! Records and folders from a stranger: refused with a message, bounded in memory and time, nothing read or written
//! elsewhere.

use crate::common::{binary, odograph, text};
use crate::forger::{Forger, told};
use crate::{STUDY, honest, taken};
use odograph::course::{Phase, State};
use odograph::engine::trail::{self, StateHash};
use odograph::engine::{Finished, Journal};
use odograph::record::{JournalFile, trail_file};
use std::fs::{self, File};
use std::os::unix::fs::symlink;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::time::{Duration, Instant};

/// Bytes of addresses that a verification of a small record may take at most; threads reserve some.
const MEMORY: u64 = 4 << 30;
/// And seconds.
const LONGEST: Duration = Duration::from_secs(60);

/// `verify` held to bounded memory, by the shell's limit, and time.
fn verified(record: &Path) -> Output {
    let script = format!("ulimit -v {}; exec \"$0\" \"$@\"", MEMORY / 1024);
    let mut child = Command::new("sh")
        .args(["-c", &script, binary(), "verify", "--threads", "2"])
        .arg(record)
        .stdin(Stdio::null())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("a shell");
    let begun = Instant::now();
    while child.try_wait().expect("a child").is_none() {
        if begun.elapsed() > LONGEST {
            child.kill().expect("killed");
            panic!("verify of {} does not end", record.display());
        }
        std::thread::sleep(Duration::from_millis(20));
    }
    child.wait_with_output().expect("an output")
}

/// Alters a copy of the honest record; `verify` must exit 4 with these words.
fn refused(alter: impl FnOnce(&Forger), words: &[&str]) -> String {
    let (_folder, forger) = taken();
    alter(&forger);
    let output = verified(&forger.folder);
    let told = told(&output);
    assert_eq!(output.status.code(), Some(4), "{told}");
    for words in words {
        assert!(
            text(&output.stdout).contains(words),
            "{words} is missing in:\n{told}"
        );
    }
    told
}

/// Puts something else in the place of a file of the record.
fn instead(forger: &Forger, name: &str) -> PathBuf {
    let path = forger.folder.join(name);
    fs::remove_file(&path).expect("removed");
    path
}

#[test]
fn links_are_not_followed() {
    let folder = tempfile::tempdir().expect("a folder");
    let secret = folder.path().join("secret");
    fs::write(&secret, "a secret of this machine\n").expect("written");
    let mut names: Vec<&str> = vec!["data/study.toml", "data/plan.json", "data/inputs.json"];
    names.extend([
        "data/inputs/stations.csv",
        "data/trail.parquet",
        "data/summary.json",
    ]);
    names.extend([
        "data/draws/point-1.parquet",
        "data/checkpoints/point-1.parquet",
    ]);
    names.extend(["manifest-sha256.txt", "bag-info.txt", "circumstances.json"]);
    for name in names {
        let words = format!("{name} is neither a file nor a folder");
        let told = refused(
            |forger| symlink(&secret, instead(forger, name)).expect("a link"),
            &[&words],
        );
        assert!(!told.contains("a secret"), "{told}");
    }
    // A folder that is a link.
    let alter = |forger: &Forger| {
        let inner = forger.folder.join("data/inputs");
        let moved = folder.path().join("inputs");
        fs::rename(&inner, &moved).expect("moved");
        symlink(moved, inner).expect("a link");
    };
    refused(alter, &["data/inputs is neither a file nor a folder"]);
}

#[test]
fn pipes_and_devices_do_not_hang() {
    for name in [
        "data/plan.json",
        "data/trail.parquet",
        "data/draws/point-1.parquet",
    ] {
        let alter = |forger: &Forger| {
            let made = Command::new("mkfifo").arg(instead(forger, name)).status();
            assert!(made.expect("mkfifo runs").success());
        };
        refused(alter, &[&format!("{name} is neither a file nor a folder")]);
    }
    let alter = |forger: &Forger| {
        symlink("/dev/zero", instead(forger, "data/trail.parquet")).expect("a link");
    };
    refused(
        alter,
        &["data/trail.parquet is neither a file nor a folder"],
    );
}

#[test]
fn names_lead_nowhere_else() {
    let index = "data/inputs.json";
    for name in [
        "../../../../../../etc/passwd",
        "/etc/passwd",
        "..",
        ".hidden",
        "",
    ] {
        let alter = |forger: &Forger| {
            let json = format!("{{\n  \"stations.csv\": \"{name}\"\n}}\n");
            fs::write(forger.folder.join(index), json).expect("written");
            forger.sums();
        };
        let told = refused(alter, &["a copy does not have the name of a file"]);
        assert!(!told.contains("root:"), "{told}");
    }
    // A study that names a file of the machine finds no copy of it.
    let alter = |forger: &Forger| {
        let mut forger = forger.clone();
        forger.study("\"stations.csv\"", "\"/etc/passwd\"");
        forger.sums();
    };
    let told = refused(alter, &["no copy of /etc/passwd is kept"]);
    assert!(!told.contains("root:"), "{told}");
    let alter = |forger: &Forger| {
        let mut forger = forger.clone();
        forger.study(
            "draws = 800",
            "draws = 800\nstart = { file = \"../../secret.csv\" }",
        );
        forger.sums();
    };
    refused(alter, &["no copy of ../../secret.csv is kept"]);
    // Lists that name what lies elsewhere.
    for name in ["data/../../../etc/passwd", "data//etc/passwd", "../outside"] {
        let alter = |forger: &Forger| {
            let list = forger.folder.join("manifest-sha256.txt");
            let mut text = fs::read_to_string(&list).expect("a list");
            text.push_str(&format!("{}  {name}\n", "0".repeat(64)));
            fs::write(list, text).expect("written");
        };
        refused(alter, &[name, "manifest-sha256.txt is not as it was"]);
    }
}

#[test]
fn names_and_titles_do_not_move_the_terminal() {
    let alter = |forger: &Forger| {
        fs::write(forger.folder.join("data/\u{1b}[2Jgone"), "").expect("written");
    };
    let told = refused(alter, &["has no name for a file"]);
    assert!(!told.contains('\u{1b}'), "{told:?}");
    let alter = |forger: &Forger| {
        let path = forger.folder.join("data/plan.json");
        let plan = fs::read_to_string(&path).expect("a plan");
        let title = "Failures at two stations";
        fs::write(path, plan.replacen(title, "\\u001b[2JIntact", 1)).expect("written");
        forger.sums();
    };
    let told = refused(alter, &["data/plan.json: title"]);
    assert!(!told.contains('\u{1b}'), "{told:?}");
}

#[test]
fn deep_and_large_texts_are_refused() {
    for name in ["data/plan.json", "data/summary.json", "data/inputs.json"] {
        let alter = |forger: &Forger| {
            fs::write(forger.folder.join(name), "[".repeat(10_000_000)).expect("written");
            forger.sums();
        };
        refused(alter, &["too many brackets"]);
    }
    // Two gigabytes, of which the disk holds none.
    let alter = |forger: &Forger| {
        let file = File::create(forger.folder.join("data/plan.json")).expect("a file");
        file.set_len(2 << 30).expect("a sparse file");
    };
    refused(alter, &["data/plan.json cannot be read"]);
    // Small objects take a hundred times their text in memory.
    let alter = |forger: &Forger| {
        let many = "{\"\":0},".repeat(10_000_000);
        fs::write(forger.folder.join("data/plan.json"), format!("[{many}0]")).expect("written");
        forger.sums();
    };
    refused(alter, &["more values than fit in memory"]);
    // As do empty lines.
    let alter = |forger: &Forger| {
        let many = "\n".repeat(50_000_000);
        fs::write(forger.folder.join("data/report.html"), many).expect("written");
        forger.sums();
    };
    refused(alter, &["data/report.html: line 1"]);
}

/// Counts in the trail that no file bears out.
#[test]
fn huge_counts_in_the_trail_are_refused() {
    let rewritten = |forger: &Forger, draws: u64, every: bool| {
        let mut rows = forger.rows();
        for row in rows.iter_mut().filter(|row| row.block > 0) {
            if every || row.chain == 0 {
                row.draws = draws;
            }
        }
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    for every in [false, true] {
        refused(
            |forger| rewritten(forger, i64::MAX as u64, every),
            &["data/trail.parquet: point 1 "],
        );
        refused(
            |forger| rewritten(forger, 1 << 40, every),
            &["data/trail.parquet: point 1 "],
        );
        refused(
            |forger| rewritten(forger, 0, every),
            &["data/trail.parquet: point 1"],
        );
    }
    let alter = |forger: &Forger| {
        let mut rows = forger.rows();
        rows[5].chain = 1 << 30;
        trail_file::write(&forger.folder.join(trail_file::NAME), &rows).expect("a trail");
        forger.sums();
    };
    refused(alter, &["has no place in it"]);
    // A study of very many chains beside a small trail.
    let alter = |forger: &Forger| {
        let mut forger = forger.clone();
        forger.study("chains = 3", "chains = 100000");
        forger.sums();
    };
    refused(alter, &["data/plan.json: "]);
}

/// Bytes of a Parquet file made here by hand, as no writer would.
mod parquet {
    /// A Thrift number, compact.
    fn varint(mut value: u64, into: &mut Vec<u8>) {
        while value >= 0x80 {
            into.push(value as u8 | 0x80);
            value >>= 7;
        }
        into.push(value as u8);
    }

    /// A file with nothing but this footer.
    pub fn of_footer(footer: &[u8]) -> Vec<u8> {
        let mut bytes = b"PAR1".to_vec();
        bytes.extend(footer);
        bytes.extend((footer.len() as u32).to_le_bytes());
        bytes.extend(b"PAR1");
        bytes
    }

    /// A footer whose list of schema elements (field 2) claims so many items.
    pub fn long_list(items: u64) -> Vec<u8> {
        // Field 1, version: i32 1. Field 2: a list of structures, the count following.
        let mut footer = vec![0x15, 0x02, 0x19, 0xfc];
        varint(items, &mut footer);
        footer.push(0);
        footer
    }

    /// A footer of lists in lists without an end.
    pub fn deep(depth: usize) -> Vec<u8> {
        let mut footer = vec![0x19];
        footer.extend(std::iter::repeat_n(0x19, depth));
        footer
    }

    /// The number of a page's header that stands behind this field, made larger: the first page of a column at
    /// this place. Fields 2 and 3 are the sizes unpacked and packed.
    pub fn with_sizes(page: &[u8], unpacked: u64, packed: u64) -> Vec<u8> {
        // Type, then the two sizes, each a varint behind its field's head.
        assert_eq!(page[..3], [0x15, 0x00, 0x15], "a data page");
        let skip = |at: usize| {
            at + page[at..]
                .iter()
                .position(|byte| byte & 0x80 == 0)
                .expect("a number")
                + 1
        };
        let second = skip(3);
        assert_eq!(page[second], 0x15, "a second size");
        let rest = skip(second + 1);
        let mut header = page[..3].to_vec();
        varint(unpacked << 1, &mut header);
        header.push(0x15);
        varint(packed << 1, &mut header);
        header.extend(&page[rest..]);
        header
    }
}

#[test]
fn counts_in_parquet_files_are_not_believed() {
    let files = [
        "data/trail.parquet",
        "data/draws/point-1.parquet",
        "data/draws/point-1-burn-in.parquet",
        "data/checkpoints/point-1.parquet",
    ];
    for name in files {
        let written = |bytes: Vec<u8>, words: &str| {
            let alter = |forger: &Forger| {
                fs::write(forger.folder.join(name), &bytes).expect("written");
                forger.sums();
            };
            refused(alter, &[name, words]);
        };
        let of_footer = parquet::of_footer;
        written(
            of_footer(&parquet::long_list(1 << 60)),
            "its footer is not whole",
        );
        written(
            of_footer(&parquet::long_list(1 << 27)),
            "its footer is not whole",
        );
        written(
            of_footer(&parquet::deep(1 << 20)),
            "its footer is not whole",
        );
        written(of_footer(&[]), "its footer is not whole");
        written(b"PAR1".to_vec(), "it is not a Parquet file");
        written(Vec::new(), "it is not a Parquet file");
        // A footer said to be longer than the file.
        let mut long = of_footer(&[0]);
        let at = long.len() - 8;
        long[at..at + 4].copy_from_slice(&u32::MAX.to_le_bytes());
        written(long, "it is not a Parquet file");
        // The first page says that it unpacks, or goes on, to two gigabytes.
        let honest = fs::read(honest().record.join(name)).expect("read");
        for (unpacked, packed) in [(0x7fff_ffff, 30), (30, 0x7fff_ffff), (0, 0)] {
            let mut bytes = honest.clone();
            let header = parquet::with_sizes(&honest[4..64], unpacked, packed);
            bytes[4..4 + header.len()].copy_from_slice(&header);
            let alter = |forger: &Forger| {
                fs::write(forger.folder.join(name), &bytes).expect("written");
                forger.sums();
            };
            refused(alter, &[name]);
        }
    }
}

/// A page of an honest size on the disk whose frame unpacks to far more than its header says.
#[test]
fn packed_bombs_do_not_go_off() {
    let bomb = zstd_of_zeros();
    for name in ["data/trail.parquet", "data/checkpoints/point-1.parquet"] {
        let honest = fs::read(honest().record.join(name)).expect("read");
        let at = honest
            .windows(4)
            .position(|bytes| bytes == [0x28, 0xb5, 0x2f, 0xfd])
            .expect("a frame");
        let mut bytes = honest;
        bytes[at..at + bomb.len()].copy_from_slice(&bomb);
        let alter = |forger: &Forger| {
            fs::write(forger.folder.join(name), &bytes).expect("written");
            forger.sums();
        };
        refused(alter, &[name]);
    }
}

/// A frame of Zstandard (RFC 8878) that says it holds four gigabytes and repeats one byte, 128 KiB a block of four
/// bytes; cut after as many blocks as a column's place holds.
fn zstd_of_zeros() -> Vec<u8> {
    let mut frame = vec![0x28, 0xb5, 0x2f, 0xfd];
    // Content size in 8 bytes, one segment: the window is the content.
    frame.push(0xe0);
    frame.extend((1_u64 << 32).to_le_bytes());
    for _ in 0..6 {
        let header: u32 = (1 << 17) << 3 | 1 << 1;
        frame.extend(&header.to_le_bytes()[..3]);
        frame.push(0);
    }
    frame
}

/// States that are no states: refused in words, or drawn on from and found to differ.
#[test]
fn states_of_a_stranger_do_no_harm() {
    let numbers = [f64::NAN, f64::INFINITY, -1e308, 5e-324, -1.0, 0.0];
    let bytes = honest().forger.chains[0][0].state.clone();
    let mut states: Vec<State> = Vec::new();
    for number in numbers {
        let fill = |bytes: &[u8]| {
            let words = bytes.chunks(8).map(|word| match word.len() {
                8 => number.to_le_bytes().to_vec(),
                _ => word.to_vec(),
            });
            words.flatten().collect::<Vec<u8>>()
        };
        states.push(State {
            frozen: fill(&bytes.frozen),
            moving: bytes.moving.clone(),
        });
        states.push(State {
            frozen: bytes.frozen.clone(),
            moving: fill(&bytes.moving),
        });
    }
    states.push(State {
        frozen: Vec::new(),
        moving: Vec::new(),
    });
    states.push(State {
        frozen: vec![0xff; bytes.frozen.len()],
        moving: vec![0xff; bytes.moving.len()],
    });
    states.push(State {
        frozen: bytes.frozen.clone(),
        moving: vec![0; 1 << 20],
    });
    for state in states {
        let alter = |forger: &Forger| {
            let mut forger = forger.clone();
            let block = forger.burn_in() - 2;
            forger.chains[0][block].state = state;
            forger.seal();
        };
        refused(alter, &["point 1, chain 1, block"]);
    }
}

/// A folder in which `run` would go on with a stranger's work.
fn left_open() -> (tempfile::TempDir, PathBuf) {
    let folder = tempfile::tempdir().expect("a folder");
    fs::write(folder.path().join("stations.csv"), crate::STATIONS).expect("written");
    fs::write(folder.path().join("honest.toml"), STUDY).expect("written");
    let name = honest().record.file_name().expect("a name").to_owned();
    let open = folder
        .path()
        .join("results/honest")
        .join(name)
        .with_added_extension("open");
    (folder, open)
}

fn run(folder: &Path) -> (Option<i32>, String) {
    let output = odograph(folder, &["run", "honest.toml"]);
    (output.status.code(), told(&output))
}

#[test]
fn run_writes_nothing_through_links() {
    let victims = || {
        let folder = tempfile::tempdir().expect("a folder");
        fs::create_dir_all(folder.path().join("draws")).expect("a folder");
        for name in ["keys", "draws/precious", "journal", "lock"] {
            fs::write(folder.path().join(name), "precious").expect("written");
        }
        folder
    };
    let whole = |folder: &Path| {
        let mut all: Vec<PathBuf> = Vec::new();
        let mut left = vec![folder.to_owned()];
        while let Some(path) = left.pop() {
            if path.is_dir() {
                left.extend(
                    fs::read_dir(path)
                        .expect("a folder")
                        .map(|e| e.expect("an entry").path()),
                );
            } else {
                assert_eq!(
                    fs::read_to_string(&path).expect("read"),
                    "precious",
                    "{}",
                    path.display()
                );
                all.push(path);
            }
        }
        assert_eq!(all.len(), 4, "{all:?}");
    };
    type Set = fn(&Path, &Path);
    let traps: [Set; 6] = [
        |open, victim| {
            fs::create_dir_all(open).expect("a folder");
            symlink(victim.join("keys"), open.join("journal")).expect("a link");
        },
        |open, victim| {
            fs::create_dir_all(open).expect("a folder");
            symlink(victim.join("keys"), open.join("lock")).expect("a link");
        },
        |open, victim| {
            fs::create_dir_all(open).expect("a folder");
            symlink(victim, open.join("data")).expect("a link");
        },
        |open, victim| {
            fs::create_dir_all(open.join("data")).expect("a folder");
            symlink(victim, open.join("data/inputs")).expect("a link");
        },
        |open, victim| {
            fs::create_dir_all(open.parent().expect("a parent")).expect("a folder");
            symlink(victim, open).expect("a link");
        },
        |open, victim| {
            fs::create_dir_all(open.parent().expect("a parent")).expect("a folder");
            symlink(victim, open.with_extension("")).expect("a link");
        },
    ];
    for trap in traps {
        let (folder, open) = left_open();
        let victim = victims();
        trap(&open, victim.path());
        let (status, told) = run(folder.path());
        assert!(matches!(status, Some(1 | 4)), "{told}");
        whole(victim.path());
    }
}

/// A journal whose blocks are well linked and say lengths that no plan gives.
#[test]
fn wrong_lengths_in_a_journal_are_refused() {
    let forger = &honest().forger;
    let lengths: [(usize, usize); 4] = [(u32::MAX as usize, 0), (1, 1), (1 << 20, 0), (0, 0)];
    for (draws, values) in lengths {
        let (folder, open) = left_open();
        fs::create_dir_all(&open).expect("a folder");
        let mut journal =
            JournalFile::open(&open.join("journal"), &forger.plan.digest()).expect("a journal");
        for (chain, start) in forger.starts.iter().enumerate() {
            let state = forger.chains[chain][0].state.clone();
            let payload = vec![0; 8 * values];
            let mut link = trail::first_link(&forger.plan.chain_key(0, chain as u64), start);
            for number in 1..4 {
                let phase = if number == 1 {
                    Phase::BurnIn
                } else {
                    Phase::Draws
                };
                let hash = StateHash::of(&state);
                let digest = trail::plain(&payload);
                link = trail::next_link(&link, number, phase, draws as u64, &digest, &hash);
                let block = Finished {
                    point: 0,
                    chain,
                    number,
                    phase,
                    draws,
                    payload: payload.clone(),
                    draws_digest: digest,
                    state: Some(state.clone()),
                    state_hash: hash,
                    link,
                };
                journal.append(&block).expect("appended");
            }
        }
        drop(journal);
        let (status, told) = run(folder.path());
        assert!(matches!(status, Some(1 | 4 | 5)), "{draws}: {told}");
        assert!(!open.with_extension("").exists(), "{draws}: {told}");
    }
}
