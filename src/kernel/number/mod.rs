//! Numbers of the kernel: exact rationals, dyadic intervals, enclosures of functions.
//!
//! Uses `std`, `num-bigint`, `num-rational`, `num-integer`, `num-traits`; nothing else.
//! Never rounds inward, never clips an argument to a function's domain, never holds
//! an empty set or a "not a number".

mod function;

pub use function::{Arity, Function};
