//! The file's top level, the sweep, and resolution into a Plan.
