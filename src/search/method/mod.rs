//! Ways of proving and refuting, one file each, and the order in which the
//! portfolio tries them: cheap and decisive first.

mod boxes;
mod ladder;
mod refute;

pub use boxes::Boxes;
pub use ladder::{Faces, Ladder};
pub use refute::{WITNESS_BITS, Zeal, inhabit, refute, refute_by};

use super::engine::Method;

/// The methods in the order in which [`super::Search::prove`] tries them.
#[must_use]
pub fn portfolio() -> &'static [&'static dyn Method] {
    &[&Boxes { hand_on: false, share: 20 }, &Ladder, &Faces, &Boxes { hand_on: true, share: 60 }]
}
