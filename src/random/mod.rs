//! Streams of random words, and our own samplers on them.
//!
//! Every sampler takes its words from the stream it is given, keeps no spare value, and calls no mathematics
//! but `maths`: the same stream gives the same numbers everywhere. Outside their domain (named at each) the
//! samplers of real parameters return NaN and take no word.

mod beta;
mod binomial;
mod categorical;
mod deviance;
mod exponential;
mod gamma;
mod geometric;
mod index;
mod negative_binomial;
mod normal;
mod poisson;
mod stream;
mod ziggurat;

#[cfg(test)]
pub(crate) mod trial;

pub use beta::beta;
pub use binomial::binomial;
pub use categorical::categorical;
pub use exponential::{exponential, exponentials};
pub use gamma::{gamma, ln_gamma};
pub use geometric::geometric;
pub use index::index;
pub use negative_binomial::negative_binomial;
pub use normal::{normal, normals};
pub use poisson::poisson;
pub use stream::{Purpose, Stream};
