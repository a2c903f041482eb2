//! Bars on a terminal: one a chain while they fit, one for the points of a sweep, and a line with the last
//! review and the speed.

use super::lines::review;
use super::pace::Pace;
use crate::course::Phase;
use crate::engine::Event;
use indicatif::{MultiProgress, ProgressBar, ProgressStyle};
use std::collections::BTreeMap;
use std::time::Duration;

/// More chains than this have no bars of their own.
const MOST: usize = 16;

pub struct Bars {
    all: MultiProgress,
    foot: ProgressBar,
    points: Option<ProgressBar>,
    chains: BTreeMap<(usize, usize), ProgressBar>,
    last_review: String,
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
        }
    }

    pub fn event(&mut self, event: &Event, pace: &Pace, now: Duration) {
        match event {
            Event::Begun { points, .. } if *points > 1 => {
                let bar = ProgressBar::new(*points as u64)
                    .with_style(style("points   [{bar:30}] {pos} of {len}"));
                self.points = Some(self.all.insert_before(&self.foot, bar));
            }
            Event::PointBegun { point, chains, .. } if self.chains.len() + chains <= MOST => {
                for chain in 0..*chains {
                    let name = if pace.points > 1 {
                        format!("point {:<4} chain {:<3}", point + 1, chain + 1)
                    } else {
                        format!("chain {:<3}", chain + 1)
                    };
                    let bar = ProgressBar::no_length()
                        .with_style(style("{prefix} [{bar:30}] {msg} {pos} of {len}"))
                        .with_prefix(name);
                    let bar = self.all.insert_before(&self.foot, bar);
                    self.chains.insert((*point, chain), bar);
                }
            }
            Event::Advanced {
                point,
                chain,
                phase,
                done,
                target,
                ..
            } => {
                if let Some(bar) = self.chains.get(&(*point, *chain)) {
                    bar.set_message(match phase {
                        Phase::BurnIn => "burn-in",
                        Phase::Draws => "draws  ",
                    });
                    bar.set_length(*target);
                    bar.set_position(*done);
                }
            }
            Event::BurnInReviewed { .. } | Event::Reviewed { .. } => {
                self.last_review = review(event, pace).unwrap_or_default();
            }
            Event::PointDone { point } => {
                let gone = self
                    .chains
                    .extract_if((*point, 0)..(*point + 1, 0), |_, _| true);
                for (_, bar) in gone {
                    bar.finish_and_clear();
                    self.all.remove(&bar);
                }
                if let Some(points) = &self.points {
                    points.inc(1);
                }
            }
            _ => {}
        }
        let speed = pace.words(now);
        self.foot.set_message(match &*self.last_review {
            "" => speed,
            review => format!("{review} | {speed}"),
        });
    }

    pub fn end(self) {
        for bar in self.chains.values() {
            bar.finish_and_clear();
        }
        if let Some(points) = &self.points {
            points.finish_and_clear();
        }
        self.foot.finish_and_clear();
        let _ = self.all.clear();
    }
}
