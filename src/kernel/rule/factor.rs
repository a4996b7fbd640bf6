//! `{factor (f) (q) {0 <= f} {0 <= q} {defined}?}`
//!
//! Goal `l <= r` where `r - l = f q` by normal form, from `0 <= f` and `0 <= q`; goal
//! `l < r` from `0 < f` and `0 < q`. Dividing out `(x - a)^2`, or `x - phi(y)` on one
//! side of the curve, is this rule.
//! Sound: a product of two numbers `>= 0` is `>= 0`; f and q are defined on Gamma, also
//! where f is zero (R10, R26).
//! Forgotten: a quotient that is not defined at the zero that was divided out.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let (f, q) = (fields.term()?, fields.term()?);
    let steps = [(f, fields.step()?), (q, fields.step()?)];
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is no inequality");
    }
    require_defined(s, &[f, q], defined, k)?;
    if !k.equal(s, &goal.difference(), &f.multiply(q))? {
        return refuse(Reason::NotProved, format!("{goal} is not {f} times {q}"));
    }
    for (t, step) in steps {
        prove(&s.with_goal(Relation::new(Term::zero(), goal.rel, t.clone())), step, k)?;
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn factors() {
        accepted(
            "for all x : real in (-inf, inf): x^4 - 2*x^3 + 2*x^2 - 2*x + 1 >= 0",
            "{factor ((x - 1)^2) (x^2 + 1) {sign} {sign}}",
        );
        accepted(
            "for all x : real in [1, inf), y : real in [0, 1]: x^2 >= y^2",
            "{factor (x - y) (x + y) {sign} {sign}}",
        );
    }

    #[test]
    fn refused() {
        // A strict goal at a zero, a factor without a sign, a wrong product.
        rejected("for all x : real in [0, 1]: x^2 > 0", "{factor (x) (x) {sign} {sign}}");
        rejected("for all x : real in [-1, 1]: x^3 >= 0", "{factor (x^2) (x) {sign} {sign}}");
        rejected("for all x : real in [0, 1]: x^2 >= 1/9", "{factor (x) (x) {sign} {sign}}");
        // The quotient is not defined at the zero.
        rejected("for all x : real in [0, 1]: x >= 0", "{factor (x^2) (1/x) {sign} {sign}}");
        rejected("for all x : real in [0, 1]: x = x", "{factor (1) (0) {sign} {sign}}");
    }
}
