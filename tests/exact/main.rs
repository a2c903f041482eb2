//! Kernels against exact answers: their stationary law, their rates, the independence of lanes.

mod chains;
mod lanes;
mod planted;
mod rank;
mod stationary;
mod targets;
mod theory;
