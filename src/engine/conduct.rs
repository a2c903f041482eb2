//! Points x chains x blocks over threads. Workers compute, hash and hand over; the calling thread alone
//! talks to the sink and decides what is done next.

use super::active::{Active, Next};
use super::halt::Halt;
use super::judge::{Judge, Settling, Verdict};
use super::lanes;
use super::sink::{Event, Reader, Sink, Stood};
use super::task::Task;
use super::walk::{Kept, Step, Walk};
use crate::course::Phase;
use rayon::ScopeFifo;
use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::mpsc::{Receiver, SyncSender, sync_channel};

pub use super::active::{Ended, PointEnd};

/// How a run is carried out. Nothing here can be seen in a digit.
pub struct Orders<'a> {
    pub threads: usize,
    /// Chains a course; chosen from threads, points and chains when `None`.
    pub lanes: Option<usize>,
    /// Set by a signal: end after the current blocks.
    pub stop: &'a AtomicBool,
}

/// What workers send.
enum Message<F> {
    Advanced {
        point: usize,
        target: u64,
        done: u64,
        steps: Vec<Step>,
    },
    Parked {
        point: usize,
        walk: Walk,
    },
    BurnInReviewed {
        point: usize,
        settling: Settling,
    },
    Reviewed {
        point: usize,
        verdict: Verdict<F>,
    },
    Halted(Halt),
}

/// Runs every point to its end and gives the ends in the order of the points.
///
/// # Errors
/// See [`Halt`]. Blocks handed over before stay in the journal; the same call goes on from them.
pub fn conduct<J: Judge>(
    tasks: &[Task],
    judge: &J,
    orders: &Orders,
    sink: &mut dyn Sink,
) -> Result<Vec<PointEnd<J::Figures>>, Halt> {
    let threads = orders.threads.max(1);
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .thread_name(|index| format!("walk {index}"))
        .build()
        .map_err(|fault| Halt::Own(format!("threads could not be started: {fault}")))?;
    let chains = tasks.iter().map(|task| task.chains.len()).max();
    let lanes = match orders.lanes {
        Some(lanes) => lanes.max(1),
        None => lanes::choose(threads, tasks.len(), chains.unwrap_or(1)),
    };
    sink.event(&Event::Begun {
        points: tasks.len(),
        threads,
        lanes,
    });
    let quit = AtomicBool::new(false);
    let (sender, receiver) = sync_channel(2 * threads + 2);
    let crew = Crew {
        tasks,
        judge,
        stop: orders.stop,
        quit: &quit,
        reader: sink.reader(),
        sender,
    };
    let ended = pool.in_place_scope_fifo(|scope| {
        let mut desk = Desk {
            scope,
            crew,
            sink,
            lanes,
            busy: 2 * threads,
            next: 0,
            outstanding: 0,
            active: BTreeMap::new(),
            ended: BTreeMap::new(),
            halt: None,
        };
        desk.work(receiver)
    });
    let ended = ended?;
    sink.sync().map_err(Halt::Journal)?;
    Ok(ended)
}

/// What every worker can see.
struct Crew<'s, J: Judge> {
    tasks: &'s [Task],
    judge: &'s J,
    stop: &'s AtomicBool,
    quit: &'s AtomicBool,
    reader: Arc<dyn Reader>,
    sender: SyncSender<Message<J::Figures>>,
}

impl<J: Judge> Clone for Crew<'_, J> {
    fn clone(&self) -> Self {
        Crew {
            reader: self.reader.clone(),
            sender: self.sender.clone(),
            ..*self
        }
    }
}

impl<'s, J: Judge> Crew<'s, J> {
    fn stopping(&self) -> bool {
        self.stop.load(Ordering::Relaxed) || self.quit.load(Ordering::Relaxed)
    }

    /// Sends; a desk that is gone has its reasons.
    fn send(&self, message: Message<J::Figures>) {
        let _ = self.sender.send(message);
    }

    /// Runs a piece of work; its panic is the program's own fault, told to the desk.
    fn guard(self, work: impl FnOnce(&Self) -> Result<(), Halt>) {
        let halt = match catch_unwind(AssertUnwindSafe(|| work(&self))) {
            Ok(Ok(())) => return,
            Ok(Err(halt)) => halt,
            Err(_) => Halt::Own("a part of the program failed".into()),
        };
        self.send(Message::Halted(halt));
    }

    /// Advances a walk by a block and puts it back in line, or parks it at its target.
    fn step(self, scope: &ScopeFifo<'s>, mut walk: Walk, leg: Leg) {
        self.guard(|crew| {
            if crew.stopping() || walk.done(leg.phase) >= leg.target {
                let point = leg.point;
                crew.send(Message::Parked { point, walk });
                return Ok(());
            }
            let steps = walk.advance(leg.phase, leg.target, leg.block)?;
            crew.send(Message::Advanced {
                point: leg.point,
                target: leg.target,
                done: walk.done(leg.phase),
                steps,
            });
            let crew = crew.clone();
            scope.spawn_fifo(move |scope| crew.step(scope, walk, leg));
            Ok(())
        });
    }
}

/// How far a walk is to go.
#[derive(Clone, Copy)]
struct Leg {
    point: usize,
    phase: Phase,
    target: u64,
    block: u64,
}

/// The one place where things are decided.
struct Desk<'a, 's, J: Judge> {
    scope: &'a ScopeFifo<'s>,
    crew: Crew<'s, J>,
    sink: &'a mut dyn Sink,
    lanes: usize,
    /// Courses to keep under way.
    busy: usize,
    /// The next point to begin.
    next: usize,
    /// Pieces of work that will yet send their last message.
    outstanding: usize,
    active: BTreeMap<usize, Active<'s>>,
    ended: BTreeMap<usize, PointEnd<J::Figures>>,
    halt: Option<Halt>,
}

impl<'s, J: Judge> Desk<'_, 's, J> {
    fn work(
        &mut self,
        receiver: Receiver<Message<J::Figures>>,
    ) -> Result<Vec<PointEnd<J::Figures>>, Halt> {
        self.begin_points();
        while self.outstanding > 0 {
            let Ok(message) = receiver.recv() else { break };
            self.take(message);
            self.begin_points();
        }
        if let Some(halt) = self.halt.take() {
            return Err(halt);
        }
        if self.ended.len() < self.crew.tasks.len() {
            return Err(Halt::Interrupted);
        }
        Ok(std::mem::take(&mut self.ended).into_values().collect())
    }

    /// The gravest halt wins; all work ends after its current block.
    fn halt(&mut self, halt: Halt) {
        self.crew.quit.store(true, Ordering::Relaxed);
        let own = matches!(halt, Halt::Own(_));
        if self.halt.is_none() || own && !matches!(self.halt, Some(Halt::Own(_))) {
            self.halt = Some(halt);
        }
    }

    fn begin_points(&mut self) {
        let under_way = |desk: &Self| desk.active.values().map(Active::courses).sum::<usize>();
        while self.next < self.crew.tasks.len()
            && !self.crew.stopping()
            && under_way(self) < self.busy
        {
            let point = self.next;
            self.next += 1;
            self.begin(point);
        }
    }

    fn begin(&mut self, point: usize) {
        let task = &self.crew.tasks[point];
        let mut stood: Vec<Vec<Stood>> = (0..task.chains.len())
            .map(|chain| self.sink.standing(point, chain))
            .collect();
        let begun: Vec<bool> = stood.iter().map(|blocks| !blocks.is_empty()).collect();
        let ranges = lanes::courses(&begun, self.lanes);
        let mut active = Active::new(point, task, ranges.len());
        let mut stood_in_all = 0;
        for range in ranges {
            let stood: Vec<_> = stood[range.clone()]
                .iter_mut()
                .map(std::mem::take)
                .collect();
            stood_in_all += stood.iter().map(|blocks| blocks.len() as u64).sum::<u64>();
            active.stands(range.clone(), &stood);
            self.outstanding += 1;
            let crew = self.crew.clone();
            self.scope.spawn_fifo(move |_| {
                crew.guard(|crew| {
                    let walk = Walk::begin(task, point, range, stood, &crew.reader)?;
                    crew.send(Message::Parked { point, walk });
                    Ok(())
                });
            });
        }
        self.active.insert(point, active);
        self.sink.event(&Event::PointBegun {
            point,
            chains: task.chains.len(),
            stood: stood_in_all,
        });
    }

    fn take(&mut self, message: Message<J::Figures>) {
        match message {
            Message::Advanced {
                point,
                target,
                done,
                steps,
            } => {
                for step in steps {
                    self.keep(point, target, done, step);
                }
            }
            Message::Parked { point, walk } => {
                self.outstanding -= 1;
                let active = self.active.get_mut(&point).expect("under way");
                active.park(walk);
                self.proceed(point);
            }
            Message::BurnInReviewed { point, settling } => {
                self.outstanding -= 1;
                let active = self.active.get_mut(&point).expect("under way");
                let draws = active.target();
                self.sink.event(&Event::BurnInReviewed {
                    point,
                    draws,
                    words: settling.words.clone(),
                    settled: settling.settled,
                });
                active.settle(settling);
                self.proceed(point);
            }
            Message::Reviewed { point, verdict } => {
                self.outstanding -= 1;
                let active = self.active.get_mut(&point).expect("under way");
                self.sink.event(&Event::Reviewed {
                    point,
                    draws: active.target(),
                    standing: verdict.standing.clone(),
                    met: verdict.met == Some(true),
                });
                if let Some(end) = active.judge(verdict) {
                    self.finish(point, end);
                } else {
                    self.proceed(point);
                }
            }
            Message::Halted(Halt::Start { point, words }) => {
                self.outstanding -= 1;
                let active = self.active.get_mut(&point).expect("under way");
                active.fail(words);
                self.proceed(point);
            }
            Message::Halted(halt) => {
                self.outstanding -= 1;
                self.halt(halt);
            }
        }
    }

    /// Hands one block of one chain to the journal.
    fn keep(&mut self, point: usize, target: u64, done: u64, step: Step) {
        let (mark, fresh) = match step.kept {
            Kept::Standing(mark) => (mark, 0),
            Kept::Fresh(block) => {
                if matches!(self.halt, Some(Halt::Journal(_))) {
                    return;
                }
                match self.sink.append(&block) {
                    Ok(mark) => (mark, step.draws as u64),
                    Err(words) => return self.halt(Halt::Journal(words)),
                }
            }
        };
        let active = self.active.get_mut(&point).expect("under way");
        active.enter(step.chain, step.phase, step.draws, mark);
        self.sink.event(&Event::Advanced {
            point,
            chain: step.chain,
            phase: step.phase,
            done,
            target,
            fresh,
        });
    }

    /// Once all courses of a point stand still: sends them on, or reviews, or ends the point.
    fn proceed(&mut self, point: usize) {
        let active = self.active.get_mut(&point).expect("under way");
        if !active.still() {
            return;
        }
        if let Some(words) = active.failure() {
            let end = PointEnd {
                point,
                ended: Err(words),
            };
            return self.finish(point, end);
        }
        if self.crew.stopping() {
            return;
        }
        match active.next() {
            Next::Walk {
                phase,
                target,
                walks,
            } => {
                let leg = Leg {
                    point,
                    phase,
                    target,
                    block: active.task.block,
                };
                self.outstanding += walks.len();
                for walk in walks {
                    let crew = self.crew.clone();
                    self.scope
                        .spawn_fifo(move |scope| crew.step(scope, walk, leg));
                }
            }
            Next::Review(phase) => self.review(point, phase),
        }
    }

    fn review(&mut self, point: usize, phase: Phase) {
        let active = &self.active[&point];
        let columns = active.columns(&self.crew.reader);
        let draws = active.target();
        self.sink.event(&Event::Reviewing {
            point,
            phase,
            draws,
        });
        self.outstanding += 1;
        let crew = self.crew.clone();
        self.scope.spawn_fifo(move |_| {
            crew.guard(|crew| {
                let message = match phase {
                    Phase::BurnIn => crew
                        .judge
                        .burn_in(point, &columns)
                        .map(|settling| Message::BurnInReviewed { point, settling }),
                    Phase::Draws => crew
                        .judge
                        .review(point, &columns, crew.stop)
                        .map(|verdict| Message::Reviewed { point, verdict }),
                };
                let message = message.map_err(|words| {
                    if crew.stopping() {
                        Halt::Interrupted
                    } else {
                        Halt::Journal(words)
                    }
                })?;
                crew.send(message);
                Ok(())
            });
        });
    }

    fn finish(&mut self, point: usize, end: PointEnd<J::Figures>) {
        self.active.remove(&point);
        self.ended.insert(point, end);
        self.sink.event(&Event::PointDone { point });
    }
}
