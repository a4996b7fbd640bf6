//! Cases that make the rest a matter of sight or of a combination: a variable that may
//! be 0 is 0 or positive, so that relations may be divided by it.

use crate::expression::Term;
use crate::statement::{Conclusion, Rel, Relation, Sequent};

use super::super::engine::{Method, Search, Stuck};
use super::super::proof::Proof;
use super::super::sample::quick;
use super::combine::Combine;
use super::exact::Exact;

/// The method.
pub struct Cases;

/// Tried in the first reductions only: it branches.
const DEEPEST: usize = 4;

impl Method for Cases {
    fn name(&self) -> &'static str {
        "cases"
    }

    fn share(&self) -> u64 {
        20
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        if search.depth() > DEEPEST {
            return Err(Stuck::NotApplicable("too many reductions around it"));
        }
        let mut told = Stuck::NotApplicable("no variable that may be 0");
        for d in &s.variables {
            let lower = d.domain.lower.finite();
            if !lower.is_some_and(Term::is_zero) || d.domain.lower_open || !divides(s, &d.name) {
                continue;
            }
            match zero_or_positive(s, &Term::variable(d.name.clone()), search) {
                Ok(proof) => return Ok(proof),
                Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
                Err(stuck) => told = stuck,
            }
        }
        Err(told)
    }
}

/// Whether a hypothesis mentions the variable on both sides, so that dividing may help.
fn divides(s: &Sequent, x: &str) -> bool {
    s.hypotheses.iter().any(|h| h.left.mentions(x) && h.right.mentions(x))
        && s.relation().is_some_and(|r| r.left.mentions(x) || r.right.mentions(x))
}

fn zero_or_positive(s: &Sequent, x: &Term, search: &mut Search) -> Result<Proof, Stuck> {
    let zero = Term::integer(0);
    let (none, some) = (
        Relation::new(x.clone(), Rel::Equal, zero.clone()),
        Relation::new(x.clone(), Rel::Greater, zero.clone()),
    );
    let mut positive = s.clone();
    positive.hypotheses.push(some.clone());
    let second = first_of(&positive, search)?;
    // With 0 for the variable in the goal and in the other hypotheses.
    let put = |r: &Relation| r.map(|t| t.replace(x, &zero));
    let mut gone = s.clone();
    gone.hypotheses = s.hypotheses.iter().map(put).collect();
    gone.hypotheses.push(none.clone());
    if let Conclusion::Relation(r) = &s.goal {
        gone.goal = Conclusion::Relation(put(r));
    }
    let rest = first_of(&gone, search).or_else(|_| search.prove(&gone))?;
    let first = Proof::new("substitute").word(&format!("h{}", s.hypotheses.len() + 1)).with(rest);
    // Not 0 and not negative is positive.
    let complete = Proof::new("sign");
    search.accepted(s, Proof::new("cases").with(none).with(some).with(first).with(second).with(complete))
}

/// What is seen at a glance or is a combination.
fn first_of(s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
    if quick(s, 24, search).is_some() {
        return Err(Stuck::because("a case is false"));
    }
    search.attempt(&Exact, s).or_else(|_| search.attempt(&Combine { products: false }, s))
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn dividing_by_what_may_be_zero() {
        let given =
            "for x in [0, infinity), y in [0, infinity), W in [1 + e, infinity) given (W - 1)*x^2 <= x*y";
        proves(&Cases, &format!("{given}: x <= y/e"), "cases");
        leaves(&Cases, &[&format!("{given}: x <= y/3")]);
        // At x = 0 nothing bounds y.
        leaves(&Cases, &["for x in [0, 1], y in [0, 9] given x*y <= 2*x: x + y <= 3"]);
    }
}
