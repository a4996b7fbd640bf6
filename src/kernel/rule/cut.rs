//! `{cut [rel] {proof of rel} {rest} {defined}?}`
//!
//! Prove a relation, then use it: from Gamma |- rel and Gamma, rel |- goal
//! conclude Gamma |- goal. The relation's terms must be defined on Gamma.
//! Sound: a relation proved on all of Gamma excludes none of its points.
//! Forgotten definedness would let `f <= m <= g` pass with `m` the logarithm of
//! something negative.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::verdict::Checked;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let relation = fields.relation()?;
    let (proof, rest) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    require_defined(s, &[&relation.left, &relation.right], defined, k)?;
    prove(&s.with_goal(relation.clone()), proof, k)?;
    prove(&s.with_hypothesis(relation.clone()), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn a_cut_must_be_defined_and_proved() {
        let s = sequent(&["x : real in [-1, 1]"], &["x*x <= 0"], "x = 0");
        // log(x) is not defined on the whole domain.
        refused(&s, "{cut [log(x) <= 5] {sign} {sign}}", Reason::Undefined);
        // The rest may not be forgotten, nor more follow.
        refused(&s, "{cut [x <= 1] {sign}}", Reason::Fields);
        refused(&s, "{cut [x <= 1] {sign} {sign} {sign}}", Reason::Fields);
        refused(&s, "{cut [y <= 1] {sign} {sign}}", Reason::Name);
        let t = sequent(&["x : real in [3, 4]"], &[], "x > 2");
        accepted(&t, "{cut [x >= 1] {sign} {sign}}");
    }
}
