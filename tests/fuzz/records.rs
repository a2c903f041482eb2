//! Files of a record and of a run under way, mutated: journal, trail, draws, checkpoints, states, plan, summary and
//! index of inputs; now and then a whole record with one of its files so mutated and its lists mended.

use crate::input::below;
use odograph::canon::Json;
use odograph::cli::FAMILIES;
use odograph::course::{Block, ChainSeed, Course, Phase, State};
use odograph::engine::trail::{self, StateHash};
use odograph::engine::{Finished, Journal, Mark, Reader};
use odograph::plan::Plan;
use odograph::random::{Purpose, Stream};
use odograph::record::{
    self, Checkpoints, DrawsFile, JournalFile, checkpoints, draws_file, trail_file,
};
use odograph::replay::{self, Audit, Request};
use odograph::study;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::atomic::AtomicBool;

/// Kernels of every kind, in few draws.
const STUDY: &str = r#"
title = "A little of everything"
question = "Does a broken record break its reader?"
[seeds]
root = "fuzz"
[data.t]
file = "t.csv"
[model]
family = "density"
[model.observed]
x = { of = "t.x", law = "normal(mean = a + k, sd = s)" }
[model.unknown]
a = { law = "normal(mean = 0, sd = 1)" }
b = { law = "normal(mean = a, sd = 1)", per = 2 }
k = { law = "binomial(trials = 4, probability = 0.5)" }
m = { law = "poisson(mean = 3)" }
s = { law = "gamma(shape = 2, rate = 1)" }
[predict]
next = "gamma(shape = s, rate = 1)"
later = "poisson(mean = s)"
[[estimand]]
name = "a"
[[estimand]]
name = "next"
[[estimand]]
name = "later"
[[sampler.step]]
name = "walk"
method = "metropolis"
on = ["a", "b"]
[[sampler.step]]
name = "slice"
method = "slice"
on = ["s"]
[[sampler.step]]
name = "whole"
method = "conditional"
on = ["k"]
[[sampler.step]]
name = "count"
method = "metropolis"
on = ["m"]
[ensemble]
chains = 3
burn_in = 100
draws = 400
"#;

/// The kinds of input.
pub const KINDS: [&str; 8] = [
    "journals",
    "trails",
    "draws",
    "checkpoints",
    "states",
    "texts",
    "indices",
    "whole records",
];

/// Sound files, and a place to put broken ones.
pub struct Records {
    _folder: tempfile::TempDir,
    place: PathBuf,
    record: PathBuf,
    plan: Plan,
    journal: Vec<u8>,
    frames: Vec<usize>,
    states: Vec<State>,
    files: Vec<(String, Vec<u8>)>,
}

impl Records {
    pub fn gather() -> Records {
        let memory = Path::new("/dev/shm");
        let folder = match memory.is_dir() {
            true => tempfile::tempdir_in(memory),
            false => tempfile::tempdir(),
        };
        let folder = folder.expect("a folder");
        let place = folder.path().to_owned();
        fs::write(place.join("fuzz.toml"), STUDY).expect("written");
        fs::write(place.join("t.csv"), "x\n0.3\n1.2\n2.5\n").expect("written");
        let ran = Command::new(env!("CARGO_BIN_EXE_odograph"))
            .args(["run", "fuzz.toml"])
            .current_dir(&place)
            .output()
            .expect("the binary starts");
        assert!(
            ran.status.success(),
            "{}",
            String::from_utf8_lossy(&ran.stderr)
        );
        let mut sealed = fs::read_dir(place.join("results/fuzz")).expect("results");
        let record = sealed
            .find_map(|entry| {
                entry
                    .ok()
                    .map(|entry| entry.path())
                    .filter(|path| path.is_dir())
            })
            .expect("a record");
        let plan = study::resolve(&place.join("fuzz.toml"), &FAMILIES).expect("a sound study");
        let path = place.join("journal");
        let (frames, states) = journal(&path, &plan);
        let mut files = Vec::new();
        let mut left = vec![record.clone()];
        while let Some(path) = left.pop() {
            if path.is_dir() {
                left.extend(
                    fs::read_dir(path)
                        .expect("a folder")
                        .map(|e| e.expect("an entry").path()),
                );
            } else {
                let name = path
                    .strip_prefix(&record)
                    .expect("inside")
                    .to_str()
                    .expect("UTF-8");
                files.push((name.to_owned(), fs::read(&path).expect("read")));
            }
        }
        files.sort();
        Records {
            journal: fs::read(&path).expect("a journal"),
            _folder: folder,
            place,
            record,
            plan,
            frames,
            states,
            files,
        }
    }

    fn file(&self, name: &str) -> &[u8] {
        let found = self.files.iter().find(|(own, _)| own == name);
        &found.expect("a file of the record").1
    }

    /// Tries an input; gives its kind.
    pub fn attempt(&self, series: u64, number: u64) -> usize {
        let mut key = [1; 32];
        key[..8].copy_from_slice(&series.to_le_bytes());
        key[8..16].copy_from_slice(&number.to_le_bytes());
        let stream = &mut Stream::new(&key, Purpose::Test);
        let kind = match number % 200 {
            199 => 7,
            other => (other % 7) as usize,
        };
        match kind {
            0 => self.journal(stream),
            1 => {
                let _ = trail_file::read(&self.broken(trail_file::NAME, stream), 1000);
            }
            2 => self.draws(stream),
            3 => self.checkpoints(stream),
            4 => self.state(stream),
            5 => self.text(stream),
            6 => self.index(stream),
            _ => self.whole(stream),
        }
        kind
    }

    /// A file of the record, mutated, at a place of its own.
    fn broken(&self, name: &str, stream: &mut Stream) -> PathBuf {
        let path = self.place.join("broken");
        fs::write(&path, mutated(self.file(name), stream)).expect("written");
        path
    }

    /// With the check of the mutated frame mended as often as not, so that its counts are believed.
    fn journal(&self, stream: &mut Stream) {
        let mut bytes = self.journal.clone();
        if below(stream, 2) == 0 {
            bytes = mutated(&bytes, stream);
        } else {
            for _ in 0..=below(stream, 3) {
                let at = self.frames[below(stream, self.frames.len())];
                let field = at + 4 * (1 + below(stream, 41));
                let value = edge(stream) as u32;
                bytes[field..field + 4].copy_from_slice(&value.to_le_bytes());
                let check = trail::plain(&bytes[at..at + 168]);
                bytes[at + 168..at + 200].copy_from_slice(&check);
            }
        }
        let path = self.place.join("broken");
        fs::write(&path, bytes).expect("written");
        let Ok(mut journal) = JournalFile::open(&path, &self.plan.digest()) else {
            return;
        };
        let reader = journal.reader();
        for chain in 0..3 {
            for block in journal.standing(0, chain) {
                let _ = reader.state(&block);
                for quantity in 0..4 {
                    let _ = reader.column(block.mark, quantity, &mut Vec::new());
                }
            }
        }
    }

    fn draws(&self, stream: &mut Stream) {
        let path = self.broken(&draws_file::name(0, Phase::Draws), stream);
        let quantities = self.plan.points[0].model.quantities();
        if let Ok(file) = DrawsFile::open(&path, quantities, 3, 400) {
            for chain in 0..3 {
                let _ = file.chain(chain, |_, _| Ok(()));
            }
            let _ = file.column(Mark(0), 0, &mut Vec::new());
        }
    }

    fn checkpoints(&self, stream: &mut Stream) {
        let path = self.broken(&checkpoints::name(0), stream);
        let size = self.plan.points[0].model.state_size();
        if let Ok(states) = Checkpoints::open(&path, 1000, size) {
            for chain in 0..3 {
                let blocks: Vec<u64> = states.blocks(chain).collect();
                for block in blocks {
                    let _ = states.state(chain, block);
                }
            }
        }
    }

    /// A state that another hand wrote, loaded and gone on from.
    fn state(&self, stream: &mut Stream) {
        let mut state = self.states[below(stream, self.states.len())].clone();
        for _ in 0..=below(stream, 4) {
            let part = match below(stream, 2) {
                0 => &mut state.frozen,
                _ => &mut state.moving,
            };
            match below(stream, 8) {
                0 => *part = mutated(part, stream),
                _ if part.len() < 8 => {}
                1 | 2 => {
                    let at = below(stream, part.len());
                    part[at] = stream.word() as u8;
                }
                _ => {
                    let at = 8 * below(stream, part.len() / 8);
                    part[at..at + 8].copy_from_slice(&edge(stream).to_le_bytes());
                }
            }
        }
        let mut course = course(&self.plan, 0);
        if course.load(0, &state).is_ok() {
            course.advance(Phase::Draws, 2);
            course.save(0);
            course.advance(Phase::BurnIn, 60);
            course.notes(0);
        }
    }

    fn text(&self, stream: &mut Stream) {
        let names = ["data/plan.json", "data/summary.json", "data/grounds.json"];
        let text = mutated(self.file(names[below(stream, names.len())]), stream);
        if let Ok(text) = String::from_utf8(text)
            && let Ok(json) = Json::read(&text)
        {
            let again = Json::read(&json.canonical()).expect("as written");
            assert_eq!(
                again.canonical(),
                json.canonical(),
                "written and read again"
            );
        }
    }

    fn index(&self, stream: &mut Stream) {
        let path = self.place.join("data");
        fs::create_dir_all(&path).expect("a folder");
        let text = mutated(self.file("data/inputs.json"), stream);
        fs::write(path.join("inputs.json"), text).expect("written");
        let _ = record::kept(&self.place);
    }

    /// One file broken, the lists mended: verified.
    fn whole(&self, stream: &mut Stream) {
        let (name, bytes) = &self.files[below(stream, self.files.len())];
        let path = self.record.join(name);
        fs::write(&path, mutated(bytes, stream)).expect("written");
        if name.starts_with("data/") {
            record::write_bag(&self.record, &self.plan.title, &"0".repeat(64)).expect("a bag");
        }
        let request = Request {
            registry: &FAMILIES,
            threads: 1,
            audit: Audit::Part {
                part: 0.01,
                seed: [1; 32],
            },
            stop: &AtomicBool::new(false),
            progress: &|_| (),
        };
        replay::verify(&self.record, &request);
        for (name, bytes) in &self.files {
            let own = self.record.join(name);
            if own == path || !name.starts_with("data/") {
                fs::write(own, bytes).expect("written");
            }
        }
    }
}

fn course(plan: &Plan, chain: usize) -> Box<dyn Course> {
    let seed = ChainSeed {
        chain,
        stream_key: plan.stream_key(0, chain as u64),
    };
    let model = plan.points[0].model.clone();
    model.course(&[seed]).expect("a start")
}

/// Writes a journal of a few blocks; gives where its frames begin, and the states after them.
fn journal(path: &Path, plan: &Plan) -> (Vec<usize>, Vec<State>) {
    let mut journal = JournalFile::open(path, &plan.digest()).expect("a journal");
    let (mut frames, mut states) = (Vec::new(), Vec::new());
    for chain in 0..3 {
        let mut course = course(plan, chain);
        let start = StateHash::of(&course.save(0));
        let mut link = trail::first_link(&plan.chain_key(0, chain as u64), &start);
        for number in 1..=4 {
            let phase = if number < 3 {
                Phase::BurnIn
            } else {
                Phase::Draws
            };
            let made: Block = course.advance(phase, 20).remove(0);
            let payload = trail::payload(&made);
            let (digest, state) = (trail::plain(&payload), course.save(0));
            let hash = StateHash::of(&state);
            link = trail::next_link(&link, number, phase, 20, &digest, &hash);
            let block = Finished {
                point: 0,
                chain,
                number,
                phase,
                draws: 20,
                payload,
                draws_digest: digest,
                state: Some(state.clone()),
                state_hash: hash,
                link,
            };
            frames.push(journal.append(&block).expect("appended").0 as usize);
            states.push(state);
        }
    }
    (frames, states)
}

/// Numbers on which readers stumble, and any.
fn edge(stream: &mut Stream) -> u64 {
    const EDGES: [u64; 12] = [
        0,
        1,
        2,
        0x7f,
        0xffff,
        0x7fff_ffff,
        0xffff_ffff,
        1 << 53,
        i64::MAX as u64,
        u64::MAX,
        0x7ff0_0000_0000_0000,
        0x7ff8_0000_0000_0000,
    ];
    match below(stream, 3) {
        0 => stream.word(),
        1 => f64::to_bits(stream.unit() * 4.0 - 2.0),
        _ => EDGES[below(stream, EDGES.len())],
    }
}

/// Bytes with one to five changes: more often near the end, where a Parquet file tells of itself.
fn mutated(bytes: &[u8], stream: &mut Stream) -> Vec<u8> {
    let mut bytes = bytes.to_vec();
    for _ in 0..=below(stream, 5) {
        if bytes.is_empty() {
            bytes.push(stream.word() as u8);
        }
        let length = bytes.len();
        let at = match below(stream, 3) {
            0 => length - 1 - below(stream, length.min(1500)),
            1 => below(stream, length.min(300)),
            _ => below(stream, length),
        };
        match below(stream, 9) {
            0 => bytes[at] ^= 1 << below(stream, 8),
            1 | 2 => bytes[at] = stream.word() as u8,
            3 => {
                const BYTES: [u8; 8] = [0, 1, 0x7f, 0x80, 0xff, b'"', b'[', b'9'];
                bytes[at] = BYTES[below(stream, 8)];
            }
            4 => {
                let word = edge(stream).to_le_bytes();
                let end = (at + 8).min(length);
                bytes[at..end].copy_from_slice(&word[..end - at]);
            }
            5 => bytes.truncate(at),
            6 => {
                let end = (at + below(stream, 40)).min(length);
                bytes.drain(at..end);
            }
            7 => {
                let end = (at + below(stream, 40)).min(length);
                let piece = bytes[at..end].repeat(1 + below(stream, 4));
                bytes.splice(at..at, piece);
            }
            _ => {
                let from = below(stream, length);
                let piece = bytes[from..(from + below(stream, 40)).min(length)].to_vec();
                let end = (at + piece.len()).min(length);
                bytes[at..end].copy_from_slice(&piece[..end - at]);
            }
        }
    }
    bytes
}
