//! `{substitute ref {rest}}`, the reference a hypothesis `a = b`
//!
//! Put the right side of an equality for every occurrence of its left side in the
//! goal and in the other hypotheses.
//! Sound: at every point of Gamma both sides have the same value, and whether a
//! term is defined depends only on the values of its parts. The rewritten
//! hypotheses keep their order after the equality itself, which moves first, so
//! each is still defined where those before it hold.

use super::{Kernel, check as prove};
use crate::kernel::sequent::{Goal, Rel, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let word = fields.word()?;
    let fact = s.reference(word)?;
    let rest = fields.step()?;
    fields.end()?;
    if fact.rel != Rel::Eq {
        return refuse(Reason::Condition, format!("{fact} is not an equality"));
    }
    let put = |t: &Term| t.replace(&fact.left, &fact.right);
    let mut new = s.clone();
    for h in &mut new.hypotheses {
        // The equality keeps its place and its form: later hypotheses may rest on it.
        if h.turned() != fact {
            *h = h.map(put);
        }
    }
    if let Goal::Relation(r) = &s.goal {
        new.goal = Goal::Relation(r.map(put));
    }
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn only_equalities_are_put_in() {
        let s = sequent(&["x : real in [0, 9]", "y : real in [3, 4]"], &["x = y"], "x > 2");
        accepted(&s, "{substitute h1 {sign}}");
        let s = sequent(&["x : real in [0, 9]", "y : real in [3, 4]"], &["x <= y"], "x > 2");
        refused(&s, "{substitute h1 {sign}}", Reason::Condition);
    }
}
