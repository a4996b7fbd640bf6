//! `{squares (m) {0 < m}? part ..}`, each part one of
//! `{square (d) (f) ref ..}` and `{times (p) ref}`, last `{defined ..}?`
//!
//! A reference is `h3`, `lo.x` or `hi.x`; it states `a <= b`, `a < b` or `a = b`, and
//! g is `b - a`. Goal `l <= r` (or `<`) where by normal form
//! `m (r - l) = sum d f^2 g1 g2 .. + sum p g` with `m > 0`, every d plainly `>= 0`,
//! inequalities behind the squares, an equality behind each `times`. A strict
//! goal needs one square whose d and f^2 are plainly `> 0` and whose references
//! are strict. Absurdity is the goal `0 < 0`.
//! Sound: at every point of Gamma the right side is a sum of products of factors
//! `>= 0` and of zeros, and m > 0 may be divided out (R32, R33; Stengle 1974,
//! Parrilo 2003). The Gram matrix stands there already taken apart, G = L D L', so
//! its being positive semidefinite is the sign of the d.
//! Forgotten: m with zeros; a d whose sign is only numerical; a weak reference or
//! a square with zeros used as strict.

use num_rational::BigRational;
use num_traits::One;

use super::{Kernel, check as prove};
use crate::kernel::defined::{require_defined, settled};
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
    if !matches!(goal.rel, Rel::Le | Rel::Lt) {
        return refuse(Reason::Condition, "the goal is no inequality");
    }
    let is = |t: &Term, rel| settles(s, &Relation::new(Term::zero(), rel, t.clone()));
    let factor = fields.term()?;
    let positive = Relation::new(Term::zero(), Rel::Lt, factor.clone());
    let mut proof = None;
    if !["square", "times", "defined"].iter().any(|r| fields.sees_step_named(r)) {
        proof = fields.optional_step();
    }
    let n = Normalizer::new(Some(s));
    let mut gap = n.poly(factor)?.times(&n.poly(&goal.difference())?, &n.work)?;
    let mut used = vec![factor];
    let mut strict = false;
    loop {
        let square = fields.optional_step_named("square");
        let Some(part) = square.or_else(|| fields.optional_step_named("times")) else { break };
        let mut own = Fields::of(part);
        let weight = own.term()?;
        let mut product = n.poly(weight)?;
        used.push(weight);
        let mut part_is_strict = false;
        if square.is_some() {
            let f = own.term()?;
            let f_poly = n.poly(f)?;
            product = product.times(&f_poly, &n.work)?.times(&f_poly, &n.work)?;
            used.push(f);
            if !is(weight, Rel::Le) {
                return refuse(Reason::Condition, format!("the sign of {weight} is not settled"));
            }
            part_is_strict = is(weight, Rel::Lt) && is(&f.power(&Term::integer(2)), Rel::Lt);
        }
        let mut references = 0;
        while let Some(word) = own.optional_word() {
            let fact = s.reference(word)?;
            let fits =
                if square.is_some() { matches!(fact.rel, Rel::Le | Rel::Lt) } else { fact.rel == Rel::Eq };
            if !fits {
                return refuse(Reason::Condition, format!("`{word}` is not of the kind needed"));
            }
            part_is_strict &= fact.rel == Rel::Lt;
            product = product.times(&n.poly(&fact.difference())?, &n.work)?;
            references += 1;
        }
        own.end()?;
        if square.is_none() && references == 0 {
            return refuse(Reason::Fields, "expected a reference");
        }
        strict |= part_is_strict;
        gap = gap.plus(&product.scaled(&-BigRational::one()));
    }
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    require_defined(s, &used, defined, k)?;
    let gap = gap.reduced(&n.work)?.1;
    k.spend(n.work.spent())?;
    if !gap.is_empty() {
        return refuse(Reason::NotProved, format!("the squares leave {} over", poly_term(&gap)));
    }
    if goal.rel == Rel::Lt && !strict {
        return refuse(Reason::NotProved, "no square is plainly positive");
    }
    match proof {
        Some(step) => prove(&s.with_goal(positive), step, k),
        None if settled(s, &positive) => Ok(()),
        None => refuse(Reason::Condition, format!("{positive} is not settled")),
    }
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    const MOTZKIN: &str =
        "for all x : real in (-inf, inf), y : real in (-inf, inf): x^4*y^2 + x^2*y^4 + 1 >= 3*x^2*y^2";

    #[test]
    fn squares() {
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 + y^2 >= 2*x*y",
            "{squares (1) {square (1) (x - y)}}",
        );
        // Motzkin's form needs a multiplier.
        accepted(
            MOTZKIN,
            "{squares (1 + x^2 + y^2) {square (1) (x^2*y - y)} {square (1) (x*y^2 - x)} {square (1) (x^2*y^2 - 1)}
              {square (1/4) (x*y^3 - x^3*y)} {square (3/4) (x*y^3 + x^3*y - 2*x*y)}}",
        );
        // Ends and hypotheses as factors, also products of them.
        accepted("for all x : real in [0, 1]: x - x^2 >= 0", "{squares (1) {square (1) (1) lo.x hi.x}}");
        accepted(
            "for all x : real in [-1, 1], y : real in [-1, 1]: x*y >= -1",
            "{squares (2) {square (1) (1) lo.x lo.y} {square (1) (1) hi.x hi.y}}",
        );
        accepted(
            "for all x : real in [0, inf): x + 1/x^0 > 0",
            "{squares (1) {square (x) (1)} {square (1) (1)}}",
        );
        accepted(
            "for all x : real in (-inf, inf), y : real in (-inf, inf) with x + y = 1: x^2 + y^2 >= 1/2",
            "{squares (2) {square (1) (x - y)} {times (-(x + y) - 1) h1}}",
        );
        accepted(
            "for all a : real in (0, inf), b : real in (0, inf): sqrt(a*b) <= (a + b)/2",
            "{squares (2) {square (1) (sqrt(a) - sqrt(b))}}",
        );
        accepted(
            "for all a : real in (-inf, inf), b : real in (-inf, inf): cos(a)*cos(b) + sin(a)*sin(b) <= 1",
            "{squares (2) {square (1) (cos(a) - cos(b))} {square (1) (sin(a) - sin(b))}}",
        );
        accepted(
            "for all x : real in (-inf, inf) with x^2 < 1, x > 2: absurd",
            "{squares (1) {square (1) (1) h1} {square (1) (1) h2 h2} {square (4) (1) h2} {square (3) (1)}}",
        );
    }

    #[test]
    fn refused() {
        // Trap 31: a Gram matrix positive up to rounding.
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 + y^2 >= 2.0000001*x*y",
            "{squares (1) {square (1) (x - 1.00000005*y)} {square (-0.0000001) (y)}}",
        );
        rejected(
            "for all x : real in (-inf, inf), y : real in (-inf, inf): x^2 + y^2 >= 2.0000001*x*y",
            "{squares (1) {square (1) (x - y)}}",
        );
        // A multiplier with zeros or without a sign (trap 24).
        rejected("for all x : real in [-1, 1]: x >= 0", "{squares (x^2) {square (x) (x)}}");
        rejected("for all x : real in [-1, 1]: x >= 0", "{squares (x) {square (1) (x)}}");
        rejected(
            "for all x : real in [0, 1], y : real in [0, 2] with x*(y - 1) >= 0: y >= 1",
            "{squares (x) {square (1) (1) h1}}",
        );
        // Squares with zeros, weak references, for a strict goal.
        rejected("for all x : real in (-inf, inf): x^2 > 0", "{squares (1) {square (1) (x)}}");
        rejected("for all x : real in [0, 1]: x > 0", "{squares (1) {square (1) (1) lo.x}}");
        accepted("for all x : real in (0, 1]: x > 0", "{squares (1) {square (1) (1) lo.x}}");
        // An equality behind a square, an inequality behind a multiplier.
        rejected("for all x : real in (-inf, inf) with x <= 1: x >= 1", "{squares (1) {times (-1) h1}}");
        rejected("for all x : real in (-inf, inf) with x = 1: x <= 1", "{squares (1) {square (1) (1) h1}}");
        rejected("for all x : real in [0, 1]: x >= 0", "{squares (1) {times (x)}}");
        // New terms must be defined.
        rejected("for all x : real in [-1, 1]: x^2 >= 0", "{squares (1) {square (1) (x^2/x)}}");
        rejected("for all x : real in [0, 1]: x = x", "{squares (1)}");
    }
}
