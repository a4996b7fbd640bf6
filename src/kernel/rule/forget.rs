//! `{forget word.. {rest}}`, each word a hypothesis `h3` or a variable
//!
//! Prove the goal without some hypotheses, or without a variable that nothing
//! else mentions. What is left must still be well posed: definedness that rested
//! on a dropped hypothesis has to be shown again, with `{defined}` at the end.
//! Sound: every point of Gamma gives a point of the larger context.

use std::collections::BTreeSet;

use super::{Kernel, check as prove};
use crate::kernel::defined::require_well_posed;
use crate::kernel::sequent::{Goal, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let mut dropped = BTreeSet::new();
    let mut names = BTreeSet::new();
    while let Some(word) = fields.optional_word() {
        let index = word.strip_prefix('h').and_then(|n| n.parse::<usize>().ok());
        match index {
            Some(n) if (1..=s.hypotheses.len()).contains(&n) && s.declaration(word).is_none() => {
                dropped.insert(n - 1);
            }
            _ if s.declaration(word).is_some() => {
                names.insert(word.clone());
            }
            _ => return refuse(Reason::Name, format!("there is no `{word}` here")),
        }
    }
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    let mut smaller = s.clone();
    smaller.hypotheses = s
        .hypotheses
        .iter()
        .enumerate()
        .filter(|(i, _)| !dropped.contains(i))
        .map(|(_, h)| h.clone())
        .collect();
    smaller.variables.retain(|d| !names.contains(&d.name));
    for x in &names {
        let in_ends = smaller
            .variables
            .iter()
            .any(|d| [&d.domain.lower, &d.domain.upper].into_iter().flatten().any(|e| e.term.mentions(x)));
        let in_goal = matches!(&smaller.goal, Goal::Relation(r) if r.mentions(x));
        if in_ends || in_goal || smaller.hypotheses.iter().any(|h| h.mentions(x)) {
            return refuse(Reason::Condition, format!("`{x}` is still in use"));
        }
    }
    require_well_posed(&smaller, defined, k)?;
    prove(&smaller, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn what_is_left_must_be_defined() {
        let s = sequent(&["x : real in [-1, 1]", "y : real in [3, 4]"], &["x > 1/2", "log(x) < 1"], "y > 2");
        accepted(&s, "{forget h2 {sign}}");
        accepted(&s, "{forget h1 h2 x {sign}}");
        refused(&s, "{forget h1 {sign}}", Reason::Undefined);
        refused(&s, "{forget x {sign}}", Reason::Condition);
        refused(&s, "{forget h3 {sign}}", Reason::Name);
    }
}
