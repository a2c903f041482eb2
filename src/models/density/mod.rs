//! Targets given by a density, with data.
