//! `{narrow ref {rest} {defined}?}`, the reference a hypothesis `h3`
//!
//! Make a hypothesis `x <= c`, `x < c`, `c <= x` or `c < x` about a variable the
//! new end of its domain, in place of the old one. `c` uses variables declared
//! before `x`. The hypothesis is dropped; what is left must be well posed.
//! Sound: every point of Gamma satisfies the hypothesis, hence the new end, so
//! Gamma is contained in the new context, whichever end is the tighter.
//! Forgotten: an end that needs a later variable; definedness that rested on the
//! old end.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_well_posed;
use crate::kernel::sequent::{End, Rel, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Node, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let word = fields.word()?;
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    let index = word.strip_prefix('h').and_then(|n| n.parse::<usize>().ok()).unwrap_or(0);
    let Some(fact) = s.hypotheses.get(index.wrapping_sub(1)) else {
        return refuse(Reason::Name, format!("there is no `{word}` here"));
    };
    let fact = fact.turned();
    if !matches!(fact.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, format!("{fact} bounds nothing"));
    }
    let open = fact.rel == Rel::Lt;
    let place_of = |t: &Term, c: &Term| match &**t {
        Node::Variable(x) => s.variables.iter().position(|d| d.name == *x).filter(|&place| {
            let known = |v: &str| s.variables[..place].iter().any(|d| &*d.name == v);
            c.free_variables().iter().all(|v| known(v))
        }),
        _ => None,
    };
    let mut new = s.clone();
    new.hypotheses.remove(index - 1);
    let end = |term: &Term| Some(End { term: term.clone(), open });
    if let Some(place) = place_of(&fact.left, &fact.right) {
        new.variables[place].domain.upper = end(&fact.right);
    } else if let Some(place) = place_of(&fact.right, &fact.left) {
        new.variables[place].domain.lower = end(&fact.left);
    } else {
        return refuse(Reason::Condition, format!("{fact} is not an end of a variable's domain"));
    }
    require_well_posed(&new, defined, k)?;
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::sample::{accepts, rejects};

    #[test]
    fn a_hypothesis_becomes_an_end() {
        accepts("x : real in (-inf, inf) | x > 1 | 0 < x", "{narrow h1 {sign}}");
        accepts(
            "a : real in [0, 1]; x : real in [0, 2] | x <= a | x <= a",
            "{narrow h1 {face x hi {sign} {sign}}}",
        );
        rejects(
            "x : real in [0, 2]; a : real in [0, 1] | x <= a^2 | 0 <= x",
            "{narrow h1 {sign}}",
            "not an end",
        );
        // Definedness that rested on the end that goes.
        rejects("x : real in (0, 2] | 0 - 1 <= x | log(x) <= x", "{narrow h1 {sign}}", "defined");
        rejects("x : real in [0, 2] | x^2 <= 1 | 0 <= x", "{narrow h1 {sign}}", "not an end");
        rejects("x : real in [0, 2] | | 0 <= x", "{narrow h1 {sign}}", "no `h1`");
    }
}
