//! `{change x (u : sort in ends) (phi) (psi) {lower}? {upper}? {onto} {rest} {defined}?}`
//!
//! Replace the variable `x` by `phi`, a term in a new variable `u` and variables
//! declared before `x`. `psi`, a term in `x` and those variables, must lie in the
//! domain of `u` (a step for each finite end) and satisfy `phi(psi) = x` (the
//! step `onto`), both on the old Gamma: so every value of `x` is reached. The old
//! ends of `x` become the first hypotheses, about `phi`. `u` takes the place of
//! `x`. The new sequent must be well posed.
//! Sound: every old point is the image of a new one. No injectivity is needed.
//! Forgotten: `x = t^2` for x in [-1, 1]; `x = 1/u` loses 0.

use super::{Kernel, check as prove};
use crate::kernel::defined::{has_sort, membership, require_defined, require_well_posed};
use crate::kernel::sequent::{Goal, Rel, Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let x = fields.word()?;
    let declaration = fields.declaration()?;
    let (phi, psi) = (fields.term()?, fields.term()?);
    let conditions = membership(psi, &declaration.domain);
    let mut proofs = Vec::new();
    for _ in &conditions {
        proofs.push(fields.step()?);
    }
    let (onto, rest) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    k.require_fresh(s, &declaration.name)?;
    let Some(place) = s.variables.iter().position(|d| d.name == *x) else {
        return refuse(Reason::Name, format!("`{x}` is not declared"));
    };
    let before = |name: &str| s.variables[..place].iter().any(|d| &*d.name == name);
    let stray = phi.free_variables().into_iter().find(|v| *v != declaration.name && !before(v));
    if let Some(v) = stray.or_else(|| psi.free_variables().into_iter().find(|v| v != x && !before(v))) {
        return refuse(Reason::Condition, format!("`{v}` is not declared before `{x}`"));
    }
    if !has_sort(s, psi, declaration.domain.sort) {
        return refuse(
            Reason::Condition,
            format!("{psi} is not {} by its shape", declaration.domain.sort.name()),
        );
    }
    let back = phi.substitute(&declaration.name, psi);
    require_defined(s, &[psi, &back], defined, k)?;
    for (condition, proof) in conditions.iter().zip(proofs) {
        require_defined(s, &[&condition.right], defined, k)?;
        prove(&s.with_goal(condition.clone()), proof, k)?;
    }
    prove(&s.with_goal(Relation::new(back, Rel::Eq, Term::variable(x))), onto, k)?;

    let put = |t: &Term| t.substitute(x, phi);
    let mut new = s.clone();
    new.variables[place] = declaration.clone();
    for d in &mut new.variables[place + 1..] {
        for e in [&mut d.domain.lower, &mut d.domain.upper].into_iter().flatten() {
            e.term = put(&e.term);
        }
    }
    let (lower, upper) = s.ends(x);
    new.hypotheses =
        lower.into_iter().chain(upper).chain(s.hypotheses.iter().cloned()).map(|h| h.map(put)).collect();
    if let Goal::Relation(r) = &s.goal {
        new.goal = Goal::Relation(r.map(put));
    }
    require_well_posed(&new, defined, k)?;
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{refused, sequent, verdict};
    use crate::kernel::verdict::Reason;

    #[test]
    fn every_value_must_be_reached() {
        let s = sequent(&["x : real in [-1, 1]"], &[], "x <= 0");
        // x = -t^2 misses the positive half; no step proves -(psi)^2 = x.
        for psi in ["sqrt(abs(x))", "x"] {
            let step = format!("{{change x (t : real in (-inf, inf)) (-t^2) ({psi}) {{identity}} {{sign}}}}");
            assert!(verdict(&s, &step).is_err(), "{psi}");
        }
        // x = exp(t) loses 0 and what is below.
        let step = "{change x (t : real in (-inf, inf)) (exp(t)) (log(x)) {identity} {sign}}";
        refused(&s, step, Reason::Undefined);
        let step = "{change x (x : real in (-inf, inf)) (x) (x) {identity} {sign}}";
        refused(&s, step, Reason::Name);
    }
}
