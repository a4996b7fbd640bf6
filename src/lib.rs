//! Boundwright checks hand-derived bounds.
pub mod kernel;
pub mod source;
