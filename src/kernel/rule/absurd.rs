//! `{absurd [rel] {proof of rel} {proof of its negation} {defined}?}` and `{empty x}`
//!
//! Gamma has no point if it proves a relation and its negation, or if the
//! literal domain of a variable is empty; then every goal holds. The relation's
//! terms must be defined on Gamma.
//! Forgotten: absurdity derived from a relation that was not defined.

use num_integer::Integer;

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::sequent::{Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let relation = fields.relation()?;
    let (yes, no) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    require_defined(s, &[&relation.left, &relation.right], defined, k)?;
    prove(&s.with_goal(relation.clone()), yes, k)?;
    prove(&s.with_goal(relation.negation()), no, k)
}

pub(super) fn check_empty(s: &Sequent, mut fields: Fields, _k: &Kernel) -> Checked {
    let x = fields.word()?;
    fields.end()?;
    let Some(d) = s.declaration(x) else { return refuse(Reason::Name, format!("`{x}` is not declared")) };
    let end = |e: &Option<crate::kernel::sequent::End>| {
        e.as_ref().and_then(|e| e.term.as_number().map(|q| (q.clone(), e.open)))
    };
    let (Some((lo, lo_open)), Some((hi, hi_open))) = (end(&d.domain.lower), end(&d.domain.upper)) else {
        return refuse(Reason::Condition, format!("the ends of `{x}` are not literal"));
    };
    let empty = match d.domain.sort {
        Sort::Real => lo > hi || (lo == hi && (lo_open || hi_open)),
        sort => {
            // The least and greatest integer inside the ends.
            let mut first = lo.ceil().to_integer();
            let mut last = hi.floor().to_integer();
            if lo_open && lo.is_integer() {
                first += 1;
            }
            if hi_open && hi.is_integer() {
                last -= 1;
            }
            if sort == Sort::Even && first.is_odd() {
                first += 1;
            }
            first > last
        }
    };
    if empty { Ok(()) } else { refuse(Reason::NotProved, format!("the domain of `{x}` is not empty")) }
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn only_an_empty_context_is_absurd() {
        for empty in [
            "real in [2, 1]",
            "real in (1, 1]",
            "integer in (0, 1)",
            "integer in [1/3, 2/3]",
            "even in [1, 1]",
        ] {
            accepted(&sequent(&[&format!("x : {empty}")], &[], "absurd"), "{empty x}");
        }
        for full in ["real in [1, 1]", "integer in [0, 1)", "even in [1, 2]", "real in (0, inf)"] {
            let s = sequent(&[&format!("x : {full}")], &[], "absurd");
            assert!(crate::kernel::testing::verdict(&s, "{empty x}").is_err(), "{full}");
        }
        let s = sequent(&["x : real in [0, 1]"], &[], "x >= 10");
        refused(&s, "{absurd [x >= 5] {sign} {sign}}", Reason::NotProved);
    }
}
