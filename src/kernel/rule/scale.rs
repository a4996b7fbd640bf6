//! `{scale [l' rho r'] (k) {0 < k} {rest} {defined}?}`
//!
//! Goal `l rho r` from `l' rho r'` where `r - l = k (r' - l')` by normal form and
//! `k > 0`. Clearing denominators and dividing by common factors are this rule.
//! Sound: a positive factor changes neither the sign nor the zeros of a
//! difference (R8, R11). Forgotten: a factor that has zeros, or whose sign was
//! only sampled.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let (stated, factor) = (fields.relation()?, fields.term()?);
    let (positive, rest) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    let new = stated.turned();
    if new.rel != goal.rel && !(new.rel == Rel::Lt && goal.rel == Rel::Le) {
        return refuse(Reason::Condition, "the scaled goal is another relation");
    }
    require_defined(s, &[factor, &new.left, &new.right], defined, k)?;
    if !k.equal(s, &goal.difference(), &factor.multiply(&new.difference()))? {
        return refuse(Reason::NotProved, format!("{goal} is not {factor} times {new}"));
    }
    prove(&s.with_goal(Relation::new(Term::zero(), Rel::Lt, factor.clone())), positive, k)?;
    prove(&s.with_goal(stated.clone()), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn scaled() {
        accepted(
            "for all x : real in (0, inf): x/(1 + x) < 1",
            "{scale [x < 1 + x] (1/(1 + x)) {sign} {sign}}",
        );
    }

    #[test]
    fn refused() {
        // The factor x has a zero, 1 - x no sign.
        rejected("for all x : real in [0, 1]: 0 < x*exp(x)", "{scale [0 < exp(x)] (x) {sign} {sign}}");
        rejected(
            "for all x : real in [0, 2]: 0 <= (1 - x)*exp(x)",
            "{scale [0 <= exp(x)] (1 - x) {sign} {sign}}",
        );
        rejected("for all x : real in (0, 2]: x <= 1", "{scale [x <= 2] (1) {sign} {sign}}");
        rejected("for all x : real in (0, 2]: 0 < x^2", "{scale [0 <= x] (x) {sign} {sign}}");
    }
}
