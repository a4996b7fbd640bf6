//! Boundwright checks hand-derived bounds.
pub mod command;
pub mod diagnostic;
pub mod enclosure;
pub mod expression;
pub mod kernel;
pub mod language;
pub mod report;
#[cfg(feature = "mpfr")]
pub mod search;
pub mod source;
pub mod statement;
