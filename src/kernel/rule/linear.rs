//! `{linear (m1) ref1 {m1 >= 0}? (m2) ref2 {m2 >= 0}? .. [rest] {rest}? {defined}?}`
//!
//! A reference is `h3`, `lo.x` or `hi.x` and states `a <= b`, `a < b` or `a = b`;
//! write d for `b - a`. Goal `l <= r`: the normal form of
//! `(r - l) - m1 d1 - m2 d2 - ..` is that of the difference of `[rest]`, which
//! `{rest}` proves; without it, it is a sum whose sign is plain. Multipliers of
//! equalities are free, the others are `>= 0`: literally, by shape, or by a step.
//! `l < r` needs the rest strict, or a strict reference with a multiplier that
//! is plainly `> 0`. `l = r` allows equalities only. Absurdity is the goal `0 < 0`.
//! Sound: a combination of true inequalities with multipliers `>= 0` is true and
//! the identity is exact (R13; Farkas 1902, Schrijver, Theory of Linear and
//! Integer Programming, 1986). Without references it rewrites the goal by R8.
//! Forgotten: a multiplier without a sign; a weak reference used as strict.

use num_rational::BigRational;
use num_traits::{One, Zero};

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::normal::{Normalizer, poly_term};
use crate::kernel::sequent::{Goal, Rel, Relation, Sequent};
use crate::kernel::sign::settles;
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = match &s.goal {
        Goal::Absurd => Relation::new(Term::zero(), Rel::Lt, Term::zero()),
        Goal::Relation(r) => r.turned(),
    };
    if goal.rel == Rel::Ne {
        return refuse(Reason::Condition, "a combination does not prove `!=`");
    }
    let n = Normalizer::new(Some(s));
    let minus = -BigRational::one();
    let mut left = n.poly(&goal.difference())?;
    let mut strict = goal.rel != Rel::Lt;
    let mut used = Vec::new();
    while let Some(multiplier) = fields.optional_term() {
        let word = fields.word()?;
        let fact = s.reference(word)?;
        let zero = Term::zero();
        let proof = fields.optional_step_but("defined");
        match fact.rel {
            Rel::Eq => {}
            _ if goal.rel == Rel::Eq => {
                return refuse(Reason::Condition, format!("`{word}` is no equality but the goal is"));
            }
            Rel::Le | Rel::Lt => {
                let non_negative = Relation::new(zero.clone(), Rel::Le, multiplier.clone());
                match proof {
                    Some(step) => prove(&s.with_goal(non_negative), step, k)?,
                    None if settles(s, &non_negative) => {}
                    None => {
                        return refuse(Reason::Condition, format!("{multiplier} is not shown to be >= 0"));
                    }
                }
                strict |=
                    fact.rel == Rel::Lt && settles(s, &Relation::new(zero, Rel::Lt, multiplier.clone()));
            }
            _ => return refuse(Reason::Condition, format!("`{word}` is not an inequality")),
        }
        let product = n.poly(multiplier)?.times(&n.poly(&fact.difference())?, &n.work)?;
        left = left.plus(&product.scaled(&minus));
        used.push(multiplier);
    }
    let rest = fields.optional_relation();
    let proof = if rest.is_some() { Some(fields.step()?) } else { None };
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    if let Some(r) = rest {
        used.extend([&r.left, &r.right]);
    }
    require_defined(s, &used, defined, k)?;
    let wanted = if goal.rel == Rel::Eq {
        Rel::Eq
    } else if strict {
        Rel::Le
    } else {
        Rel::Lt
    };
    let Some((rest, proof)) = rest.zip(proof) else {
        let (numerator, denominator) = left.fraction(&n.work)?;
        k.spend(n.work.spent())?;
        if numerator.is_empty() {
            return if wanted == Rel::Lt {
                refuse(Reason::NotProved, "the combination is not strict")
            } else {
                Ok(())
            };
        }
        let q = crate::kernel::normal::Quotient { numerator, denominator };
        let remainder = q.to_term();
        if q.as_number().is_some_and(|q| q.is_zero())
            || settles(s, &Relation::new(Term::zero(), wanted, remainder.clone()))
        {
            return Ok(());
        }
        return refuse(Reason::NotProved, format!("what is left, {remainder}, has no plain sign"));
    };
    if rest.turned().rel != wanted && !(rest.turned().rel == Rel::Lt && wanted == Rel::Le) {
        return refuse(Reason::Condition, format!("the rest must be stated with `{}`", wanted.name()));
    }
    let gap = left.plus(&n.poly(&rest.difference())?.scaled(&minus));
    let gap = gap.reduced(&n.work)?.1;
    k.spend(n.work.spent())?;
    if !gap.is_empty() {
        return refuse(Reason::NotProved, format!("the combination leaves {} over", poly_term(&gap)));
    }
    prove(&s.with_goal(rest.clone()), proof, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn combinations() {
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x <= y, y < 3: 2*x < 6",
            "{linear (2) h1 (2) h2}",
        );
        accepted(
            "for all x : real in [1, 4], y : real in [0, inf) with y*x >= 2: 4*y >= 2",
            "{linear (1) h1 (y) hi.x}",
        );
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x = 2*y: x^2 = 4*y^2",
            "{linear (x + 2*y) h1}",
        );
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 + y^2 >= 2*x*y",
            "{linear [0 <= (x - y)^2] {sign}}",
        );
        accepted("for all x : real in (-inf, inf) with x <= 1, x >= 2: absurd", "{linear (1) h1 (1) h2}");
        accepted("for all x : real in [0, inf): x/(1 + x) <= 1", "{linear [0 <= 1/(1 + x)] {sign}}");
    }

    #[test]
    fn refused() {
        // A multiplier with zeros or without a sign.
        rejected("for all x : real in [-1, 1] with x*x >= 0: x >= 0", "{linear (1/x) h1}");
        rejected(
            "for all x : real in [0, 1], y : real in [0, 2] with x*(y - 1) >= 0: y >= 1",
            "{linear (1/x) h1}",
        );
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x <= y: -x <= -y",
            "{linear (-1) h1}",
        );
        // Weak used as strict; inequality used as equality; wrong identity.
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x <= y: x < y",
            "{linear (1) h1}",
        );
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x <= y: x = y",
            "{linear (1) h1}",
        );
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 + y^2 >= 2.0000001*x*y",
            "{linear [0 <= (x - y)^2] {sign}}",
        );
        // New terms must be defined.
        rejected("for all x : real in [-1, 1]: x <= x + 1", "{linear [0 <= x/x] {sign}}");
    }
}
