//! Streams of random words, and our own samplers on them.

mod stream;

pub use stream::{Purpose, Stream};
