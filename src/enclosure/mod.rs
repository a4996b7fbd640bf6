//! Sets of reals that contain the exact value.
//!
//! What it may use: the number crates; no other room. What it must never do:
//! return a set narrower than the truth, or stay silent when a function was
//! left undefined somewhere on its arguments. No verdict rests on this room:
//! the kernel has its own arithmetic.

mod function;

pub use function::{Arity, Function};
