//! How a run is getting on: bars on a terminal, plain rare lines without one.

mod bars;
mod lines;
mod pace;

use crate::engine::Event;
use bars::Bars;
use lines::Lines;
use pace::Pace;
pub use pace::span;
use std::io::IsTerminal;
use std::time::Instant;

/// Follows the events of a run and shows them on stderr.
pub struct Progress {
    begun: Instant,
    pace: Pace,
    shown: Shown,
}

enum Shown {
    Bars(Box<Bars>),
    Lines(Lines),
}

impl Progress {
    pub fn new() -> Progress {
        let shown = if std::io::stderr().is_terminal() {
            Shown::Bars(Box::new(Bars::new()))
        } else {
            Shown::Lines(Lines::new())
        };
        Progress {
            begun: clock(),
            pace: Pace::default(),
            shown,
        }
    }

    pub fn event(&mut self, event: &Event) {
        let now = self.begun.elapsed();
        self.pace.event(event, now);
        match &mut self.shown {
            Shown::Bars(bars) => bars.event(event, &self.pace, now),
            Shown::Lines(lines) => {
                if let Some(line) = lines.event(event, &self.pace, now) {
                    super::output::tell(&line);
                }
            }
        }
    }

    /// Takes the bars away before other words are printed.
    pub fn end(self) {
        if let Shown::Bars(bars) = self.shown {
            bars.end();
        }
    }
}

#[expect(
    clippy::disallowed_methods,
    reason = "progress; no digit sees the clock"
)]
fn clock() -> Instant {
    Instant::now()
}
