//! Why the figures of a run may be believed, and how far: three claims, each with the conditions it rests on,
//! each condition with its standing and the evidence in words.
//!
//! - *the average converges* (Tierney 1994; Roberts & Rosenthal 2006);
//! - *the error bar holds* (Roberts & Rosenthal 1997; Jones 2004);
//! - *the n-step law converges*: a last state may stand for a draw.
//!
//! What a family and its kernels say before any draw comes from the model; the draws add evidence, which never
//! proves. A run stops before it starts when a condition of one of the first two claims has failed and the study
//! does not accept that.

mod claim;
mod condition;
mod evidence;
mod json;

pub use claim::{Claim, Grounds, grounds};
pub use condition::{meaning, rank, standing_word, weaker};
