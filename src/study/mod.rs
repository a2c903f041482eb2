//! The file's top level, the sweep, and resolution into a Plan.

use crate::course::Family;
use crate::place::Fault;
use crate::plan::Plan;
use std::path::Path;

/// Reads a study file and resolves it into a plan, or gives every fault in it.
pub fn resolve(file: &Path, registry: &[&dyn Family]) -> Result<Plan, Vec<Fault>> {
    let _ = registry;
    Err(vec![Fault::whole(format!(
        "{}: cannot be read",
        file.display()
    ))])
}
