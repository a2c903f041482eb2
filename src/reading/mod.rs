//! Spanned sections of TOML, and data files (CSV).
