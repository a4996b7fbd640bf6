//! `{arrange (x) (y) .. {rest} {defined}?}`
//!
//! Declare the variables in another order: those named first, in this order, then
//! the others as they stood. Ends still use earlier variables only, and are
//! defined where what stands before them holds.
//! Sound: the points of Gamma stay the same.
//! Forgotten: an end that uses a variable declared behind it.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_well_posed;
use crate::kernel::sequent::Sequent;
use crate::kernel::step::Fields;
use crate::kernel::term::Node;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let mut new = s.clone();
    let mut first = Vec::new();
    while let Some(term) = fields.optional_term() {
        let place = match &**term {
            Node::Variable(x) => new.variables.iter().position(|d| d.name == *x),
            _ => None,
        };
        let Some(place) = place else {
            return refuse(Reason::Name, format!("{term} is not a variable still to be placed"));
        };
        first.push(new.variables.remove(place));
    }
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    new.variables.splice(0..0, first);
    require_well_posed(&new, defined, k)?;
    prove(&new, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn ends_use_earlier_variables() {
        let s = sequent(&["n : integer in [1, inf)", "k : integer in [1, inf)"], &["k <= n"], "n/k >= 1");
        accepted(&s, "{arrange (k) {narrow h1 {scale [n >= k] (1/k) {sign} {linear (1) lo.n}}}}");
        let s = sequent(&["n : integer in [1, inf)", "k : integer in [1, n]"], &[], "n >= k");
        accepted(&s, "{arrange (n) (k) {linear (1) hi.k}}");
        refused(&s, "{arrange (k) {linear (1) hi.k}}", Reason::Name);
        refused(&s, "{arrange (n) (n) {linear (1) hi.k}}", Reason::Name);
    }
}
