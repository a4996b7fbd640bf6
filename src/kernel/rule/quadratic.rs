//! `{quadratic (y) (A) (B) (C) {0 < A} {0 <= 4*A*C - B^2} {defined}?}`
//!
//! Goal `l <= r` (or `<`) where `r - l = A y^2 + B y + C` by normal form, `A > 0`
//! and `4*A*C - B^2 >= 0` (`> 0` for a strict goal).
//! Sound: `4A (A y^2 + B y + C) = (2 A y + B)^2 + (4 A C - B^2)` at every point,
//! whatever the coefficients depend on (R27). Forgotten: `A = 0` with `B != 0`.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let (y, a, b, c) = (fields.term()?, fields.term()?, fields.term()?, fields.term()?);
    let (positive, discriminant) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is no inequality");
    }
    require_defined(s, &[y, a, b, c], defined, k)?;
    let square = |t: &Term| t.power(&Term::integer(2));
    let form = a.multiply(&square(y)).add(&b.multiply(y)).add(c);
    if !k.equal(s, &goal.difference(), &form)? {
        return refuse(Reason::NotProved, format!("{goal} is not {form}"));
    }
    prove(&s.with_goal(Relation::new(Term::zero(), Rel::Lt, a.clone())), positive, k)?;
    let less = Term::integer(4).multiply(a).multiply(c).subtract(&square(b));
    prove(&s.with_goal(Relation::new(Term::zero(), goal.rel, less)), discriminant, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn quadratics() {
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 - x*y + y^2 >= 0",
            "{quadratic (x) (1) (-y) (y^2) {sign} {sign}}",
        );
        accepted(
            "for all x : real in (-inf, inf): x^2 + x + 1 > 0",
            "{quadratic (x) (1) (1) (1) {sign} {sign}}",
        );
    }

    #[test]
    fn refused() {
        rejected("for all x : real in (-inf, inf): x + 1 >= 0", "{quadratic (x) (0) (1) (1) {sign} {sign}}");
        rejected(
            "for all x : real in (-inf, inf), a : real in [0, 2]: x^2 - 2*a*x + 1 >= 0",
            "{quadratic (x) (1) (-2*a) (1) {sign} {sign}}",
        );
        rejected(
            "for all x : real in (-inf, inf): x^2 - 2*x + 1 > 0",
            "{quadratic (x) (1) (-2) (1) {sign} {sign}}",
        );
        rejected(
            "for all x : real in (-inf, inf): x^2 - 3*x + 1 >= 0",
            "{quadratic (x) (1) (-2) (1) {sign} {sign}}",
        );
    }
}
