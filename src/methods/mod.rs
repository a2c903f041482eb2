//! Kernels on a Target: random-walk Metropolis, slice, full conditional; adaptation; cycles and mixtures.
