//! Boundwright checks hand-derived bounds.
pub mod source;
