//! `{descend x {step} {limit}?}`                                            (R36)
//!
//! Goal `l <= r` or `l < r`, F = r - l, in a section of the real variable `x`
//! (`section.rs`) without an upper end. `step` proves F(x + 1) <= F(x) (`<` for a
//! strict goal) on Gamma; towards infinity liminf F >= 0 by `end.rs`, `limit` proving
//! the sign of the leading coefficient where that is not settled quickly.
//! Sound: F(x) >= F(x + 1) >= F(x + j) for every j, and along x + j the liminf is
//! not negative. The counterpart of induction where equality sits at infinity.
//! Source: Knopp, Theory and Application of Infinite Series, 1951, section 64 (the
//! proof of Stirling's formula).
//! Forgotten: a limit with a constant that is a digit too large; a weak step used
//! for a strict goal; a domain that ends.

use super::{Kernel, check as prove};
use crate::kernel::section::Section;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let x = fields.word()?;
    let (step, limit) = (fields.step()?, fields.optional_step());
    fields.end()?;
    let goal = s.relation()?;
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is not an inequality");
    }
    let section = Section::of(s, x, k)?;
    if section.upper.is_some() {
        return refuse(Reason::Condition, format!("`{x}` does not go to infinity"));
    }
    let f = goal.difference();
    let next = f.substitute(x, &Term::variable(x).add(&Term::integer(1)));
    prove(&s.with_goal(Relation::new(next, goal.rel, f.clone())), step, k)?;
    let base = section.base(true);
    section.towards(&base, false, k).has_sign(&f, true, limit)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn down_to_the_limit() {
        let s = sequent(&["x : real in [1, inf)"], &[], "2/x > 1/x");
        accepted(&s, "{descend x {scale [x < x + 1] (1/(x*(x + 1))) {sign} {sign}}}");
        let s = sequent(&["x : real in [1, inf)", "c : real in [3, 4]"], &[], "3 <= c + 1/x");
        accepted(&s, "{descend x {scale [x <= x + 1] (1/(x*(x + 1))) {sign} {sign}} {sign}}");
    }

    #[test]
    fn refused_descents() {
        let step = "{scale [x <= x + 1] (1/(x*(x + 1))) {sign} {sign}}";
        // The limit is negative.
        let s = sequent(&["x : real in [1, inf)"], &[], "1/100 <= 1/x");
        assert!(verdict(&s, &format!("{{descend x {step}}}")).is_err());
        // A strict goal needs a strict step: 0 > 0 is false.
        let s = sequent(&["x : real in [1, inf)"], &[], "x - x > 0");
        assert!(verdict(&s, "{descend x {linear}}").is_err());
        // The wrong direction.
        let s = sequent(&["x : real in [1, inf)"], &[], "1/x <= 0");
        assert!(verdict(&s, &format!("{{descend x {step}}}")).is_err());
        // A domain that ends.
        let s = sequent(&["x : real in [1, 9]"], &[], "0 <= 1/x");
        refused(&s, &format!("{{descend x {step}}}"), Reason::Condition);
        let s = sequent(&["x : integer in [1, inf)"], &[], "0 <= 1/x");
        refused(&s, &format!("{{descend x {step}}}"), Reason::Condition);
    }
}
