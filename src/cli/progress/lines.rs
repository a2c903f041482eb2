//! Plain lines for logs: at reviews, and now and then between them.

use super::pace::{Pace, Standing};
use crate::course::Phase;
use crate::engine::Event;
use std::time::Duration;

/// Between lines that no review asks for.
const RARE: Duration = Duration::from_secs(30);

pub struct Lines {
    last: Duration,
}

impl Lines {
    pub fn new() -> Lines {
        Lines {
            last: Duration::ZERO,
        }
    }

    /// The line that an event asks for, if any.
    pub fn event(&mut self, event: &Event, pace: &Pace, now: Duration) -> Option<String> {
        // The reviews of a sweep come in crowds.
        let due = now >= self.last + RARE;
        let line = match event {
            Event::Advanced { .. } if due => standing(pace, now),
            Event::BurnInReviewed { .. } | Event::Reviewed { .. } if due || pace.points == 1 => {
                review(event, pace)?
            }
            _ => return None,
        };
        self.last = now;
        Some(line)
    }
}

/// What a review found, in one line.
pub fn review(event: &Event, pace: &Pace) -> Option<String> {
    let (point, words) = match event {
        Event::BurnInReviewed {
            point,
            draws,
            words,
            settled,
        } => {
            let end = if *settled { "settled" } else { "not settled" };
            let words = format!("burn-in of {draws} a chain, its last half: {words}; {end}");
            (*point, words)
        }
        Event::Reviewed {
            point,
            draws,
            standing,
            met,
        } => {
            let end = if *met { ", goal met" } else { "" };
            let standing = match &**standing {
                "" => String::new(),
                words => format!(": {words}"),
            };
            (*point, format!("{draws} draws a chain{standing}{end}"))
        }
        _ => return None,
    };
    Some(match pace.points {
        1 => words,
        points => format!("point {} of {points}: {words}", point + 1),
    })
}

fn standing(pace: &Pace, now: Duration) -> String {
    let speed = pace.words(now);
    if pace.points > 1 {
        return format!(
            "{} of {} points done; {speed}",
            pace.points_done, pace.points
        );
    }
    let chains = pace.under_way.values().flatten().flatten();
    let behind = chains.min_by_key(|chain| chain.done);
    let place = behind.map_or(
        String::new(),
        |Standing {
             phase,
             done,
             target,
         }| {
            let phase = match phase {
                Phase::BurnIn => "burn-in",
                Phase::Draws => "draws",
            };
            format!("{phase} {done} of {target} a chain; ")
        },
    );
    format!("{place}{speed}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_are_rare_between_reviews() {
        let mut pace = Pace::default();
        let mut lines = Lines::new();
        let mut told = Vec::new();
        let mut hear = |event: Event, seconds: u64| {
            let now = Duration::from_secs(seconds);
            pace.event(&event, now);
            told.extend(lines.event(&event, &pace, now));
        };
        hear(
            Event::Begun {
                points: 1,
                threads: 2,
                lanes: 1,
            },
            0,
        );
        hear(
            Event::PointBegun {
                point: 0,
                chains: 1,
                stood: 0,
            },
            0,
        );
        for second in 1..=65 {
            hear(
                Event::Advanced {
                    point: 0,
                    chain: 0,
                    phase: Phase::Draws,
                    done: second * 10,
                    target: 700,
                    fresh: 10,
                },
                second,
            );
        }
        hear(
            Event::Reviewed {
                point: 0,
                draws: 700,
                standing: "error 0.031 of at most 0.02".into(),
                met: false,
            },
            66,
        );
        assert_eq!(
            told,
            [
                "draws 300 of 700 a chain; 10 draws/s, 40 s to the next review or the end",
                "draws 600 of 700 a chain; 10 draws/s, 10 s to the next review or the end",
                "700 draws a chain: error 0.031 of at most 0.02",
            ]
        );
    }
}
