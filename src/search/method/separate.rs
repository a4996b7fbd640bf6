//! Splitting a weak goal `0 <= F` into smaller ones: a factor that is plainly not
//! negative apart, or summands without common variables one by one.

use std::collections::BTreeSet;

use num_traits::{One, Signed};

use crate::expression::{Name, Term};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::laurent::{Algebra, Monomial, Poly};
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::proof::Proof;
use crate::statement::{Rel, Relation, Sequent};

/// The method that takes factors apart.
pub struct Factors;

/// The method that takes summands apart.
pub struct Summands;

impl Method for Factors {
    fn name(&self) -> &'static str {
        "a non-negative factor"
    }

    fn share(&self) -> u64 {
        50
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let poly = weak_difference(s, search)?;
        let none = Stuck::NotApplicable("no factor that vanishes somewhere and is never negative");
        let Some((numerator, front)) = poly.cleared() else { return Err(none) };
        let (_, common) = numerator.content();
        let mut taken = Monomial::one();
        for (atom, e) in front.times(&common).factors() {
            let apart = is_plainly_non_negative(s, atom) && !is_plainly_positive(s, atom);
            if e.is_positive() && apart && !atom.free_variables().is_empty() {
                taken = taken.times(&Monomial::atom(atom.clone(), *e));
            }
        }
        if taken.is_one() {
            return Err(none);
        }
        let rest = poly.shifted(&taken.raised(&-crate::search::laurent::Exponent::one())).to_term();
        let fact = Relation::new(Term::integer(0), Rel::LessEqual, rest);
        let step = search.prove(&s.with_goal(fact.clone()))?;
        let word = format!("h{}", s.hypotheses.len() + 1);
        let close = Proof::new("linear").with(taken.to_term(&One::one())).word(&word);
        Ok(Proof::new("cut").with(fact).with(step).with(close))
    }
}

impl Method for Summands {
    fn name(&self) -> &'static str {
        "summands without common variables"
    }

    fn share(&self) -> u64 {
        50
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let poly = weak_difference(s, search)?;
        let mut groups: Vec<(BTreeSet<Name>, Poly)> = Vec::new();
        let mut constant = Poly::zero();
        for (m, q) in poly.terms() {
            let part = Poly::single(q.clone(), m.clone());
            let mut names = part.to_term().free_variables();
            if names.is_empty() {
                constant = constant.plus(&part);
                continue;
            }
            let mut sum = part;
            groups.retain(|(own, other)| {
                let apart = own.is_disjoint(&names);
                if !apart {
                    names.extend(own.iter().cloned());
                    sum = sum.plus(other);
                }
                apart
            });
            groups.push((names, sum));
        }
        if groups.len() < 2 {
            return Err(Stuck::NotApplicable("one summand"));
        }
        let mut told = Stuck::because("the summands are not of one sign each");
        let share = search.left() / (groups.len() as u64 + 1);
        for with_constant in 0..if constant.is_empty() { 1 } else { groups.len() } {
            let mut facts = Vec::new();
            for (i, (names, part)) in groups.iter().enumerate() {
                let part = if i == with_constant { part.plus(&constant) } else { part.clone() };
                let fact = Relation::new(Term::integer(0), Rel::LessEqual, part.to_term());
                match search.within(share, |search| alone(s, names, &fact, search)) {
                    Ok(step) => facts.push((fact, step)),
                    Err(stuck) => {
                        told = stuck;
                        break;
                    }
                }
            }
            if facts.len() == groups.len() {
                let first = s.hypotheses.len() + 1;
                let mut proof = Proof::new("linear");
                for i in 0..facts.len() {
                    proof = proof.with(Term::integer(1)).word(&format!("h{}", first + i));
                }
                for (i, (fact, step)) in facts.into_iter().enumerate().rev() {
                    let mut forget = Proof::new("forget");
                    for j in 0..i {
                        forget = forget.word(&format!("h{}", first + j));
                    }
                    let step = if i > 0 { forget.with(step) } else { step };
                    proof = Proof::new("cut").with(fact).with(step).with(proof);
                }
                return Ok(proof);
            }
        }
        Err(told)
    }
}

/// Proves a relation in some of the variables without what is said about the others.
fn alone(s: &Sequent, names: &BTreeSet<Name>, fact: &Relation, search: &mut Search) -> Result<Proof, Stuck> {
    let mut smaller = s.with_goal(fact.clone());
    let mut forget = Proof::new("forget");
    let foreign = |t: &Term| t.free_variables().iter().any(|v| !names.contains(v));
    for (i, h) in s.hypotheses.iter().enumerate() {
        if foreign(&h.left) || foreign(&h.right) {
            forget = forget.word(&format!("h{}", i + 1));
        }
    }
    smaller.hypotheses.retain(|h| !foreign(&h.left) && !foreign(&h.right));
    let needed =
        |x: &Name| names.contains(x) || s.variables.iter().any(|d| d.domain.ends().any(|e| e.mentions(x)));
    for d in s.variables.iter().filter(|d| !needed(&d.name)) {
        forget = forget.word(&d.name);
    }
    smaller.variables.retain(|d| needed(&d.name));
    let step = search.prove(&smaller)?;
    Ok(if forget.fields.is_empty() { step } else { forget.with(step) })
}

/// The difference of a weak inequality in several variables.
fn weak_difference(s: &Sequent, search: &mut Search) -> Result<Poly, Stuck> {
    let goal = s.relation().map(Relation::turned);
    let Some(goal) = goal.filter(|g| g.rel == Rel::LessEqual && s.variables.len() > 1) else {
        return Err(Stuck::NotApplicable("no weak inequality in several variables"));
    };
    let difference = goal.difference();
    search.spend(10 * u64::from(difference.size()))?;
    let algebra = Algebra { positive: &|t| is_plainly_positive(s, t) };
    algebra.poly(&difference).ok_or(Stuck::NotApplicable("a term that is too large"))
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn factors() {
        proves(&Factors, "for n : integer in [0, 50], x in (0, infinity): n*log(x) <= n*(x - 1)", "cut");
        leaves(
            &Factors,
            &[
                "for n : integer in [-1, 50], x in (0, infinity): n*log(x) <= n*(x - 1)",
                "for n in [0, 50], x in (0, infinity): n*log(x) <= n*(x - 1.001)",
                "for n in [0, 50], x in (0, infinity): n*log(x) < n*(x - 1) + n",
            ],
        );
    }

    #[test]
    fn summands() {
        let line = "for x in (-infinity, infinity), y in (-infinity, infinity)";
        proves(&Summands, &format!("{line}: 1 + x + y <= exp(x) + y^2/4 + y"), "cut");
        proves(
            &Summands,
            "for x in (-1, 1), y in (-1, 1) given x^2 + y^2 < 1: sin(x)^2 + sinh(y)^2 <= 36/25*(x^2 + y^2)",
            "cut",
        );
        leaves(
            &Summands,
            &[
                &format!("{line}: 1.001 + x + y <= exp(x) + y^2/4 + y"),
                &format!("{line}: x*y <= x^2 + y^2/2"),
            ],
        );
    }
}
