//! `{unfold (abs(t)) {case t >= 0} {case t < 0}}`, the same for `min(a, b)` and
//! `max(a, b)` with cases `a <= b`, `a > b`; `{unfold n (floor(t)) {rest}}`, the
//! same for `ceil(t)`
//!
//! Replace the application in hypotheses and goal by what it is in each case; for
//! floor and ceil by a fresh integer `n` of which only `n <= t < n + 1`
//! (`t <= n < t + 1`) is known. The case is the last hypothesis.
//! Sound: definitions of the functions. A `min` or `max` of more than two splits
//! off its first argument.
//! Forgotten: `ceil(t) > t` or `floor(t) < t`, which fail at integers.

use super::{Kernel, check as prove};
use crate::kernel::number::Function;
use crate::kernel::sequent::{Declaration, Domain, Rel, Relation, Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::term::{Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let fresh = fields.optional_word();
    let term = fields.term()?;
    let Node::Apply(function, args) = &**term else {
        return refuse(Reason::Condition, format!("{term} cannot be unfolded"));
    };
    // A name bound by a series is not a variable of the sequent.
    s.require_closed(term)?;
    let a = &args[0];
    // Under a series that binds a name of it, it need not be defined at this point.
    if s.replaced(term, a) == *s {
        return refuse(Reason::Condition, format!("{term} does not occur"));
    }
    let put = |new: &Term| s.replaced(term, new);
    match (function, fresh) {
        (Function::Floor | Function::Ceil, Some(n)) => {
            let rest = fields.step()?;
            fields.end()?;
            k.require_fresh(s, n)?;
            let domain = Domain { sort: Sort::Integer, lower: None, upper: None };
            let n_term = Term::variable(n);
            let mut new = put(&n_term).with_variable(Declaration { name: n.clone(), domain })?;
            let one = Term::integer(1);
            let pair = if *function == Function::Floor {
                [(n_term.clone(), Rel::Le, a.clone()), (a.clone(), Rel::Lt, n_term.add(&one))]
            } else {
                [(a.clone(), Rel::Le, n_term.clone()), (n_term.clone(), Rel::Lt, a.add(&one))]
            };
            new.hypotheses.extend(pair.map(|(l, rel, r)| Relation::new(l, rel, r)));
            prove(&new, rest, k)
        }
        (Function::Abs, None) => {
            let (first, second) = (fields.step()?, fields.step()?);
            fields.end()?;
            let case = |rel| Relation::new(a.clone(), rel, Term::zero());
            prove(&put(a).with_hypothesis(case(Rel::Ge)), first, k)?;
            prove(&put(&a.negate()).with_hypothesis(case(Rel::Lt)), second, k)
        }
        (Function::Min | Function::Max, None) => {
            let (first, second) = (fields.step()?, fields.step()?);
            fields.end()?;
            let rest: Term = match &args[1..] {
                [b] => b.clone(),
                more => Node::Apply(*function, more.to_vec()).into(),
            };
            let (below, above) = if *function == Function::Min { (a, &rest) } else { (&rest, a) };
            let case = |rel| Relation::new(a.clone(), rel, rest.clone());
            prove(&put(below).with_hypothesis(case(Rel::Le)), first, k)?;
            prove(&put(above).with_hypothesis(case(Rel::Gt)), second, k)
        }
        _ => refuse(Reason::Condition, format!("{term} cannot be unfolded like this")),
    }
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn definitions_and_nothing_more() {
        let s = sequent(&["x : real in [-1, 1]"], &[], "abs(x) <= 1");
        accepted(&s, "{unfold (abs(x)) {enclose 64} {enclose 64}}");
        let s = sequent(&["x : real in [0, 1]", "y : real in [2, 3]"], &[], "max(x, y) >= y");
        accepted(&s, "{unfold (max(x, y)) {linear (0) lo.x} {linear (1) h1}}");
        refused(&s, "{unfold (min(x, y)) {sign} {sign}}", Reason::Condition);
        // ceil(t) > t and floor(t) < t fail at integers.
        let s = sequent(&["x : real in [0, 5]"], &[], "ceil(x) >= x");
        accepted(&s, "{unfold n (ceil(x)) {linear (1) h1}}");
        let s = sequent(&["x : real in [0, 5]"], &[], "ceil(x) > x");
        assert!(verdict(&s, "{unfold n (ceil(x)) {linear (1) h1}}").is_err());
        let s = sequent(&["x : real in [0, 5]"], &[], "floor(x) < x");
        assert!(verdict(&s, "{unfold n (floor(x)) {linear (1) h1}}").is_err());
        // The x of the series is another one.
        let s = sequent(&["x : real in [-1, 0]"], &[], "sum(x = 1 .. 2, abs(1/x)) >= x");
        refused(&s, "{unfold (abs(1/x)) {sign} {sign}}", Reason::Condition);
    }
}
