//! Pure functions of plan, summary and grounds: tables.
