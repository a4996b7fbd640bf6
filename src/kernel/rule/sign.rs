//! `{sign}`
//!
//! The goal follows from the shape of its terms: declared ends, hypotheses about
//! the very terms, ranges of functions, signs of the summands of the normal form.
//! Sound: `kernel/sign.rs`, R10. Forgotten: `>= 0` plus `>= 0` taken for `> 0`;
//! a power of a base that may be 0 taken for positive.

use super::Kernel;
use crate::kernel::sequent::Sequent;
use crate::kernel::sign;
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, fields: Fields, k: &Kernel) -> Checked {
    fields.end()?;
    let goal = s.relation()?;
    k.spend(goal.difference().size_up_to(100_000) as u64)?;
    if sign::settles(s, &goal) {
        return Ok(());
    }
    refuse(Reason::NotProved, format!("the shape of {goal} does not settle it"))
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn signs() {
        accepted("for all x : real in [0, inf), y : real in (0, 1): x*exp(y) + y > 0", "{sign}");
        accepted("for all x : real in (-inf, inf): x*(x + 2) + 1 >= x + x", "{sign}");
    }

    #[test]
    fn refused() {
        rejected("for all x : real in [0, inf), y : real in [0, inf): x + y > 0", "{sign}");
        rejected("for all x : real in [0, inf), p : real in (0, inf): x^p > 0", "{sign}");
        rejected("for all x : real in [-1, 1]: x >= 0", "{sign}");
        // An index hides a variable, but not from the domain of another: false for x = 6.
        let hidden = "for all k : real in [5, 6], x : real in [-9, k]: sum(k = 1 .. 3, 4 - x) > 0";
        rejected(hidden, "{sign}");
    }
}
