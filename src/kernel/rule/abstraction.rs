//! `{abstract u (q(args)) {rest}}`
//!
//! Treat one application of a quantity as a fresh variable that ranges over the
//! quantity's declared range. Every occurrence with the same arguments is
//! replaced. The variable is declared last, or just before the first domain that
//! mentions the application.
//! Sound: the value of the application is one of the values of the variable, and
//! the same arguments give the same value. The converse does not hold, so a
//! refutation of the new sequent refutes nothing.

use super::{Kernel, check as prove};
use crate::kernel::sequent::{Declaration, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let u = fields.word()?;
    let application = fields.term()?;
    let rest = fields.step()?;
    fields.end()?;
    k.require_fresh(s, u)?;
    let Node::Quantity(name, _) = &**application else {
        return refuse(Reason::Condition, format!("{application} is not the application of a quantity"));
    };
    let Some((_, range)) = k.quantities.get(name) else {
        return refuse(Reason::Name, format!("`{name}` is not a declared quantity"));
    };
    let fresh = Term::variable(u);
    let mut new = s.replaced(application, &fresh);
    // Under a series that binds a name of it, it says nothing about this point.
    if new == *s {
        return refuse(Reason::Condition, format!("{application} does not occur"));
    }
    let mentions = |d: &Declaration| {
        [&d.domain.lower, &d.domain.upper].into_iter().flatten().any(|e| e.term.contains(application))
    };
    let place = s.variables.iter().position(mentions).unwrap_or(s.variables.len());
    let declaration = Declaration { name: u.clone(), domain: range.clone() };
    let mut needed = application.free_variables();
    needed.extend(range.names());
    if let Some(x) = needed.iter().find(|x| !s.variables[..place].iter().any(|d| d.name == **x)) {
        return refuse(Reason::Condition, format!("`{x}` is not declared before `{u}` would be"));
    }
    for d in &mut new.variables {
        for e in [&mut d.domain.lower, &mut d.domain.upper].into_iter().flatten() {
            e.term = e.term.replace(application, &fresh);
        }
    }
    new.variables.insert(place, declaration);
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn only_the_declared_range_is_known() {
        let s = sequent(&["x : real in [1, 2]"], &[], "q(x) + q(x) <= 2");
        accepted(&s, "{abstract u (q(x)) {enclose 64}}");
        let s = sequent(&["x : real in [1, 2]"], &[], "q(x) <= 1/2");
        assert!(crate::kernel::testing::verdict(&s, "{abstract u (q(x)) {enclose 64}}").is_err());
        refused(&s, "{abstract x (q(x)) {enclose 64}}", Reason::Name);
        refused(&s, "{abstract u (x) {enclose 64}}", Reason::Condition);
        refused(&s, "{abstract u (p(x)) {enclose 64}}", Reason::Name);
        // An application that does not occur says nothing about the point.
        refused(&s, "{abstract u (q(2)) {enclose 64}}", Reason::Condition);
        // Nor does one whose arguments a series binds: it is not even defined here.
        let s = sequent(&["k : real in [-2, -1]"], &[], "sum(k = 1 .. 2, q(k)) >= k");
        refused(&s, "{abstract u (q(k)) {sign}}", Reason::Condition);
    }
}
