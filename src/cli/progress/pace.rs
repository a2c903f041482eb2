//! Where every chain stands, how fast it goes, and how long it will yet take.

use crate::course::Phase;
use crate::engine::Event;
use std::collections::{BTreeMap, VecDeque};
use std::time::Duration;

/// The speed is that of this last while.
const WINDOW: Duration = Duration::from_secs(20);
/// Between two samples of the speed.
const SAMPLE: Duration = Duration::from_millis(250);

/// Where one chain stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Standing {
    pub phase: Phase,
    pub done: u64,
    /// Its next stop.
    pub target: u64,
}

#[derive(Debug, Default)]
pub struct Pace {
    pub points: usize,
    pub points_done: usize,
    /// Chains of the points under way.
    pub under_way: BTreeMap<usize, Vec<Option<Standing>>>,
    fresh: u64,
    samples: VecDeque<(Duration, u64)>,
}

impl Pace {
    pub fn event(&mut self, event: &Event, now: Duration) {
        match event {
            Event::Begun { points, .. } => {
                self.points = *points;
                self.samples.push_back((now, 0));
            }
            Event::PointBegun { point, chains, .. } => {
                self.under_way.insert(*point, vec![None; *chains]);
            }
            Event::Advanced {
                point,
                chain,
                phase,
                done,
                target,
                fresh,
            } => {
                self.fresh += fresh;
                let chains = self.under_way.get_mut(point);
                if let Some(place) = chains.and_then(|chains| chains.get_mut(*chain)) {
                    *place = Some(Standing {
                        phase: *phase,
                        done: *done,
                        target: *target,
                    });
                }
                self.sample(now);
            }
            Event::PointDone { point } => {
                self.under_way.remove(point);
                self.points_done += 1;
            }
            Event::Reviewing { .. } | Event::BurnInReviewed { .. } | Event::Reviewed { .. } => {}
        }
    }

    fn sample(&mut self, now: Duration) {
        if self
            .samples
            .back()
            .is_some_and(|(last, _)| now < *last + SAMPLE)
        {
            return;
        }
        self.samples.push_back((now, self.fresh));
        while self.samples.len() > 2
            && self
                .samples
                .front()
                .is_some_and(|(first, _)| *first + WINDOW < now)
        {
            self.samples.pop_front();
        }
    }

    /// Draws of all chains together, a second.
    pub fn rate(&self, now: Duration) -> Option<f64> {
        let (since, before) = self.samples.front()?;
        let seconds = now.checked_sub(*since)?.as_secs_f64();
        let draws = (self.fresh - before) as f64;
        (seconds > 0.2 && draws > 0.0).then(|| draws / seconds)
    }

    /// Until the chains under way reach their next review, or end where none comes.
    pub fn to_go(&self, now: Duration) -> Option<Duration> {
        let chains = self.under_way.values().flatten().flatten();
        let left: u64 = chains
            .map(|chain| chain.target.saturating_sub(chain.done))
            .sum();
        Duration::try_from_secs_f64(left as f64 / self.rate(now)?).ok()
    }

    /// `1.3 M draws/s, 12 s to the next stop`
    pub fn words(&self, now: Duration) -> String {
        let Some(rate) = self.rate(now) else {
            return "beginning".into();
        };
        let mut words = format!("{} draws/s", short(rate));
        if let Some(left) = self.to_go(now).filter(|left| left.as_secs() > 0) {
            words.push_str(&format!(", {} to the next review or the end", span(left)));
        }
        words
    }
}

/// `1.3 M`, `45 k`, `7.2`
fn short(number: f64) -> String {
    let (value, unit) = match number {
        n if n >= 1e9 => (n / 1e9, " G"),
        n if n >= 1e6 => (n / 1e6, " M"),
        n if n >= 1e3 => (n / 1e3, " k"),
        n => (n, ""),
    };
    if value < 10.0 {
        format!("{value:.1}{unit}")
    } else {
        format!("{value:.0}{unit}")
    }
}

/// `7 s`, `3 min 20 s`, `2 h 5 min`
pub fn span(time: Duration) -> String {
    let seconds = time.as_secs();
    let (minutes, hours) = (seconds / 60, seconds / 3600);
    match seconds {
        0..60 => format!("{seconds} s"),
        60..3600 => format!("{minutes} min {} s", seconds % 60),
        _ => format!("{hours} h {} min", minutes % 60),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn speed_and_time_to_go_follow_from_fresh_draws() {
        let mut pace = Pace::default();
        let at = Duration::from_secs_f64;
        pace.event(
            &Event::Begun {
                points: 1,
                threads: 1,
                lanes: 1,
            },
            at(0.0),
        );
        pace.event(
            &Event::PointBegun {
                point: 0,
                chains: 2,
                stood: 5,
            },
            at(0.0),
        );
        for (second, chain) in [(1.0, 0), (1.0, 1), (2.0, 0), (2.0, 1)] {
            pace.event(
                &Event::Advanced {
                    point: 0,
                    chain,
                    phase: Phase::Draws,
                    done: 500 * second as u64,
                    target: 10_000,
                    fresh: 500,
                },
                at(second),
            );
        }
        // 2000 draws in 2 s; both chains have 9000 to go.
        assert_eq!(pace.rate(at(2.0)), Some(1000.0));
        assert_eq!(pace.to_go(at(2.0)), Some(at(18.0)));
        assert_eq!(
            pace.words(at(2.0)),
            "1.0 k draws/s, 18 s to the next review or the end"
        );
    }

    #[test]
    fn spans_in_words() {
        let words = [7, 200, 7500].map(|s| span(Duration::from_secs(s)));
        assert_eq!(words, ["7 s", "3 min 20 s", "2 h 5 min"]);
    }
}
