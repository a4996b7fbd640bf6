//! Mathematical expressions as exact symbolic trees.
//!
//! What it may use: `enclosure` (the table of functions) and the number crates.
//! What it must never do: round a number, change where a term is defined when
//! building it, or know anything about files, syntax trees and statements.
//! Start with [`Term`]; [`differentiate`] and [`simplify`] work on it,
//! [`is_integer`] is the syntactic test of the language's integer positions.
//! The kernel shares nothing with this room; the two meet in text only.

mod differentiate;
mod enclose;
#[cfg(feature = "mpfr")]
pub mod evaluate;
mod integer;
mod print;
#[cfg(test)]
pub(crate) mod sample;
mod simplify;
mod substitute;
#[cfg(feature = "mpfr")]
pub mod tape;
mod term;

/// The table of functions lies with their enclosures; terms are written with it.
pub use crate::enclosure::{Arity, Function};
pub use differentiate::{NotDifferentiable, differentiate};
pub use enclose::{MAX_TERMS, NoValue, Ranges, enclose};
pub use integer::{Sort, Sorts, has_sort, is_even, is_integer};
pub use print::for_people;
pub use simplify::simplify;
pub use substitute::{Renaming, Substitution, fresh_name};
pub use term::{Constant, End, Name, Node, SeriesKind, Term};
