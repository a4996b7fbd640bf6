//! Why a number or an enclosure was not given.

use std::fmt;

/// The reason an operation has no answer. A refusal is never a value.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Refusal {
    /// It is not certain that the whole argument box lies in the domain of the named
    /// operation. This alone never shows that some point is outside.
    OutsideDomain(&'static str),
    /// The named limit would be exceeded.
    TooLarge(&'static str),
    /// The function takes another number of arguments.
    WrongArity,
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Refusal::OutsideDomain(what) => write!(f, "{what} is not certainly defined on the whole box"),
            Refusal::TooLarge(what) => write!(f, "limit exceeded: {what}"),
            Refusal::WrongArity => write!(f, "wrong number of arguments"),
        }
    }
}

impl std::error::Error for Refusal {}
