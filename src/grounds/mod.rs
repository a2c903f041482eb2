//! Claims, the conditions each rests on, and the standing of each condition.
