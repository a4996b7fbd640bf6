//! Ways of proving and refuting, one file each, and the order in which the
//! portfolio tries them: cheap and decisive first.

mod boxes;
mod cases;
mod combine;
mod contradiction;
mod convex;
mod exact;
mod facts;
mod halves;
mod homogeneous;
mod integer;
mod ladder;
mod logs;
mod refute;
mod replace;
mod roots;
mod separate;
mod squares;
mod symmetry;
#[cfg(test)]
pub(super) mod testing;

pub use boxes::Boxes;
pub use cases::Cases;
pub use combine::Combine;
pub use contradiction::Contradiction;
pub use convex::Convex;
pub use exact::{Equation, Exact};
pub use halves::Halves;
pub use homogeneous::Homogeneous;
pub use integer::{Relax, Steps};
pub use ladder::{Faces, Ladder, Unfold};
pub use logs::Logarithms;
pub use refute::{WITNESS_BITS, Zeal, inhabit, refute, refute_by};
pub use replace::Replace;
pub use roots::Roots;
pub use separate::{Factors, Summands};
pub use squares::Squares;
pub use symmetry::Symmetry;

use super::engine::Method;

/// The methods in the order in which [`super::Search::prove`] tries them.
#[must_use]
pub fn portfolio() -> &'static [&'static dyn Method] {
    &[
        &Exact,
        &Halves,
        &Combine { products: true },
        &Replace,
        &Steps,
        &Relax,
        &Roots,
        &Symmetry { squares: false },
        &Squares,
        &Symmetry { squares: true },
        &Logarithms,
        &Cases,
        &Convex,
        &Factors,
        &Homogeneous,
        &Boxes { hand_on: false, share: 20 },
        &Unfold,
        &Summands,
        &Contradiction,
        &Ladder,
        &Faces,
        &Boxes { hand_on: true, share: 60 },
        &Equation,
    ]
}
