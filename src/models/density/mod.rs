//! Targets given by a density, with data.
//!
//! `[model]` declares constants, unknowns with their laws, definitions, what was observed, and further terms
//! of the log density. Each unknown gets a transform from unconstrained coordinates to its support; the sum
//! of all parts, Jacobians included, is compiled to one program for several chains in lockstep.

mod axis;
mod canonical;
mod conditions;
mod course;
mod declared;
mod improper;
mod missing;
mod names;
mod narrowed;
mod observed;
mod order;
mod posterior;
mod ratio;
mod recorded;
mod start;
mod start_reading;
#[cfg(test)]
mod tests;
mod transform;
mod unknown;
mod uses;

use crate::canon::Json;
use crate::course::{ChainSeed, Condition, Course, Family, Model, Quantity, Request, StartFault};
use crate::methods::Sampler;
use crate::place::Faults;
use declared::Declared;
use posterior::Posterior;
use recorded::Recorded;
use start::Start;
use std::sync::Arc;

/// The family `density`.
pub struct DensityFamily;

/// A density model with its sampler, start and recorded quantities.
pub struct Density {
    posterior: Posterior,
    recorded: Recorded,
    sampler: Sampler,
    start: Start,
    /// Steps of the kernel between recorded draws.
    every: u64,
    canonical: Json,
    conditions: Vec<Condition>,
}

impl Family for DensityFamily {
    fn name(&self) -> &'static str {
        "density"
    }
    fn about(&self) -> &'static str {
        "unknowns with laws, what was observed, and the density of the one given the other"
    }
    fn resolve(&self, request: &Request, faults: &mut Faults) -> Option<Arc<dyn Model>> {
        let before = faults.count();
        let declared = Declared::read(request.model, request.predict, faults);
        let place = request.model.place();
        let posterior = Posterior::build(&declared, request.tables, place, faults)?;
        let recorded = recorded::resolve(
            &declared,
            request.estimands,
            &posterior,
            request.tables,
            faults,
        );
        if !posterior.undefined.is_empty() {
            // A step or a start may name what has a fault of its own.
            return None;
        }
        let names: Vec<String> = posterior
            .unknowns
            .iter()
            .map(|unknown| unknown.name.clone())
            .collect();
        let sampler = crate::methods::read(request.sampler, &posterior.coordinates, &names, faults);
        let start = start_reading::read(request.start, &posterior, faults);
        let (recorded, sampler, start) = (recorded?, sampler?, start?);
        if faults.count() > before {
            return None;
        }
        let canonical = canonical::of(&declared, &posterior, &sampler, &start);
        let conditions = conditions::of(&declared, &posterior, &sampler, &start, request.estimands);
        let every = request.every;
        Some(Arc::new(Density {
            posterior,
            recorded,
            sampler,
            start,
            every,
            canonical,
            conditions,
        }))
    }
}

impl Model for Density {
    fn canonical(&self) -> Json {
        self.canonical.clone()
    }
    fn quantities(&self) -> &[Quantity] {
        &self.recorded.quantities
    }
    fn cost(&self) -> f64 {
        let steps = self.every as f64 * self.sampler.evaluations() * self.posterior.target.cost();
        let predictions: f64 = self
            .recorded
            .predictions
            .iter()
            .map(|p| p.parameters.cost() + 200.0 * p.len as f64)
            .sum();
        steps + self.recorded.program.cost() + predictions
    }
    fn state_size(&self) -> usize {
        // Draws made, position, log density, stream.
        8 + 8 * self.posterior.coordinates.len() + 8 + 32 + self.sampler.state_size()
    }
    fn course(self: Arc<Self>, chains: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault> {
        Ok(Box::new(course::Lanes::start(self, chains)?))
    }
    fn conditions(&self) -> Vec<Condition> {
        self.conditions.clone()
    }
    fn reasons(&self) -> Vec<String> {
        self.sampler.reasons.clone()
    }
}
