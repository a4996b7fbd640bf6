//! `{cases [c1] .. [ck] {step1} .. {stepk} {complete}? {defined}?}`
//!
//! Prove the goal under each of several conditions that together leave no point
//! out. No proof of completeness is needed for two conditions of which the second
//! follows from the negation of the first, for `<`, `=`, `>` between the same
//! terms, and for `n <= m`, `m + 1 <= n` with `n` and `m` integers by their
//! shape. Otherwise `complete` proves the last condition from the negations of
//! the others. The terms of the conditions must be defined on Gamma.
//! Sound: every point of Gamma satisfies one of the conditions.
//! Forgotten: splitting a real at `n <= m | n >= m + 1`, or leaving out a point.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::integer::is_integer;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Most cases at once.
const MAX_CASES: usize = 64;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let mut conditions = Vec::new();
    while let Some(c) = fields.optional_relation() {
        conditions.push(c.clone());
    }
    if conditions.len() < 2 || conditions.len() > MAX_CASES {
        return refuse(Reason::Fields, format!("from 2 to {MAX_CASES} cases are needed"));
    }
    let mut steps = Vec::new();
    for _ in &conditions {
        steps.push(fields.step()?);
    }
    let mut last = fields.optional_step();
    let mut complete = None;
    if last.is_some_and(|step| &*step.rule != "defined") {
        complete = last;
        last = fields.optional_step_named("defined");
    }
    fields.end()?;
    for c in &conditions {
        require_defined(s, &[&c.left, &c.right], last, k)?;
    }
    match complete {
        Some(step) => {
            let mut rest = s.clone();
            let (final_case, others) = conditions.split_last().expect("two cases at least");
            rest.hypotheses.extend(others.iter().map(Relation::negation));
            prove(&rest.with_goal(final_case.clone()), step, k)?;
        }
        None if !exhaustive(s, &conditions) => {
            return refuse(Reason::Condition, "the cases are not seen to be exhaustive");
        }
        None => {}
    }
    for (c, step) in conditions.iter().zip(steps) {
        prove(&s.with_hypothesis(c.clone()), step, k)?;
    }
    Ok(())
}

fn exhaustive(s: &Sequent, conditions: &[Relation]) -> bool {
    let turned: Vec<Relation> = conditions.iter().map(Relation::turned).collect();
    match turned.as_slice() {
        [a, b] => {
            let rest = a.negation().turned();
            let same = rest.left == b.left && rest.right == b.right;
            let implied = rest.rel == b.rel || (rest.rel == Rel::Lt && b.rel == Rel::Le);
            // `a = b` and `a != b` may be written with their sides exchanged.
            let exchanged = rest.left == b.right
                && rest.right == b.left
                && rest.rel == b.rel
                && matches!(rest.rel, Rel::Eq | Rel::Ne);
            (same && implied) || exchanged || next_integer(s, a, b) || next_integer(s, b, a)
        }
        [..] => {
            let (x, y) = (&conditions[0].left, &conditions[0].right);
            let has = |rel: Rel| {
                turned.iter().any(|c| match rel {
                    Rel::Eq => {
                        c.rel == Rel::Eq && ((&c.left, &c.right) == (x, y) || (&c.left, &c.right) == (y, x))
                    }
                    Rel::Lt => c.rel == Rel::Lt && (&c.left, &c.right) == (x, y),
                    _ => c.rel == Rel::Lt && (&c.left, &c.right) == (y, x),
                })
            };
            has(Rel::Lt) && has(Rel::Eq) && has(Rel::Gt)
        }
    }
}

/// `n <= m` and `m + 1 <= n`, both integers.
fn next_integer(s: &Sequent, below: &Relation, above: &Relation) -> bool {
    if below.rel != Rel::Le || above.rel != Rel::Le {
        return false;
    }
    let (n, m) = (&below.left, &below.right);
    let successor = match (&**m, &*above.left) {
        (Node::Number(a), Node::Number(b)) => a + num_rational::BigRational::from_integer(1.into()) == *b,
        (_, Node::Add(a, one)) => a == m && *one == Term::integer(1),
        _ => false,
    };
    successor && above.right == *n && is_integer(s, n) && is_integer(s, m)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn cases_leave_no_point_out() {
        let s = sequent(&["x : real in [3, 4]", "n : integer in [0, 9]"], &[], "x > 2");
        for cases in [
            "[x <= n] [x > n]",
            "[x < n] [x >= n]",
            "[x = n] [x != n]",
            "[x = n] [n != x]",
            "[x <= n] [x >= n]",
            "[n <= 4] [n >= 5]",
            "[n >= 5] [n <= 4]",
        ] {
            accepted(&s, &format!("{{cases {cases} {{sign}} {{sign}}}}"));
        }
        accepted(&s, "{cases [x < n] [x = n] [x > n] {sign} {sign} {sign}}");
        for cases in ["[x < n] [x > n]", "[x <= 4] [x >= 5]", "[n <= 4] [n >= 6]", "[x < n] [x <= n]"] {
            refused(&s, &format!("{{cases {cases} {{sign}} {{sign}}}}"), Reason::Condition);
        }
        refused(&s, "{cases [log(n) < 1] [log(n) >= 1] {sign} {sign}}", Reason::Undefined);
        // Complete because x is never below 3.
        accepted(&s, "{cases [x > 3] [x >= 2] {sign} {sign} {sign}}");
    }
}
