//! Monotone faces: where a partial derivative has one sign, only the end of the
//! domain towards which the difference falls matters, one variable fewer.

use num_traits::One;

use crate::expression::{End, Name, Term, differentiate};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::proof::Proof;
use crate::search::towards::{Place, Tends, Towards};
use crate::statement::{Rel, Relation, Sequent};

use super::chain::Chains;
use super::line::{Line, base};
use super::{by_factors, defined, premise, smoothness};

/// The method.
pub struct Faces;

impl Method for Faces {
    fn name(&self) -> &'static str {
        "monotone faces"
    }

    fn share(&self) -> u64 {
        40
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().map(Relation::turned) else {
            return Err(Stuck::NotApplicable("no relation"));
        };
        if s.variables.len() < 2 || !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality in several variables"));
        }
        let difference = goal.difference();
        let mut told = Stuck::NotApplicable("no variable in which the difference is monotone");
        for d in s.variables.iter().rev().filter(|d| difference.mentions(&d.name)) {
            match face(s, &goal, &difference, &d.name, search) {
                Ok(proof) => return Ok(proof),
                Err(Stuck::Exhausted) => return Err(Stuck::Exhausted),
                Err(Stuck::NotApplicable(_)) => {}
                Err(stuck) => told = stuck,
            }
        }
        Err(told)
    }
}

fn face(
    s: &Sequent,
    goal: &Relation,
    difference: &Term,
    x: &Name,
    search: &mut Search,
) -> Result<Proof, Stuck> {
    let none = |why| Err(Stuck::NotApplicable(why));
    let Some(line) = Line::new(s, x, search.left() / 10) else {
        return none("the variable does not move alone");
    };
    let Ok(raw) = differentiate(difference, x) else { return none("no derivative") };
    let signs = line.signs(&raw);
    search.spend(line.work.get())?;
    let seen = |sign: bool| signs.as_ref().is_some_and(|all| all.iter().flatten().all(|s| *s == sign));
    let low = match (seen(true), seen(false)) {
        (true, _) => true,
        (false, true) => false,
        _ => return none("no sign of the derivative"),
    };
    let domain = &line.declared.domain;
    let (end, open) =
        if low { (&domain.lower, domain.lower_open) } else { (&domain.upper, domain.upper_open) };
    let strict = goal.rel == Rel::Less;
    let closed = end.finite().filter(|_| !open);

    // What is left at the end comes first: it is often false for one of the variables.
    let rest = match closed {
        Some(a) => {
            let at = goal.map(|t| t.with(x, a));
            Some(premise(search, &base(s, &line.declared, false).with_goal(at))?)
        }
        None => {
            let place = match (low, end) {
                (true, End::Finite(a)) => Place::From(a.clone()),
                (false, End::Finite(b)) => Place::To(b.clone()),
                (true, _) => Place::Below,
                (false, _) => Place::Above,
            };
            let sign = |c: &Term| line.settled(c);
            match (Towards { sign: &sign, x, place, order: 0 }).limit(difference) {
                Some(Tends::Up) => None,
                Some(Tends::To(c)) => {
                    let weak = Relation::new(c, Rel::GreaterEqual, Term::integer(0));
                    Some(premise(search, &line.base.with_goal(weak))?)
                }
                _ => return none("no limit towards the end"),
            }
        }
    };
    let upward = if low { raw.clone() } else { raw.negate() };
    let strictly = strict && closed.is_none();
    let monotone = monotone(&line, &upward, strictly, search)?;
    let mut needed = Vec::new();
    smoothness(difference, x, &mut needed);
    let defined = defined(&line, &[&raw], needed, search)?;
    let mut proof = Proof::new("face").word(x).word(if low { "lo" } else { "hi" }).with(monotone);
    if let Some(rest) = rest {
        proof = proof.with(rest);
    }
    if let Some(defined) = defined {
        proof = proof.with(defined);
    }
    Ok(proof)
}

/// Proves that the derivative (or its negative) is `>= 0`, or `> 0`, inside: a
/// positive factor apart, the rest by the whole search.
fn monotone(line: &Line, slope: &Term, strictly: bool, search: &mut Search) -> Result<Proof, Stuck> {
    let zero = Term::integer(0);
    let rel = if strictly { Rel::Less } else { Rel::LessEqual };
    let Some((factor, rest)) = Chains::new(line, 0).positive_factor(slope) else {
        return Err(Stuck::because("a derivative that is too large"));
    };
    let stated = Relation::new(zero.clone(), rel, rest.clone());
    let plain = if strictly { is_plainly_positive } else { is_plainly_non_negative };
    let step = if plain(&line.inside, &rest) {
        Proof::new("sign")
    } else {
        let share = search.left() / 3;
        search.within(share, |search| premise(search, &line.inside.with_goal(stated.clone())))?
    };
    let positive = if factor.as_number().is_some_and(One::is_one) {
        Proof::new("sign")
    } else {
        by_factors(line, Relation::new(factor.clone(), Rel::Greater, zero), search)?
    };
    let mut proof = Proof::new("scale").with(stated).with(&factor).with(positive).with(step);
    if let Some(defined) = defined(line, &[&factor, &rest], Vec::new(), search)? {
        proof = proof.with(defined);
    }
    Ok(proof)
}

#[cfg(test)]
mod tests {
    use super::super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn slopes_that_vanish_at_an_end_of_another_variable() {
        let two = "for x in [0, infinity), y in [0, infinity)";
        proves(&Faces, &format!("{two}: log(1 + x + y) <= log(1 + x) + log(1 + y)"), "face");
        leaves(
            &Faces,
            &[
                &format!("{two}: log(1 + x + y) < log(1 + x) + log(1 + y)"),
                &format!("{two}: log(1 + x + y + x*y^2) <= log(1 + x) + log(1 + y)"),
            ],
        );
    }
}
