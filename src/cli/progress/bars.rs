//! Bars on a terminal: one a chain while they fit, one for the points of a sweep, and a line with the last
//! review and the speed.

use super::lines::review;
use super::pace::{Pace, Standing};
use crate::course::Phase;
use crate::engine::Event;
use indicatif::{MultiProgress, ProgressBar, ProgressStyle};
use std::collections::BTreeMap;
use std::time::Duration;

/// More chains than this have no bars of their own.
const MOST: usize = 16;
/// Between two pictures.
const PICTURE: Duration = Duration::from_millis(150);

pub struct Bars {
    all: MultiProgress,
    foot: ProgressBar,
    points: Option<ProgressBar>,
    chains: BTreeMap<(usize, usize), (ProgressBar, Standing)>,
    last_review: String,
    last_picture: Duration,
}

fn style(template: &str) -> ProgressStyle {
    let style = ProgressStyle::with_template(template).expect("a template of our own");
    style.progress_chars("=> ")
}

impl Bars {
    pub fn new() -> Bars {
        let all = MultiProgress::new();
        let foot = all.add(ProgressBar::no_length().with_style(style("{wide_msg}")));
        Bars {
            all,
            foot,
            points: None,
            chains: BTreeMap::new(),
            last_review: String::new(),
            last_picture: Duration::ZERO,
        }
    }

    pub fn event(&mut self, event: &Event, pace: &Pace, now: Duration) {
        match event {
            Event::BurnInReviewed { .. } | Event::Reviewed { .. } => {
                self.last_review = review(event, pace).unwrap_or_default();
            }
            Event::PointDone { point } => self.take_away(*point),
            Event::Advanced { .. } if now >= self.last_picture + PICTURE => {}
            _ => return,
        }
        self.last_picture = now;
        self.picture(pace, now);
    }

    fn take_away(&mut self, point: usize) {
        let gone: Vec<_> = self
            .chains
            .extract_if((point, 0)..(point + 1, 0), |_, _| true)
            .collect();
        for (_, (bar, _)) in gone {
            bar.finish_and_clear();
            self.all.remove(&bar);
        }
    }

    fn picture(&mut self, pace: &Pace, now: Duration) {
        if pace.points > 1 {
            let points = self.points.get_or_insert_with(|| {
                let bar = ProgressBar::new(pace.points as u64)
                    .with_style(style("points    [{bar:30}] {pos} of {len}"));
                self.all.insert(0, bar)
            });
            points.set_position(pace.points_done as u64);
        }
        for (point, chains) in &pace.under_way {
            for (chain, standing) in chains.iter().enumerate() {
                if let Some(standing) = standing {
                    self.chain((*point, chain), standing, pace.points > 1);
                }
            }
        }
        let speed = pace.words(now);
        self.foot.set_message(match &*self.last_review {
            "" => speed,
            review => format!("{review} | {speed}"),
        });
    }

    fn chain(&mut self, key: (usize, usize), standing: &Standing, swept: bool) {
        if !self.chains.contains_key(&key) {
            if self.chains.len() == MOST {
                return;
            }
            let name = if swept {
                format!("point {:<4} chain {:<3}", key.0 + 1, key.1 + 1)
            } else {
                format!("chain {:<3}", key.1 + 1)
            };
            let bar = ProgressBar::new(standing.target)
                .with_style(style("{prefix} [{bar:30}] {msg} {pos} of {len}"))
                .with_prefix(name);
            // After the bars that stand before it.
            let before = self.chains.range(..key).next_back();
            let bar = match before {
                Some((_, (before, _))) => self.all.insert_after(before, bar),
                None => self.all.insert(usize::from(self.points.is_some()), bar),
            };
            let nowhere = Standing {
                target: 0,
                ..*standing
            };
            self.chains.insert(key, (bar, nowhere));
        }
        let Some((bar, shown)) = self
            .chains
            .get_mut(&key)
            .filter(|(_, shown)| shown != standing)
        else {
            return;
        };
        *shown = *standing;
        bar.set_message(match standing.phase {
            Phase::BurnIn => "burn-in",
            Phase::Draws => "draws  ",
        });
        bar.set_length(standing.target);
        bar.set_position(standing.done);
    }

    pub fn end(self) {
        let bars = self.chains.values().map(|(bar, _)| bar);
        for bar in bars.chain(&self.points) {
            bar.finish_and_clear();
        }
        self.foot.finish_and_clear();
        let _ = self.all.clear();
    }
}
