//! `{widen x lo|hi {rest} {defined}?}`
//!
//! Prove the goal without an end of the domain of `x`. What is left must be well
//! posed on the larger domain; `{defined}` helps to show it. No signature of a quantity
//! in sight mentions `x`.
//! Sound: Gamma is contained in the larger context.
//! Forgotten: definedness that rested on the end.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_well_posed;
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let (name, side) = (fields.word()?, fields.word()?);
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    let mut new = s.clone();
    let Some(d) = new.variables.iter_mut().find(|d| d.name == *name) else {
        return refuse(Reason::Name, format!("`{name}` is not declared"));
    };
    match &**side {
        "lo" => d.domain.lower = None,
        "hi" => d.domain.upper = None,
        other => return refuse(Reason::Fields, format!("`{other}` is neither lo nor hi")),
    }
    k.require_unmoved(s, name)?;
    require_well_posed(&new, defined, k)?;
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn a_larger_domain_must_do() {
        let s = sequent(&["x : real in [1, 9]"], &[], "log(x) <= x");
        accepted(&s, "{widen x hi {face x lo {sign} {enclose 64}}}");
        refused(&s, "{widen x lo {sign}}", Reason::Undefined);
        refused(&s, "{widen x up {sign}}", Reason::Fields);
        refused(&s, "{widen y hi {sign}}", Reason::Name);
        // The end was needed.
        let s = sequent(&["x : real in [1, 9]"], &[], "x <= 9");
        assert!(verdict(&s, "{widen x hi {linear (1) hi.x}}").is_err());
    }
}
