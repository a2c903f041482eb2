//! How a model family declares itself and reads its sections of the study.

use crate::course::Model;
use crate::place::{Faults, Text};
use crate::reading::{Section, Table};
use std::collections::BTreeMap;
use std::sync::Arc;

/// A model family: one entry of the registry, chosen by `[model] family`.
pub trait Family: Sync {
    /// As written in `[model] family`.
    fn name(&self) -> &'static str;
    /// One line for the catalogue.
    fn about(&self) -> &'static str;
    /// Reads the family's sections. Asks for every key it knows, records every fault, and calls `finish` on
    /// every section it is given; `None` only with a fault recorded.
    fn resolve(&self, request: &Request, faults: &mut Faults) -> Option<Arc<dyn Model>>;
}

/// What a family is given of one point of a study: swept values are in place.
pub struct Request<'a> {
    /// `[model]`; the key `family` has been asked for.
    pub model: &'a Section,
    /// `[sampler]`; left out, the family chooses and says why.
    pub sampler: Option<&'a Section>,
    /// `[predict]`
    pub predict: Option<&'a Section>,
    /// In the order of the file. Empty when the study has none: then every unknown becomes one.
    pub estimands: &'a [EstimandSpec],
    pub start: &'a StartSpec,
    pub tables: &'a BTreeMap<String, Arc<Table>>,
    /// Steps of the kernel between recorded draws, 1 or more.
    pub every: u64,
}

/// What an `[[estimand]]` says about the quantity itself.
#[derive(Debug, Clone, PartialEq)]
pub struct EstimandSpec {
    pub name: Text,
    /// A formula; left out, the name is the formula.
    pub of: Option<Text>,
    pub unit: Option<Text>,
}

/// `[ensemble] start`
#[derive(Debug, Clone)]
pub enum StartSpec {
    /// Each unknown from the middle half of its prior.
    Spread,
    /// Each unknown from its prior.
    Prior,
    /// `{ at = {…} }`: a value, or a list of values, for each unknown; the same for every chain.
    At(Section),
    /// `{ file = "…" }`: a column for each element of an unknown, a row for each chain.
    File { path: Text, table: Arc<Table> },
}
