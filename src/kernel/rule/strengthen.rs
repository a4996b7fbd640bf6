//! `{strengthen ref {rest}}`, the reference a hypothesis `h3` or an end `lo.n`, `hi.n`
//!
//! Sharpen a relation whose side is an integer by its shape and append the result
//! as a hypothesis: `a < b` gives `a + 1 <= b` for integers a, b,
//! `floor(a) + 1 <= b` if only b is one, `a <= ceil(b) - 1` if only a is one;
//! `a <= b` gives `ceil(a) <= b`, `a <= floor(b)` in the same way.
//! Sound: there is no integer strictly between an integer and the next.
//! Forgotten: strengthening applied to a real.

use super::{Kernel, check as prove};
use crate::kernel::integer::is_integer;
use crate::kernel::number::Function;
use crate::kernel::sequent::{Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let fact = s.reference(fields.word()?)?;
    let rest = fields.step()?;
    fields.end()?;
    let (a, b) = (&fact.left, &fact.right);
    let one = Term::integer(1);
    let whole = |f: Function, t: &Term| match t.as_number() {
        Some(q) if f == Function::Floor => Term::number(q.floor()),
        Some(q) => Term::number(q.ceil()),
        None => Term::apply(f, t),
    };
    let (left, right) = match (fact.rel, is_integer(s, a), is_integer(s, b)) {
        (Rel::Lt, true, true) => (a.add(&one), b.clone()),
        (Rel::Lt, false, true) => (whole(Function::Floor, a).add(&one), b.clone()),
        (Rel::Lt, true, false) => (a.clone(), whole(Function::Ceil, b).subtract(&one)),
        (Rel::Le, false, true) => (whole(Function::Ceil, a), b.clone()),
        (Rel::Le, true, false) => (a.clone(), whole(Function::Floor, b)),
        _ => return refuse(Reason::Condition, format!("{fact} cannot be strengthened")),
    };
    prove(&s.with_hypothesis(Relation::new(left, Rel::Le, right)), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn only_integers_are_strengthened() {
        let s = sequent(&["n : integer in (5/2, inf)"], &[], "n >= 3");
        accepted(&s, "{strengthen lo.n {linear (1) h1}}");
        let s = sequent(&["x : real in (2, inf)"], &[], "x >= 3");
        refused(&s, "{strengthen lo.x {linear (1) h1}}", Reason::NotProved);
    }
}
