//! `{identity}`
//!
//! Both sides of `l = r` (or `l <= r`) have the same normal form.
//! Sound: the sequent is well posed, so both sides are defined, and where both
//! are defined equal normal forms mean equal values (R8; `normal.rs`).
//! Forgotten: a strict goal; two atoms merged because they agree numerically;
//! the identity used to show that a side is defined.

use super::Kernel;
use crate::kernel::sequent::{Rel, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, fields: Fields, k: &Kernel) -> Checked {
    fields.end()?;
    let goal = s.relation()?;
    if !matches!(goal.rel, Rel::Le | Rel::Eq) {
        return refuse(Reason::Condition, format!("an identity does not prove {goal}"));
    }
    if k.equal(s, &goal.left, &goal.right)? {
        return Ok(());
    }
    refuse(Reason::NotProved, format!("the sides of {goal} have different normal forms"))
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn identities() {
        accepted("for all x : real in (0, inf): x/x = 1", "{identity}");
        accepted("for all x : real in (0, inf), p : real in [1, 2]: log(x^p) <= p*log(x)", "{identity}");
    }

    #[test]
    fn refused() {
        rejected("for all x : real in (0, inf): x < x", "{identity}");
        rejected("for all x : real in (-inf, inf): sqrt(x^2) = x", "{identity}");
        // 22/7 and pi agree to two digits only; no tolerance makes them one.
        rejected("for all x : real in (0, inf): 22/7*x = pi*x", "{identity}");
    }
}
