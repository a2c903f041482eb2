//! The chains that a kernel moves, in lockstep.

use super::saved::Reader;
use crate::course::{State, Target};
use crate::random::Stream;

/// Chains in lockstep, a lane each. What happens to a lane depends on nothing in the others.
#[derive(Debug, Clone)]
pub struct Walkers {
    pub lanes: usize,
    /// Coordinate `c` of lane `l` is at `c * lanes + l`.
    pub position: Vec<f64>,
    /// Log density of the target at each lane's position, as the target last gave it.
    pub log_density: Vec<f64>,
    /// Each lane's own stream; only that lane's decisions take words from it.
    pub streams: Vec<Stream>,
    /// Lanes that a kernel may move. The others keep position, density, stream and adapted values (a
    /// mixture sends different lanes to different kernels).
    pub active: Vec<bool>,
}

impl Walkers {
    /// Walkers at a position laid out as in [`Walkers::position`], every lane active; evaluates the target
    /// there.
    ///
    /// # Panics
    /// When the sizes do not fit together.
    pub fn new(target: &mut dyn Target, position: Vec<f64>, streams: Vec<Stream>) -> Walkers {
        let lanes = target.lanes();
        assert_eq!(streams.len(), lanes, "a stream for each lane");
        assert_eq!(position.len(), lanes * target.coordinates().len());
        let mut log_density = vec![f64::NEG_INFINITY; lanes];
        target.log_density(&position, &mut log_density);
        Walkers {
            lanes,
            position,
            log_density,
            streams,
            active: vec![true; lanes],
        }
    }

    /// Appends a lane's position, log density and stream to the moving part of a state.
    pub fn save(&self, lane: usize, state: &mut State) {
        for &x in self.position.iter().skip(lane).step_by(self.lanes) {
            state.moving.extend(x.to_le_bytes());
        }
        state.moving.extend(self.log_density[lane].to_le_bytes());
        state.moving.extend(self.streams[lane].save());
    }

    /// Takes back what [`Walkers::save`] wrote.
    pub fn load(&mut self, lane: usize, state: &mut Reader) -> Result<(), String> {
        for x in self.position.iter_mut().skip(lane).step_by(self.lanes) {
            *x = state.moving.real()?;
        }
        self.log_density[lane] = state.moving.real()?;
        self.streams[lane] = Stream::load(&state.moving.array()?);
        Ok(())
    }
}
