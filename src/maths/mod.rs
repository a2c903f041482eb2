//! Elementary and special functions with the same bits on every target, sums of fixed shape, and the
//! operations that formulas are made of.
//!
//! Nothing here calls the platform's mathematics: only `+ - * /`, `sqrt`, comparisons and rounding to whole
//! numbers, which are exact everywhere, and the pinned `libm` crate, which is written in them.

#![expect(
    clippy::excessive_precision,
    reason = "constants as they were published"
)]

pub mod operation;

mod apply;
mod beta;
mod dense;
#[cfg(test)]
mod ends;
mod error;
mod exponential;
mod gamma;
mod hyperbolic;
mod incomplete_beta;
mod incomplete_gamma;
mod logarithm;
mod logistic;
mod normal;
mod pairs;
mod power;
mod root;
mod rounding;
mod spread;
mod sum;
mod tail;
mod trigonometric;

pub use beta::{ln_beta, ln_choose};
pub use dense::{
    cholesky, multiply_lower, multiply_lower_transposed, solve_lower, solve_lower_transposed,
};
pub use error::{erf, erfc};
pub use exponential::{exp, expm1};
pub use gamma::{digamma, ln_gamma};
pub use hyperbolic::{cosh, sinh, tanh};
pub use incomplete_beta::{beta_i, beta_ic, beta_quantile, ln_beta_i, ln_beta_ic};
pub use incomplete_gamma::{gamma_p, gamma_q, gamma_quantile, ln_gamma_p, ln_gamma_q};
pub use logarithm::{ln, log1p};
pub use logistic::{logistic, softplus};
pub use normal::{ln_normal_cdf, normal_cdf, normal_quantile};
pub use operation::{Binary, Ternary, Unary};
pub use power::power;
pub use rounding::{absolute, ceil, floor, maximum, minimum, round, sign, sqrt};
pub use spread::{Spread, mean, variance};
pub use sum::{CHUNK, PARTIALS, Partials, combine_chunks, combine_partials, sum};
pub use trigonometric::{acos, asin, atan, cos, sin, tan};
