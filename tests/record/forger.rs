//! An able forger: has our source, alters what he likes in a record, and mends every sum, key, link and digest
//! with the functions that made them.

use crate::common::{odograph, text};
use odograph::canon::{self, Json};
use odograph::cli::FAMILIES;
use odograph::course::{Block, ChainSeed, Course, Phase, State};
use odograph::engine::trail::{self, StateHash};
use odograph::engine::{
    Columns, Ended, Judge, Ledger, Mark, PlanJudge, PointEnd, Reader, Stood, Task, blocks,
};
use odograph::plan::Plan;
use odograph::record::trail_file::{self, TrailRow};
use odograph::record::{self, checkpoints, draws_file};
use odograph::report::{Outcome, crate_metadata};
use odograph::{reading, study};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Output;
use std::sync::Arc;
use std::sync::atomic::AtomicBool;

/// A block as the forger has it.
#[derive(Clone)]
pub struct Made {
    pub phase: Phase,
    pub draws: Block,
    /// After the block.
    pub state: State,
    /// What the trail says of the state, where that is not its own hash.
    pub said: Option<StateHash>,
}

impl Made {
    fn hash(&self) -> StateHash {
        self.said.unwrap_or_else(|| StateHash::of(&self.state))
    }
}

/// A record of one point in the forger's hands.
#[derive(Clone)]
pub struct Forger {
    pub folder: PathBuf,
    pub plan: Plan,
    pub starts: Vec<StateHash>,
    /// The blocks of every chain; number 1 is at 0.
    pub chains: Vec<Vec<Made>>,
    /// The blocks after which he keeps the states; `None`: as a run would.
    pub kept: Option<Vec<u64>>,
}

impl Forger {
    /// Takes an honest record in hand: its blocks and every state between them.
    pub fn of(folder: &Path) -> Forger {
        let plan = resolve(folder);
        let rows = trail_file::read(&folder.join(trail_file::NAME), 1 << 20).expect("a trail");
        let length = |phase| {
            let of = rows
                .iter()
                .filter(|row| row.chain == 0 && row.phase == phase);
            of.map(|row| row.draws).sum()
        };
        let task = Task::of(&plan, 0);
        let cut = blocks(&task, length(Phase::BurnIn), length(Phase::Draws)).expect("whole blocks");
        let mut forger = Forger {
            folder: folder.to_owned(),
            starts: starts(&plan),
            chains: vec![Vec::new(); task.chains.len()],
            kept: None,
            plan,
        };
        for chain in 0..task.chains.len() {
            let mut course = forger.course(chain);
            forger.chains[chain] = cut
                .iter()
                .map(|&(phase, draws)| draw(&mut *course, phase, draws as usize))
                .collect();
        }
        let made: Vec<_> = forger.rows().iter().map(|row| row.link).collect();
        let stored: Vec<_> = rows.iter().map(|row| row.link).collect();
        assert_eq!(made, stored, "the forger begins with the true record");
        forger
    }

    /// A course of one chain at its start.
    pub fn course(&self, chain: usize) -> Box<dyn Course> {
        let seed = ChainSeed {
            chain,
            stream_key: self.plan.stream_key(0, chain as u64),
        };
        let model = self.plan.points[0].model.clone();
        model.course(&[seed]).expect("a start")
    }

    /// Draws the blocks of a chain after block `from` again, on from the state that he has there.
    pub fn on_from(&mut self, chain: usize, from: u64, to: u64) {
        let mut course = self.course(chain);
        if from > 0 {
            let state = &self.chains[chain][from as usize - 1].state;
            course.load(0, state).expect("a sound state");
        }
        for number in from..to {
            let made = &mut self.chains[chain][number as usize];
            *made = draw(&mut *course, made.phase, made.draws.draws);
        }
    }

    /// Blocks of the burn-in, of each chain.
    pub fn burn_in(&self) -> usize {
        let blocks = self.chains[0].iter();
        blocks.filter(|made| made.phase == Phase::BurnIn).count()
    }

    /// Alters `data/study.toml`.
    pub fn study(&mut self, from: &str, to: &str) {
        let path = self.folder.join("data/study.toml");
        let before = fs::read_to_string(&path).expect("a study");
        assert!(before.contains(from), "{from} is not in the study");
        fs::write(path, before.replace(from, to)).expect("written");
    }

    /// Resolves the study anew: new plan, keys and starts for the old draws.
    pub fn resolve(&mut self) {
        self.plan = resolve(&self.folder);
        self.starts = starts(&self.plan);
    }

    /// The trail over what he has, every link mended.
    pub fn rows(&self) -> Vec<TrailRow> {
        let mut rows = Vec::new();
        for (chain, (start, made)) in self.starts.iter().zip(&self.chains).enumerate() {
            let mut link = trail::first_link(&self.plan.chain_key(0, chain as u64), start);
            rows.push(TrailRow {
                point: 0,
                chain,
                block: 0,
                phase: Phase::BurnIn,
                draws: 0,
                draws_digest: trail::plain(&[]),
                state_hash: *start,
                link,
            });
            for (block, made) in (1..).zip(made) {
                let draws = made.draws.draws as u64;
                let digest = trail::plain(&trail::payload(&made.draws));
                let hash = made.hash();
                link = trail::next_link(&link, block, made.phase, draws, &digest, &hash);
                rows.push(TrailRow {
                    point: 0,
                    chain,
                    block,
                    phase: made.phase,
                    draws,
                    draws_digest: digest,
                    state_hash: hash,
                    link,
                });
            }
        }
        rows
    }

    fn stood(&self) -> Vec<Vec<Stood>> {
        let rows = self.rows();
        let one = |row: &TrailRow| Stood {
            phase: row.phase,
            draws: row.draws as usize,
            draws_digest: row.draws_digest,
            state_hash: row.state_hash,
            link: row.link,
            mark: mark(row.chain, row.block),
            kept: true,
            frozen: mark(row.chain, row.block),
        };
        let of = |chain| {
            let rows = rows
                .iter()
                .filter(move |row| row.chain == chain && row.block > 0);
            rows.map(one).collect()
        };
        (0..self.chains.len()).map(of).collect()
    }

    /// Writes the whole record anew, all mended, with figures made by the judge of an honest run.
    pub fn seal(&self) {
        self.seal_with(|_| ());
    }

    /// The same, with figures to his taste.
    pub fn seal_with(&self, alter: impl FnOnce(&mut Outcome<'_>)) {
        let reader: Arc<dyn Reader> = Arc::new(Hands(self.chains.clone()));
        let stood = self.stood();
        let quantities = self.plan.points[0].model.quantities();
        for phase in [Phase::BurnIn, Phase::Draws] {
            let of_phase = |blocks: &Vec<Stood>| {
                let blocks = blocks.iter().filter(|block| block.phase == phase);
                blocks.copied().collect()
            };
            let chains: Vec<Vec<Stood>> = stood.iter().map(of_phase).collect();
            let path = self.folder.join(draws_file::name(0, phase));
            draws_file::write(&path, quantities, &chains, &*reader).expect("draws");
        }
        trail_file::write(&self.folder.join(trail_file::NAME), &self.rows()).expect("a trail");
        self.write_states();
        let mut outcome = self.outcome(&stood, reader);
        alter(&mut outcome);
        for (name, bytes) in outcome.files() {
            fs::write(self.folder.join(name), bytes).expect("written");
        }
        let digest = canon::hex(&outcome.digest());
        self.write_crate(&digest);
        record::write_bag(&self.folder, &self.plan.title, &digest).expect("a bag");
    }

    /// Writes the checkpoints alone.
    pub fn write_states(&self) {
        let stood = self.stood();
        let phases: Vec<(Phase, bool)> = stood[0].iter().map(|block| (block.phase, true)).collect();
        let kept = self
            .kept
            .clone()
            .unwrap_or_else(|| checkpoints::kept(&phases, 1, stood.len(), u64::MAX));
        let path = self.folder.join(checkpoints::name(0));
        checkpoints::write(&path, &stood, &kept, &Hands(self.chains.clone())).expect("states");
    }

    /// Mends the sums of the bag, and says in it which result it holds.
    pub fn sums(&self) {
        let info = fs::read_to_string(self.folder.join("bag-info.txt")).expect("a bag");
        let digest = info
            .lines()
            .find_map(|line| line.strip_prefix("External-Identifier: "));
        let digest = digest.expect("a digest");
        self.write_crate(digest);
        record::write_bag(&self.folder, &self.plan.title, digest).expect("a bag");
    }

    fn write_crate(&self, digest: &str) {
        let read = |name: &str| fs::read_to_string(self.folder.join(name)).expect("text");
        let circumstances = Json::read(&read(record::CIRCUMSTANCES)).expect("JSON");
        let files = record::payload(&self.folder).expect("a payload");
        let made = crate_metadata(&self.plan, digest, &circumstances, &files);
        fs::write(self.folder.join(record::CRATE_METADATA), made.pretty()).expect("written");
    }

    fn outcome(&self, stood: &[Vec<Stood>], reader: Arc<dyn Reader>) -> Outcome<'_> {
        let mut ledgers = vec![Ledger::default(); stood.len()];
        for (ledger, blocks) in ledgers.iter_mut().zip(stood) {
            for block in blocks {
                ledger.push(block.phase, block.draws, block.mark);
            }
        }
        let length = |phase| {
            let blocks = stood[0].iter().filter(|block| block.phase == phase);
            blocks.map(|block| block.draws as u64).sum()
        };
        let draws = length(Phase::Draws);
        let columns = Columns::new(ledgers, reader, Phase::Draws, 0..draws);
        let verdict = PlanJudge::new(&self.plan)
            .review(0, &columns, &AtomicBool::new(false))
            .expect("figures");
        let end = PointEnd {
            point: 0,
            ended: Ok(Ended {
                burn_in: length(Phase::BurnIn),
                settling: None,
                draws,
                met: verdict.met,
                figures: verdict.figures,
                links: stood
                    .iter()
                    .map(|blocks| blocks[blocks.len() - 1].link)
                    .collect(),
                notes: Vec::new(),
            }),
        };
        Outcome::of(&self.plan, &[end], vec![None])
    }

    /// `verify` on the real binary.
    pub fn verified(&self, more: &[&str]) -> Output {
        verified(&self.folder, more)
    }
}

/// `verify` on the real binary.
pub fn verified(record: &Path, more: &[&str]) -> Output {
    let record = record.to_str().expect("a path in UTF-8");
    let mut arguments = vec!["verify", record, "--threads", "2"];
    arguments.extend(more);
    odograph(&std::env::temp_dir(), &arguments)
}

/// Both streams and the exit status of a verification, for messages.
pub fn told(output: &Output) -> String {
    format!(
        "{}\n{}\n{}",
        output.status,
        text(&output.stdout),
        text(&output.stderr)
    )
}

fn draw(course: &mut dyn Course, phase: Phase, draws: usize) -> Made {
    let draws = course.advance(phase, draws).remove(0);
    Made {
        phase,
        draws,
        state: course.save(0),
        said: None,
    }
}

fn starts(plan: &Plan) -> Vec<StateHash> {
    let starts = record::starts(plan, 0).expect("starts");
    starts.into_iter().map(|(hash, _)| hash).collect()
}

fn resolve(folder: &Path) -> Plan {
    let bytes = fs::read(folder.join("data/study.toml")).expect("a study");
    let source = reading::text(bytes, "data/study.toml").expect("UTF-8");
    let files = record::kept(folder).expect("an index");
    study::resolve_text(source, &files, &FAMILIES).expect("a sound study")
}

/// Chain and block (from 1) in one number.
fn mark(chain: usize, block: u64) -> Mark {
    Mark((chain as u64) << 32 | block)
}

/// Gives the forger's blocks to whoever writes files.
struct Hands(Vec<Vec<Made>>);

impl Hands {
    fn made(&self, mark: Mark) -> &Made {
        &self.0[(mark.0 >> 32) as usize][(mark.0 & 0xffff_ffff) as usize - 1]
    }
}

impl Reader for Hands {
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String> {
        let block = &self.made(mark).draws;
        let from = quantity * block.draws;
        into.extend_from_slice(&block.values[from..from + block.draws]);
        Ok(())
    }

    fn state(&self, block: &Stood) -> Result<State, String> {
        Ok(self.made(block.mark).state.clone())
    }
}

/// Copies a folder with all in it.
pub fn copy(from: &Path, to: &Path) {
    fs::create_dir_all(to).expect("a folder");
    for entry in fs::read_dir(from).expect("a folder") {
        let path = entry.expect("an entry").path();
        let into = to.join(path.file_name().expect("a name"));
        if path.is_dir() {
            copy(&path, &into);
        } else {
            fs::copy(&path, &into).expect("copied");
        }
    }
}
