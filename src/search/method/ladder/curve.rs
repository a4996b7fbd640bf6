//! Zeros on curves: where both sides agree along `x = c`, c a simple term in the other
//! variables, the domain of x is split there, and a ladder goes each way from it.
//!
//! A split needs c to be declared before x; if it is not, x is declared anew, last.

use crate::enclosure::Function;
use crate::expression::{Constant, Name, Node, Term};
use crate::search::engine::{Search, Stuck};
use crate::search::laurent::Algebra;
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::proof::Proof;
use crate::statement::{Declaration, Relation, Sequent};

/// Other variables from which curves are made.
const MOST_OTHERS: usize = 4;

/// A term in the other variables, plainly inside the domain of `x`, at which the
/// difference is 0 by algebra.
pub fn zero(s: &Sequent, difference: &Term, x: &Name, search: &mut Search) -> Result<Option<Term>, Stuck> {
    let Some(declared) = s.declaration(x) else { return Ok(None) };
    let algebra = Algebra { positive: &|t| is_plainly_positive(s, t) };
    for c in readings(s, difference, x) {
        let domain = &declared.domain;
        let at_end = domain.ends().any(|e| algebra.poly(&e.subtract(&c)).is_none_or(|p| p.is_zero()));
        let above = |gap: &Term, open| {
            let gap = algebra.poly(gap).map(|p| p.to_term());
            let plain = if open { is_plainly_positive } else { is_plainly_non_negative };
            gap.is_some_and(|gap| plain(s, &gap))
        };
        let inside = domain.lower.finite().is_none_or(|a| above(&c.subtract(a), domain.lower_open))
            && domain.upper.finite().is_none_or(|b| above(&b.subtract(&c), domain.upper_open));
        if at_end || !inside || !is_plainly_defined(s, &c) {
            continue;
        }
        search.spend(10 * u64::from(difference.size()))?;
        if algebra.poly(&difference.with(x, &c)).is_some_and(|p| p.is_zero()) {
            return Ok(Some(c));
        }
    }
    Ok(None)
}

/// Whether divisors are plainly positive and what stands under roots is plainly not negative.
fn is_plainly_defined(s: &Sequent, c: &Term) -> bool {
    let mut defined = true;
    c.walk(&mut |t| {
        defined &= match t.node() {
            Node::Divide(_, b) => is_plainly_positive(s, b),
            Node::Apply(Function::Sqrt, args) => is_plainly_non_negative(s, &args[0]),
            _ => true,
        };
        defined
    });
    defined
}

/// Simple terms in the other variables, and a few numbers.
fn readings(s: &Sequent, difference: &Term, x: &Name) -> Vec<Term> {
    let others: Vec<Term> = s
        .variables
        .iter()
        .filter(|d| d.name != *x && difference.mentions(&d.name))
        .map(|d| Term::variable(d.name.clone()))
        .take(MOST_OTHERS)
        .collect();
    let one = Term::integer(1);
    let pi = Term::constant(Constant::Pi);
    let mut list = others.clone();
    for y in &others {
        list.extend([one.subtract(y), one.divide(y), y.negate(), pi.subtract(y)]);
    }
    for (i, y) in others.iter().enumerate() {
        for (j, z) in others.iter().enumerate() {
            if j > i {
                let mean = y.add(z).divide(&Term::integer(2));
                let root = Term::apply1(Function::Sqrt, &y.multiply(z));
                list.extend([y.multiply(z), y.add(z), mean, root]);
            }
            if i != j {
                list.extend([y.divide(z), y.subtract(z)]);
                list.extend(
                    (j + 1..others.len()).filter(|k| *k != i).map(|k| z.multiply(&others[k]).divide(y)),
                );
            }
        }
    }
    list.extend([Term::integer(0), one, Term::ratio(1, 2), Term::integer(-1)]);
    list
}

/// The sequent with `x` declared last under a new name, the name, and the proof of
/// the old one from a proof of the new; nothing if another end mentions `x`.
pub fn declared_last(s: &Sequent, x: &Name, search: &mut Search) -> Option<(Sequent, Name, Proof)> {
    if s.variables.iter().any(|d| d.domain.ends().any(|e| e.mentions(x))) {
        return None;
    }
    let old = s.declaration(x)?.clone();
    let name = search.fresh_variable(x, s);
    let new = Declaration { name: name.clone(), domain: old.domain.clone() };
    let mut proof = Proof::new("general").with(new.clone()).with(Term::variable(x.clone()));
    for (end, word) in [(&old.domain.lower, "lo"), (&old.domain.upper, "hi")] {
        if end.finite().is_some() {
            proof = proof.with(Proof::new("linear").with(Term::integer(1)).word(&format!("{word}.{x}")));
        }
    }
    let put = |r: &Relation| r.map(|t| t.with(x, &Term::variable(name.clone())));
    let mut moved = s.with_goal(put(s.relation()?));
    moved.hypotheses = s.hypotheses.iter().map(put).collect();
    moved.variables.retain(|d| d.name != *x);
    moved.variables.push(new);
    Some((moved, name, proof))
}

#[cfg(test)]
mod tests {
    use super::super::super::testing::{leaves, proves};
    use super::super::Ladder;

    const LINE: &str = "for x in (-infinity, infinity), y in (-infinity, infinity)";

    #[test]
    fn both_ways_from_the_curve() {
        proves(&Ladder, &format!("{LINE}: exp(y)*(1 + x - y) <= exp(x)"), "split");
        proves(&Ladder, &format!("{LINE}: exp(x)*(1 + y - x) <= exp(y)"), "split");
        let three = "for x in (0, infinity), y in (0, infinity), z in (0, infinity)";
        proves(&Ladder, &format!("{three}: log(x) - log(y*z) <= x/(y*z) - 1"), "split");
        // The curve is a term in a variable declared later.
        let late = "for x in (0, infinity), n : integer in [1, 50]";
        proves(&Ladder, &format!("{late}: log(x) <= x/n + log(n) - 1"), "general");
    }

    /// Aristarchus of Samos: two values of one function, the multiplier making one constant.
    #[test]
    fn monotone_quotients() {
        let given = "for a in (0, pi/2), b in (0, pi/2) given b < a";
        proves(&Ladder, &format!("{given}: sin(a)/sin(b) < a/b"), "ladder");
        proves(&Ladder, &format!("{given}: a/b < tan(a)/tan(b)"), "ladder");
        leaves(&Ladder, &[&format!("{given}: a/b < sin(a)/sin(b)")]);
    }

    #[test]
    fn false_across_the_curve() {
        leaves(
            &Ladder,
            &[
                // Along x = b*c/a, which has no value where a is 0.
                "for a in [-1, 1], b in [-1, 1], c in [-1, 1], x in [-9, 9]: (b*c - a*x)^2 <= (b*c - a*x)^4",
                &format!("{LINE}: exp(y)*(1 + x - y) < exp(x)"),
                &format!("{LINE}: exp(y)*(1 + x - y + (x - y)^3) <= exp(x)"),
            ],
        );
    }
}
