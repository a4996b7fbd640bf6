//! Sets of reals that contain the exact value.
//!
//! What it may use: the number crates; no other room. What it must never do:
//! return a set narrower than the truth, or stay silent when a function was
//! left undefined somewhere on its arguments. No verdict rests on this room:
//! the kernel has its own arithmetic.
//!
//! Where to start reading: `rounding.rs` says what one end of an enclosure
//! can do, `interval.rs` what an enclosure is, `arithmetic.rs` and
//! `elementary/` how operations find the ends of their results. There are two
//! kinds of ends: `f64` (`float64.rs`) for speed, MPFR numbers (`mpfr.rs`) for
//! precision. Without the feature `mpfr` only the table of functions, the
//! record of definedness and the trait [`Enclose`] remain.

mod domain;
mod enclose;
mod function;

#[cfg(feature = "mpfr")]
mod arithmetic;
#[cfg(feature = "mpfr")]
mod decimal;
#[cfg(feature = "mpfr")]
mod elementary;
#[cfg(feature = "mpfr")]
mod float64;
#[cfg(feature = "mpfr")]
mod interval;
#[cfg(feature = "mpfr")]
mod mpfr;
#[cfg(feature = "mpfr")]
mod rounding;
#[cfg(all(test, feature = "mpfr"))]
mod tests;

pub use domain::Definedness;
pub use enclose::Enclose;
pub use function::{Arity, Function};

#[cfg(feature = "mpfr")]
pub use decimal::decimal;
#[cfg(feature = "mpfr")]
pub use float64::Interval;
#[cfg(feature = "mpfr")]
pub use interval::Enclosure;
#[cfg(feature = "mpfr")]
pub use mpfr::{BigFloat, BigInterval, Bits};
#[cfg(feature = "mpfr")]
pub use rounding::{End, Toward};
