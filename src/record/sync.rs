//! Forces a file to the disk beside the writing, so that nobody waits for it.

use std::fs::File;
use std::io;
use std::sync::mpsc::{SyncSender, sync_channel};
use std::sync::{Arc, Mutex, PoisonError};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

/// At most this much time's work is lost when the machine stops.
const EVERY: Duration = Duration::from_secs(3);

/// A thread that syncs when asked. Ends with its owner.
pub struct Syncer {
    ask: Option<SyncSender<()>>,
    fault: Arc<Mutex<Option<io::Error>>>,
    thread: Option<JoinHandle<()>>,
    last: Instant,
}

impl Syncer {
    pub fn new(file: Arc<File>) -> Syncer {
        let (ask, asked) = sync_channel(1);
        let fault = Arc::new(Mutex::new(None));
        let seen = fault.clone();
        let thread = std::thread::spawn(move || {
            while asked.recv().is_ok() {
                if let Err(fault) = file.sync_data() {
                    *seen.lock().unwrap_or_else(PoisonError::into_inner) = Some(fault);
                }
            }
        });
        Syncer {
            ask: Some(ask),
            fault,
            thread: Some(thread),
            last: now(),
        }
    }

    /// Asks for a sync; asked again before it began, one will do.
    pub fn ask(&mut self) {
        self.last = now();
        if let Some(ask) = &self.ask {
            let _ = ask.try_send(());
        }
    }

    /// Asks for a sync when the last is some seconds old.
    pub fn tick(&mut self) {
        if self.last.elapsed() >= EVERY {
            self.ask();
        }
    }

    /// What went wrong since it was last asked.
    pub fn fault(&self) -> Option<io::Error> {
        let mut fault = self.fault.lock().unwrap_or_else(PoisonError::into_inner);
        fault.take()
    }
}

impl Drop for Syncer {
    fn drop(&mut self) {
        self.ask = None;
        if let Some(thread) = self.thread.take() {
            let _ = thread.join();
        }
    }
}

#[expect(
    clippy::disallowed_methods,
    reason = "when to force the disk; no digit sees it"
)]
fn now() -> Instant {
    Instant::now()
}
