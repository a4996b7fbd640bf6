//! Finds certificates. Nothing here is believed: what it says is text that the
//! kernel checks, so a mistake costs time, never truth.
//!
//! What it may use: `statement`, `expression`, `enclosure`. What it must never
//! do: measure time, depend on threads or on the order of a hash table, print,
//! or decide by a tolerance that something is true.
//!
//! A search may ask a referee (`engine.rs`) about single steps; what it is told
//! saves it work and proves nothing.
//!
//! Start with `engine.rs` (the loop and the trait [`Method`]); `proof.rs` writes
//! certificates; each file of `method/` is one way of proving or refuting.

mod algebraic;
mod budget;
mod decide;
mod diary;
mod engine;
mod exact;
mod frame;
mod gamma;
mod gram;
mod interpret;
mod laurent;
pub mod method;
mod minima;
mod outcome;
mod plain;
mod polynomial;
mod proof;
mod range;
mod sample;
mod tight;
mod towards;

pub use budget::{Budget, Effort, Exhausted};
pub use decide::{Task, decide};
pub use diary::{Diary, Entry};
pub use engine::{Answer, MAX_DEPTH, Method, Referee, Search, Stuck, difference};
pub use frame::{Cell, Frame};
pub use outcome::{Decision, Margin, Outcome, Undecided, Witness};
pub use proof::{Field, Proof};
