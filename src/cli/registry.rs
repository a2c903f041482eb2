//! The families of models that studies may name.

use crate::course::Family;
use crate::models::density::DensityFamily;

/// In order of name.
pub const FAMILIES: [&dyn Family; 1] = [&DensityFamily];
