//! The study resolved: no default left unsaid; canonical form and keys.
