//! The engine against a toy family and a journal in memory.

use super::sink::*;
use super::toy::{Planted, Toy};
use super::trail::{self, Digest};
use super::*;
use crate::course::{Phase, State};
use crate::plan::BurnIn;
use std::collections::BTreeMap;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::{Arc, Mutex};

type Shelf = BTreeMap<(usize, usize), Vec<Finished>>;

/// A journal in memory; may set a flag, or refuse, after some blocks.
#[derive(Default, Clone)]
struct Memory {
    shelf: Arc<Mutex<Shelf>>,
    flat: Arc<Mutex<Vec<Finished>>>,
    events: Vec<Event>,
    appended: usize,
    stop_after: Option<(usize, Arc<AtomicBool>)>,
    refuse_after: Option<usize>,
}

impl Journal for Memory {
    fn standing(&mut self, point: usize, chain: usize) -> Vec<Stood> {
        let shelf = self.shelf.lock().unwrap();
        let flat = self.flat.lock().unwrap();
        let blocks = shelf.get(&(point, chain)).into_iter().flatten();
        let mark = |block: &Finished| {
            let same = |other: &Finished| other.link == block.link;
            Mark(flat.iter().position(same).expect("on the shelf") as u64)
        };
        blocks
            .map(|block| Stood {
                phase: block.phase,
                draws: block.draws,
                draws_digest: block.draws_digest,
                state_hash: block.state_hash,
                link: block.link,
                mark: mark(block),
                kept: block.state.is_some(),
                frozen: mark(block),
            })
            .collect()
    }
    fn append(&mut self, block: &Finished) -> Result<Mark, String> {
        if self.refuse_after == Some(self.appended) {
            return Err("the shelf is full".into());
        }
        self.appended += 1;
        if let Some((after, flag)) = &self.stop_after
            && *after == self.appended
        {
            flag.store(true, Ordering::Relaxed);
        }
        let key = (block.point, block.chain);
        let mut flat = self.flat.lock().unwrap();
        flat.push(block.clone());
        let mut shelf = self.shelf.lock().unwrap();
        let blocks = shelf.entry(key).or_default();
        blocks.push(block.clone());
        assert_eq!(blocks.len() as u64, block.number);
        Ok(Mark(flat.len() as u64 - 1))
    }
    fn sync(&mut self) -> Result<(), String> {
        Ok(())
    }
    fn reader(&self) -> Arc<dyn Reader> {
        Arc::new(MemoryReader(self.flat.clone()))
    }
}

impl Sink for Memory {
    fn event(&mut self, event: &Event) {
        self.events.push(event.clone());
    }
}

struct MemoryReader(Arc<Mutex<Vec<Finished>>>);

impl Reader for MemoryReader {
    fn column(&self, mark: Mark, quantity: usize, into: &mut Vec<f64>) -> Result<(), String> {
        let flat = self.0.lock().unwrap();
        let block = &flat[mark.0 as usize];
        let size = block.draws * 8;
        into.extend(trail::values(
            &block.payload[quantity * size..(quantity + 1) * size],
        ));
        Ok(())
    }
    fn state(&self, block: &Stood) -> Result<State, String> {
        let state = self.0.lock().unwrap()[block.mark.0 as usize].state.clone();
        state.ok_or("its state is not kept".into())
    }
}

/// Settles a burn-in at `settled` draws and meets the goal at `met`; figures are the means of `x`.
struct Scripted {
    settled: usize,
    met: Option<usize>,
    reviews: AtomicUsize,
}

impl Judge for Scripted {
    type Figures = Vec<f64>;
    fn burn_in(&self, _: usize, columns: &Columns) -> Result<Settling, String> {
        assert!(
            columns
                .quantity(0)?
                .iter()
                .all(|c| c.len() == columns.draws())
        );
        Ok(Settling {
            r_hat: Some(1.0),
            words: String::new(),
            settled: columns.draws() * 2 >= self.settled,
        })
    }
    fn review(
        &self,
        _: usize,
        columns: &Columns,
        _: &AtomicBool,
    ) -> Result<Verdict<Vec<f64>>, String> {
        self.reviews.fetch_add(1, Ordering::Relaxed);
        let means = columns.quantity(0)?.into_iter();
        Ok(Verdict {
            met: self.met.map(|met| columns.draws() >= met),
            standing: String::new(),
            figures: means
                .map(|c| c.iter().sum::<f64>() / c.len() as f64)
                .collect(),
        })
    }
}

fn scripted(settled: usize, met: Option<usize>) -> Scripted {
    Scripted {
        settled,
        met,
        reviews: AtomicUsize::new(0),
    }
}

fn tasks() -> Vec<Task> {
    let toy = Toy::new(0.7, Planted::Nothing);
    let doubled = BurnIn::Chosen {
        from: 100,
        at_most: 1000,
    };
    vec![
        toy.task(1, 8, doubled, &[500, 800, 1300, 2000]),
        toy.task(2, 5, BurnIn::Fixed(0), &[333, 1000]),
        toy.task(3, 1, BurnIn::Fixed(150), &[90, 2000]),
    ]
}

fn run(
    tasks: &[Task],
    threads: usize,
    lanes: Option<usize>,
    stop: &AtomicBool,
    memory: &mut Memory,
) -> Result<Vec<PointEnd<Vec<f64>>>, Halt> {
    let orders = Orders {
        threads,
        lanes,
        stop,
    };
    conduct(tasks, &scripted(400, Some(1200)), &orders, memory)
}

fn straight(threads: usize, lanes: Option<usize>) -> (Vec<PointEnd<Vec<f64>>>, Memory) {
    let mut memory = Memory::default();
    let ends = run(
        &tasks(),
        threads,
        lanes,
        &AtomicBool::new(false),
        &mut memory,
    )
    .unwrap();
    (ends, memory)
}

/// One digest over all last links, in order.
fn golden(ends: &[PointEnd<Vec<f64>>]) -> String {
    let ended = ends.iter().map(|end| end.ended.as_ref().unwrap());
    let links: Vec<Digest> = ended.flat_map(|end| end.links.clone()).collect();
    let digest = trail::plain(&links.concat());
    digest.iter().map(|byte| format!("{byte:02x}")).collect()
}

#[test]
fn trails_do_not_depend_on_threads_or_lanes() {
    let (reference, _) = straight(1, Some(1));
    assert_eq!(
        golden(&reference),
        "c9e51ee6750da2cf79158df23e2f108d632391f7871debd99849a66d3787f994",
    );
    let lengths: Vec<_> = reference
        .iter()
        .map(|end| end.ended.as_ref().unwrap())
        .map(|end| (end.burn_in, end.draws, end.met))
        .collect();
    assert_eq!(
        lengths,
        [
            (400, 1300, Some(true)),
            (0, 1000, Some(false)),
            (150, 2000, Some(true))
        ]
    );
    for threads in [1, 2, 7] {
        for lanes in [Some(1), Some(3), Some(8), None] {
            assert_eq!(straight(threads, lanes).0, reference, "{threads} {lanes:?}");
        }
    }
}

#[test]
fn an_interrupted_run_goes_on_to_the_same_ends_with_other_threads_and_lanes() {
    let (reference, whole) = straight(2, None);
    let blocks = whole.appended;
    for after in (1..blocks).step_by(7) {
        let flag = Arc::new(AtomicBool::new(false));
        let mut memory = Memory {
            stop_after: Some((after, flag.clone())),
            ..Memory::default()
        };
        let first = run(
            &tasks(),
            1 + after % 3,
            Some(1 + after % 8),
            &flag,
            &mut memory,
        );
        if let Ok(ends) = &first {
            assert_eq!(*ends, reference);
            continue;
        }
        assert_eq!(first, Err(Halt::Interrupted));
        memory.stop_after = None;
        let go_on = AtomicBool::new(false);
        let ends = run(&tasks(), 2, Some(1 + after % 5), &go_on, &mut memory);
        assert_eq!(ends.as_ref(), Ok(&reference), "after {after}");
        assert_eq!(
            memory.appended, blocks,
            "no block was computed twice for the journal"
        );
    }
}

#[test]
fn a_finished_journal_gives_the_ends_without_a_block_more() {
    let (reference, mut memory) = straight(2, None);
    let blocks = memory.appended;
    let ends = run(&tasks(), 1, Some(8), &AtomicBool::new(false), &mut memory);
    assert_eq!(ends, Ok(reference));
    assert_eq!(memory.appended, blocks);
}

#[test]
fn blocks_that_stand_are_computed_again_and_compared() {
    let (reference, whole) = straight(1, Some(8));
    for victim in [0, 3, 7] {
        let mut memory = whole.clone();
        let cut = whole.shelf.lock().unwrap().clone();
        memory.shelf = Arc::new(Mutex::new(cut));
        // One chain of the first point is behind: the others of its course repeat their blocks.
        let key = (0, victim);
        memory
            .shelf
            .lock()
            .unwrap()
            .get_mut(&key)
            .unwrap()
            .truncate(4);
        let go_on = AtomicBool::new(false);
        let ends = run(&tasks(), 2, Some(8), &go_on, &mut memory);
        assert_eq!(ends.as_ref(), Ok(&reference));
    }
    // The same with a family whose draws drift from one start to the next.
    let toy = Toy::new(0.7, Planted::Drift);
    let tasks = [toy.task(1, 2, BurnIn::Fixed(0), &[500])];
    let mut memory = Memory::default();
    let go_on = AtomicBool::new(false);
    run(&tasks, 1, Some(2), &go_on, &mut memory).unwrap();
    let again = run(&tasks, 1, Some(2), &go_on, &mut memory);
    assert!(
        matches!(&again, Err(Halt::Own(words)) if words.contains("differs")),
        "{again:?}"
    );
}

#[test]
fn adaptation_after_the_burn_in_is_caught() {
    let toy = Toy::new(0.7, Planted::LateAdaptation);
    let tasks = [toy.task(1, 2, BurnIn::Fixed(100), &[500])];
    let go_on = AtomicBool::new(false);
    let end = run(&tasks, 1, None, &go_on, &mut Memory::default());
    assert!(
        matches!(&end, Err(Halt::Own(words)) if words.contains("adapted after its burn-in")),
        "{end:?}"
    );
}

#[test]
fn a_refused_block_ends_the_run_and_the_rest_can_be_resumed() {
    let (reference, _) = straight(1, Some(8));
    let mut memory = Memory {
        refuse_after: Some(20),
        ..Memory::default()
    };
    let go_on = AtomicBool::new(false);
    let end = run(&tasks(), 2, None, &go_on, &mut memory);
    assert_eq!(end, Err(Halt::Journal("the shelf is full".into())));
    memory.refuse_after = None;
    assert_eq!(run(&tasks(), 2, None, &go_on, &mut memory), Ok(reference));
}

#[test]
fn a_point_without_a_start_fails_alone() {
    let mut tasks = tasks();
    tasks[1] = Toy::new(0.7, Planted::NoStart).task(9, 6, BurnIn::Fixed(10), &[50]);
    let go_on = AtomicBool::new(false);
    let ends = run(&tasks, 2, Some(2), &go_on, &mut Memory::default()).unwrap();
    assert_eq!(ends[1].ended, Err("the toy was told not to start".into()));
    let (reference, _) = straight(1, None);
    assert_eq!((&ends[0], &ends[2]), (&reference[0], &reference[2]));
}

#[test]
fn a_panic_in_a_course_is_our_own_fault() {
    let tasks = [Toy::new(0.7, Planted::Panic).task(9, 6, BurnIn::Fixed(10), &[50])];
    let end = run(
        &tasks,
        2,
        None,
        &AtomicBool::new(false),
        &mut Memory::default(),
    );
    assert!(matches!(end, Err(Halt::Own(_))), "{end:?}");
}

#[test]
fn events_tell_each_draw_once() {
    let (_, memory) = straight(2, None);
    let mut fresh = BTreeMap::new();
    for event in &memory.events {
        if let Event::Advanced {
            point, fresh: n, ..
        } = event
        {
            *fresh.entry(*point).or_insert(0) += n;
        }
    }
    let expected = BTreeMap::from([(0, 8 * 1700), (1, 5 * 1000), (2, 2150)]);
    assert_eq!(fresh, expected);
    assert_eq!(
        memory
            .events
            .iter()
            .filter(|e| matches!(e, Event::PointDone { .. }))
            .count(),
        3
    );
    let phases = memory.flat.lock().unwrap();
    assert!(phases.iter().any(|block| block.phase == Phase::BurnIn));
}

/// The toy's law is known: mean 0, variance 1, and the error of the mean from its autocorrelation. The
/// recorded `x` carries the adapted scale, so the sign is what is tested: P(x > 0) = 1/2 by symmetry.
#[test]
fn the_toy_has_its_law() {
    let toy = Toy::new(0.5, Planted::Nothing);
    let tasks = [toy.task(4, 8, BurnIn::Fixed(100), &[20_000])];
    let mut memory = Memory::default();
    let judge = scripted(0, None);
    let go_on = AtomicBool::new(false);
    let orders = Orders {
        threads: 2,
        lanes: None,
        stop: &go_on,
    };
    let ends = conduct(&tasks, &judge, &orders, &mut memory).unwrap();
    let means = &ends[0].ended.as_ref().unwrap().figures;
    // sd of a mean of n: sqrt((1 + rho) / (1 - rho) / n), here times a scale near 1.
    let error = (3.0f64 / 160_000.0).sqrt();
    let mean = means.iter().sum::<f64>() / 8.0;
    assert!(mean.abs() < 4.0 * error, "{mean} against {error}");
    assert_eq!(judge.reviews.load(Ordering::Relaxed), 1);
}
