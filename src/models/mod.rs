//! Model families.

pub mod density;
