//! `{general (u : sort in ends) (s) {lower}? {upper}? {rest} {defined}?}`
//!
//! Replace every occurrence of a term `s` in hypotheses and goal by a fresh
//! variable `u`, after proving that `s` lies in the domain of `u` (a step for
//! each finite end). Facts that link `s` to other variables are hypotheses about
//! `s` before, and so become hypotheses about `u`. The new sequent must be well
//! posed for all values of `u`.
//! Sound: instantiate `u` by `s`.
//! Forgotten: facts about `u` that were not proved for `s`.

use super::{Kernel, check as prove};
use crate::kernel::defined::{has_sort, membership, require_defined, require_well_posed};
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let declaration = fields.declaration()?;
    let term = fields.term()?;
    let conditions = membership(term, &declaration.domain);
    let mut proofs = Vec::new();
    for _ in &conditions {
        proofs.push(fields.step()?);
    }
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    require_defined(s, &[term], defined, k)?;
    if !has_sort(s, term, declaration.domain.sort) {
        return refuse(
            Reason::Condition,
            format!("{term} is not {} by its shape", declaration.domain.sort.name()),
        );
    }
    for (condition, proof) in conditions.iter().zip(proofs) {
        require_defined(s, &[&condition.right], defined, k)?;
        prove(&s.with_goal(condition.clone()), proof, k)?;
    }
    k.require_fresh(s, &declaration.name)?;
    let new = s.replaced(term, &Term::variable(&declaration.name)).with_variable(declaration.clone())?;
    require_well_posed(&new, defined, k)?;
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn facts_about_the_new_variable_are_proved_for_the_term() {
        let s = sequent(&["x : real in [1, 2]"], &[], "1/(x + 1) <= 1");
        accepted(&s, "{general (u : real in [2, 3]) (x + 1) {sign} {enclose 64} {enclose 64}}");
        // A range that the term may leave.
        assert!(
            verdict(&s, "{general (u : real in [5/2, 3]) (x + 1) {enclose 64} {enclose 64} {enclose 64}}")
                .is_err()
        );
        // A range on which the goal is not defined.
        refused(
            &s,
            "{general (u : real in [0, 3]) (x + 1) {sign} {enclose 64} {enclose 64}}",
            Reason::Undefined,
        );
        refused(
            &s,
            "{general (u : integer in [0, 3]) (x + 1) {sign} {enclose 64} {enclose 64}}",
            Reason::Condition,
        );
    }
}
