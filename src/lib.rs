//! Boundwright checks hand-derived bounds.
pub mod enclosure;
pub mod kernel;
pub mod source;
