//! `{induct n (count) {base} .. {step}}`                                    (R35)
//!
//! Induction over the integer variable `n` with a closed lower end `a` that is an
//! integer by its shape; no hypothesis, no other variable's end and no signature of a
//! quantity in sight mentions `n`.
//! The bases, `count` of them, prove the goal at n = a, a + 1, .. in Gamma without
//! `n`; the step proves it at n + count, its last hypotheses being the goal at n,
//! n + 1, .., n + count - 1. If `n` has an upper end, the hypothesis that the new
//! value does not pass it stands before those.
//! Sound: for fixed values of the other variables the goal holds at every m of the
//! domain: one of the bases if m < a + count, else by the step at n = m - count.
//! Forgotten: a step that starts beyond the bases (`n^2 <= 2^n` from n = 1 with a
//! step for n >= 3); a hypothesis used at other values of the other variables,
//! which are the same in hypothesis and goal here; a hypothesis that moves with n.

use super::{Kernel, check as prove};
use crate::kernel::integer::is_integer;
use crate::kernel::sequent::{Goal, Rel, Relation, Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Most bases.
const MAX_BASES: usize = 32;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let name = fields.word()?;
    let count = fields.count(MAX_BASES)?;
    let goal = s.relation()?;
    let Some(declared) = s.declaration(name) else {
        return refuse(Reason::Name, format!("`{name}` is not declared"));
    };
    let domain = &declared.domain;
    let start = match &domain.lower {
        Some(e) if !e.open && domain.sort == Sort::Integer && is_integer(s, &e.term) => &e.term,
        _ => return refuse(Reason::Condition, format!("`{name}` is no integer with a first value")),
    };
    let ends = s.variables.iter().flat_map(|d| [&d.domain.lower, &d.domain.upper]).flatten();
    if let Some(e) = ends.into_iter().find(|e| e.term.mentions(name)) {
        return refuse(Reason::Condition, format!("the end {} moves with `{name}`", e.term));
    }
    if let Some(h) = s.hypotheses.iter().find(|h| h.mentions(name)) {
        return refuse(Reason::Condition, format!("the hypothesis {h} moves with `{name}`"));
    }
    k.require_unmoved(s, name)?;
    if count == 0 {
        return refuse(Reason::Fields, "an induction needs a base");
    }

    let plus = |t: &Term, i: usize| match t.as_number() {
        Some(q) => Term::number(q + num_rational::BigRational::from_integer(i.into())),
        None if i == 0 => t.clone(),
        None => t.add(&Term::integer(i as i64)),
    };
    let at = |t: &Term| goal.map(|side| side.substitute(name, t));
    let within = |s: &mut Sequent, t: &Term| {
        if let Some(e) = &domain.upper {
            let rel = if e.open { Rel::Lt } else { Rel::Le };
            s.hypotheses.push(Relation::new(t.clone(), rel, e.term.clone()));
        }
    };
    for i in 0..count {
        let value = plus(start, i);
        let mut base = s.clone();
        base.variables.retain(|d| d.name != *name);
        within(&mut base, &value);
        base.goal = Goal::Relation(at(&value));
        prove(&base, fields.step()?, k).map_err(|r| r.within("base"))?;
    }
    let n = Term::variable(name);
    let mut next = s.clone();
    within(&mut next, &plus(&n, count));
    next.hypotheses.extend((0..count).map(|i| at(&plus(&n, i))));
    next.goal = Goal::Relation(at(&plus(&n, count)));
    let step = fields.step()?;
    fields.end()?;
    prove(&next, step, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn from_one_value_to_the_next() {
        let s = sequent(&["n : integer in [0, inf)"], &[], "n + 1 <= 2^n");
        accepted(&s, "{induct n 1 {enclose 64} {linear (2) h1 [0 <= n] {sign}}}");
        // Two bases, the step from both.
        let s = sequent(&["n : integer in [0, 9]"], &[], "n <= 2^n");
        accepted(&s, "{induct n 2 {enclose 64} {enclose 64} {linear (2) h3 [0 <= n] {sign}}}");
    }

    #[test]
    fn refused_inductions() {
        // n^2 <= 2^n fails at 3: the step needs n >= 3.
        let s = sequent(&["n : integer in [1, inf)"], &[], "n^2 <= 2^n");
        let step = "{linear (2) h1 [0 <= n^2 - 2*n - 1] {enclose 64}}";
        assert!(verdict(&s, &format!("{{induct n 1 {{enclose 64}} {step}}}")).is_err());
        assert!(verdict(&s, &format!("{{induct n 2 {{enclose 64}} {{enclose 64}} {step}}}")).is_err());
        // The base is needed.
        let s = sequent(&["n : integer in [0, inf)"], &[], "n + 2 <= 2^n");
        assert!(verdict(&s, "{induct n 1 {enclose 64} {linear (2) h1 [0 <= n] {sign}}}").is_err());
        refused(&s, "{induct n 0 {linear (2) h1 [0 <= n] {sign}}}", Reason::Fields);
        // Reals and open ends have no first value.
        let s = sequent(&["n : real in [0, inf)"], &[], "n >= 0");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
        let s = sequent(&["n : integer in (0, inf)"], &[], "n >= 0");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
        let s = sequent(&["n : integer in [1/2, inf)"], &[], "n >= 0");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
        let s = sequent(&["n : even in [0, inf)"], &[], "n >= 0");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
        // What moves with n is no longer there at n + 1.
        let s = sequent(&["n : integer in [1, inf)", "x : real in [0, inf)"], &["x <= n"], "x <= 1");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
        let s = sequent(&["n : integer in [1, inf)", "x : real in [0, n]"], &[], "x <= 1");
        refused(&s, "{induct n 1 {sign} {sign}}", Reason::Condition);
    }

    #[test]
    fn the_upper_end_is_not_passed() {
        // The step holds up to 3 only.
        let s = sequent(&["n : integer in [0, 3]"], &[], "n*(n - 3) <= 0");
        accepted(&s, "{induct n 1 {enclose 64} {boxes 64 \"aNaNH\"}}");
        let s = sequent(&["n : integer in [0, inf)"], &[], "n*(n - 3) <= 0");
        assert!(verdict(&s, "{induct n 1 {enclose 64} {boxes 64 \"aNaNH\"}}").is_err());
        let s = sequent(&["n : integer in [0, 4]"], &[], "n*(n - 3) <= 0");
        assert!(verdict(&s, "{induct n 1 {enclose 64} {boxes 64 \"aNaNH\"}}").is_err());
    }
}
