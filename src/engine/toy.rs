//! A family for the tests of what comes after the models: first-order autoregressions in lockstep, of known
//! law, each with a scale that adapts in the burn-in and a record of `x`, `x^2` and `x > 0`.
//!
//! `x' = rho x + sqrt(1 - rho^2) u`, `u` uniform with mean 0 and variance 1; so `x` has mean 0, variance 1
//! and autocorrelation `rho^k` at lag `k`.

use super::task::{Chain, Task};
use super::trail;
use crate::canon::Json;
use crate::course::{
    Block, ChainSeed, Condition, Course, Model, Phase, Quantity, StartFault, State,
};
use crate::plan::BurnIn;
use crate::random::{Purpose, Stream};
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

/// What can be wrong with the toy, to see it caught.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Planted {
    Nothing,
    /// The scale goes on adapting after the burn-in.
    LateAdaptation,
    /// Every course that is built draws other numbers.
    Drift,
    NoStart,
    Panic,
}

pub struct Toy {
    pub rho: f64,
    pub planted: Planted,
    quantities: Vec<Quantity>,
    built: AtomicU64,
}

struct ToyCourse {
    model: Arc<Toy>,
    x: Vec<f64>,
    scale: Vec<f64>,
    streams: Vec<Stream>,
    frozen: bool,
}

impl Toy {
    pub fn new(rho: f64, planted: Planted) -> Arc<Toy> {
        let quantity = |name: &str, condition| Quantity {
            name: name.into(),
            unit: None,
            condition,
            estimand: 0,
        };
        Arc::new(Toy {
            rho,
            planted,
            quantities: vec![
                quantity("x", false),
                quantity("square", false),
                quantity("positive", true),
            ],
            built: AtomicU64::new(0),
        })
    }

    /// A task of this model; chain keys are made from `seed`.
    pub fn task(
        self: &Arc<Toy>,
        seed: u8,
        chains: usize,
        burn_in: BurnIn,
        reviews: &[u64],
    ) -> Task {
        let chain = |chain: usize| {
            let stream_key = trail::plain(&[seed, chain as u8]);
            Chain {
                seed: ChainSeed { chain, stream_key },
                key: trail::plain(&stream_key),
            }
        };
        Task {
            model: self.clone(),
            chains: (0..chains).map(chain).collect(),
            burn_in,
            reviews: reviews.to_vec(),
            block: 70,
        }
    }
}

impl Model for Toy {
    fn canonical(&self) -> Json {
        Json::Null
    }
    fn quantities(&self) -> &[Quantity] {
        &self.quantities
    }
    fn cost(&self) -> f64 {
        5.0
    }
    fn state_size(&self) -> usize {
        48
    }
    fn course(self: Arc<Self>, chains: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault> {
        if self.planted == Planted::NoStart {
            return Err(StartFault("the toy was told not to start".into()));
        }
        let drift = match self.planted {
            Planted::Drift => self.built.fetch_add(1, Ordering::Relaxed) as f64 * 1e-9,
            _ => 0.0,
        };
        Ok(Box::new(ToyCourse {
            x: chains
                .iter()
                .map(|seed| Stream::new(&seed.stream_key, Purpose::Start).unit() * 8.0 - 4.0)
                .collect(),
            scale: vec![1.0 + drift; chains.len()],
            streams: chains
                .iter()
                .map(|seed| Stream::new(&seed.stream_key, Purpose::Walk))
                .collect(),
            frozen: false,
            model: self,
        }))
    }
    fn conditions(&self) -> Vec<Condition> {
        Vec::new()
    }
    fn reasons(&self) -> Vec<String> {
        Vec::new()
    }
}

impl Course for ToyCourse {
    fn chains(&self) -> usize {
        self.x.len()
    }
    fn advance(&mut self, phase: Phase, draws: usize) -> Vec<Block> {
        assert!(self.model.planted != Planted::Panic, "planted");
        self.frozen |= phase == Phase::Draws;
        let rho = self.model.rho;
        let wide = (12.0 * (1.0 - rho * rho)).sqrt();
        let quantities = self.model.quantities.len();
        let mut blocks: Vec<_> = (0..self.x.len())
            .map(|_| Block {
                draws,
                values: vec![0.0; draws * quantities],
            })
            .collect();
        let adapts = !self.frozen || self.model.planted == Planted::LateAdaptation;
        for draw in 0..draws {
            for (lane, block) in blocks.iter_mut().enumerate() {
                let x = rho * self.x[lane] + wide * (self.streams[lane].unit() - 0.5);
                self.x[lane] = x;
                if adapts {
                    self.scale[lane] += 1e-4 * (x.abs() - 0.8);
                }
                let seen = x * self.scale[lane];
                block.values[draw] = seen;
                block.values[draws + draw] = seen * seen;
                block.values[2 * draws + draw] = f64::from(u8::from(seen > 0.0));
            }
        }
        blocks
    }
    fn save(&self, chain: usize) -> State {
        let mut moving = self.x[chain].to_le_bytes().to_vec();
        moving.extend(self.streams[chain].save());
        State {
            frozen: self.scale[chain].to_le_bytes().to_vec(),
            moving,
        }
    }
    fn load(&mut self, chain: usize, state: &State) -> Result<(), String> {
        let number = |bytes: &[u8]| bytes.try_into().map(f64::from_le_bytes).ok();
        let parts = state.moving.split_first_chunk::<8>();
        let (Some((x, stream)), Some(scale)) = (parts, number(&state.frozen)) else {
            return Err("not the toy's state".into());
        };
        let stream: &[u8; 32] = stream.try_into().map_err(|_| "not the toy's state")?;
        self.x[chain] = f64::from_le_bytes(*x);
        self.scale[chain] = scale;
        self.streams[chain] = Stream::load(stream);
        Ok(())
    }
    fn notes(&self, _chain: usize) -> Vec<(String, f64)> {
        Vec::new()
    }
}
