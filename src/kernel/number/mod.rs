//! Numbers of the kernel: exact rationals, dyadic intervals, enclosures of functions.
//!
//! Uses `std`, `num-bigint`, `num-rational`, `num-integer`, `num-traits`; nothing else.
//! Never rounds inward, never cuts an argument down to a function's domain, never holds an
//! empty set or a "not a number", never lets a result depend on what was computed before.
//!
//! To audit: `dyadic.rs` (one rounded operation on numbers `m 2^e`), `interval.rs` (sets
//! built from them, with the table of infinite ends), `fixed.rs` (approximations with a
//! counted error and the one rule for the tail of a series), then `elementary/`, where
//! each function states the formula, its domain and its source.

mod dyadic;
mod elementary;
mod fixed;
mod function;
mod interval;
mod refusal;

pub use dyadic::{Dyadic, Toward};
pub use elementary::{Constant, apply, binomial_over_integers, factorial_over_integers, pow};
pub use function::{Arity, Function};
pub use interval::Interval;
pub use refusal::Refusal;

/// Fewest bits at which functions are enclosed.
pub const MIN_PRECISION: u32 = 32;
/// Most bits at which functions are enclosed.
pub const MAX_PRECISION: u32 = 4096;
