//! `{convex jensen (u : real in ends) (phi) (x1) (t1) (x2) (t2) .. {x1 in ends}.. {0 <= t1} .. {bend} {rest} {defined ..}?}`,
//! `{convex tangent (u : real in ends) (phi) (x) (c) {x in ends}.. {c inside}.. {bend} {rest} {defined ..}?}`    (R24)
//!
//! `phi` is a term in a real variable `u`, declared after those of Gamma for this
//! purpose, and continuous in `u` by its shape. `bend` proves `D_u D_u phi >= 0` in
//! Gamma with `u` strictly between its ends. For each point in order, a step for each
//! finite end proves that it lies in the domain of `u` (`c` strictly inside), and one
//! that its weight is not negative; the weights add up to 1 by normal form. Appended
//! to the hypotheses is
//!
//! ```text
//! phi(t1 x1 + t2 x2 + ..) <= t1 phi(x1) + t2 phi(x2) + ..   (jensen)
//! phi(c) + phi'(c) (x - c) <= phi(x)                        (tangent)
//! ```
//! with which `rest` proves the goal. The chord over [a, b] is jensen between the ends.
//! `defined` lists conditions of definedness or differentiability: for u in its
//! domain, strictly inside it, or in Gamma.
//! Sound: a continuous function on an interval whose second derivative inside is
//! not negative is convex there, closed ends included, and lies above its tangents
//! (Taylor's formula with Lagrange's remainder; Jensen's inequality, Hardy,
//! Littlewood, Polya, Inequalities, 1934, 3.6 and 3.10). `u` is fresh, so `phi` at
//! a point of the domain is `phi` with that point put in, and defined there.
//! Forgotten: an interval that does not contain the arguments, as for the sine
//! beyond pi; weights that are negative or do not add up to 1; a jump of phi at an
//! end; a tangent where phi has no derivative.

use super::{Kernel, check as prove};
use crate::kernel::defined::{membership, require_defined};
use crate::kernel::differentiate::{continuous, differentiate};
use crate::kernel::section::{Section, require};
use crate::kernel::sequent::{Rel, Relation, Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Most points of one instance.
const MAX_POINTS: usize = 20;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let jensen = match &**fields.word()? {
        "jensen" => true,
        "tangent" => false,
        other => return refuse(Reason::Fields, format!("`{other}` is neither jensen nor tangent")),
    };
    let declaration = fields.declaration()?;
    let phi = fields.term()?;
    let mut pairs: Vec<(&Term, &Term)> = Vec::new();
    while let Some(x) = fields.optional_term() {
        pairs.push((x, fields.term()?));
    }
    if pairs.is_empty() || pairs.len() > if jensen { MAX_POINTS } else { 1 } {
        return refuse(Reason::Fields, format!("{} pairs of terms", pairs.len()));
    }
    if declaration.domain.sort != Sort::Real {
        return refuse(Reason::Condition, format!("`{}` is not a real variable", declaration.name));
    }
    let mut open = declaration.domain.clone();
    open.lower.iter_mut().chain(&mut open.upper).for_each(|e| e.open = true);
    let mut conditions = Vec::new();
    for (x, other) in &pairs {
        conditions.extend(membership(x, &declaration.domain));
        if jensen {
            conditions.push(Relation::new(Term::zero(), Rel::Le, (*other).clone()));
        } else {
            conditions.extend(membership(other, &open));
        }
    }
    let mut proofs = Vec::new();
    for _ in &conditions {
        proofs.push(fields.step()?);
    }
    let (bend, rest) = (fields.step()?, fields.step()?);
    let defined = fields.optional_step_named("defined");
    fields.end()?;

    k.require_fresh(s, &declaration.name)?;
    let whole = s.with_variable(declaration.clone())?;
    let section = Section::of(&whole, &declaration.name, k)?;
    let mut terms: Vec<&Term> = pairs.iter().flat_map(|(x, t)| [*x, *t]).collect();
    terms.extend([&open.lower, &open.upper].into_iter().flatten().map(|e| &e.term));
    require_defined(s, &terms, defined, k)?;
    for (condition, proof) in conditions.iter().zip(proofs) {
        prove(&s.with_goal(condition.clone()), proof, k)?;
    }
    require_defined(&whole, &[phi], defined, k)?;
    continuous(phi, &declaration.name)?;
    let slope = differentiate(phi, &declaration.name)?;
    let second = differentiate(&slope.term, &declaration.name)?;
    for d in [&slope, &second] {
        require(&section.inside, &d.conditions, defined, k)?;
        require_defined(&section.inside, &[&d.term], defined, k)?;
    }
    let upward = Relation::new(Term::zero(), Rel::Le, second.term);
    prove(&section.inside.with_goal(upward), bend, k)?;

    let at = |point: &Term| phi.substitute(&declaration.name, point);
    let fact = if jensen {
        let sum = |f: &dyn Fn(&Term, &Term) -> Term| {
            let parts = pairs.iter().map(|(x, t)| f(x, t));
            parts.reduce(|a, b| a.add(&b)).unwrap_or_else(Term::zero)
        };
        let weights = sum(&|_, t| t.clone());
        if !k.equal(s, &weights, &Term::integer(1))? {
            return refuse(Reason::Condition, format!("the weights {weights} do not add up to 1"));
        }
        Relation::new(at(&sum(&|x, t| t.multiply(x))), Rel::Le, sum(&|x, t| t.multiply(&at(x))))
    } else {
        let (x, c) = pairs[0];
        let slope = slope.term.substitute(&declaration.name, c);
        Relation::new(at(c).add(&slope.multiply(&x.subtract(c))), Rel::Le, at(x))
    };
    prove(&s.with_hypothesis(fact), rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::sample::{accepts, rejects};

    const SIGNS: &str = "{sign} {sign} {sign} {sign} {sign} {sign}";

    #[test]
    fn points_and_tangents() {
        accepts(
            "x : real in (-inf, inf); y : real in (-inf, inf) | | 2*cosh((x + y)/2) <= cosh(x) + cosh(y)",
            "{convex jensen (u : real in (-inf, inf)) (cosh(u)) (x) (1/2) (y) (1/2) {sign} {sign} {sign} \
             {linear (2) h1}}",
        );
        accepts(
            "a : real in (0, inf); b : real in (0, inf); t : real in [0, 1] | | \
             t*log(a) + (1 - t)*log(b) <= log(t*a + (1 - t)*b)",
            "{convex jensen (u : real in (0, inf)) (-log(u)) (a) (t) (b) (1 - t) {sign} {sign} {sign} \
             {sign} {sign} {linear (1) h1}}",
        );
        accepts(
            "x : real in (0, inf); y : real in (0, inf); z : real in (0, inf) | | \
             x^(1/3)*y^(1/3)*z^(1/3) <= (x + y + z)/3",
            "{convex jensen (u : real in (-inf, inf)) (exp(u)) (log(x)) (1/3) (log(y)) (1/3) (log(z)) (1/3) \
             {sign} {sign} {sign} {sign} {linear (1) h1}}",
        );
        accepts(
            "x : real in (-inf, inf) | | e*x <= exp(x)",
            "{convex tangent (u : real in (-inf, inf)) (exp(u)) (x) (1) {sign} {linear (1) h1}}",
        );
        // Closed ends, at one of which the derivative is infinite.
        accepts(
            "x : real in [0, 1] | | x <= sqrt(x)",
            "{convex jensen (u : real in [0, 1]) (-sqrt(u)) (1) (x) (0) (1 - x) {sign} {sign} {sign} \
             {sign} {sign} {sign} {sign} {linear (1) h1}}",
        );
    }

    #[test]
    fn points_outside_the_interval() {
        let sine = "x : real in [0, 4]; y : real in [0, 4] | | (sin(x) + sin(y))/2 <= sin((x + y)/2)";
        for (end, why) in [("pi", "pi"), ("4", "sin(u)")] {
            let step = format!(
                "{{convex jensen (u : real in [0, {end}]) (-sin(u)) (x) (1/2) (y) (1/2) {SIGNS} {{sign}} \
                 {{linear (1) h1}}}}"
            );
            rejects(sine, &step, why);
        }
        rejects(
            "x : real in [0, 1] | | 0 <= x",
            "{convex tangent (u : real in [0, 1]) (u^2) (x) (1) {sign} {sign} {sign} {sign} {sign} {sign}}",
            "1 < 1",
        );
    }

    #[test]
    fn wrong_weights() {
        let step = |t: &str, r: &str| {
            format!(
                "{{convex jensen (u : real in [0, 2]) (u^2) (1) ({t}) (0) ({r}) {SIGNS} {{sign}} {{linear (1) h1}}}}"
            )
        };
        let s = "x : real in [0, 1] | | (2*x)^2 <= 2*x";
        rejects(s, &step("2*x", "1 - 2*x"), "1 - 2*x");
        rejects(s, &step("x", "x"), "do not add up to 1");
    }

    #[test]
    fn forgotten_conditions() {
        let refused = |declaration: &str, phi: &str, why: &str| {
            let step = format!(
                "{{convex jensen ({declaration}) ({phi}) (x) (1) {{sign}} {{sign}} {{sign}} {{sign}} {{sign}}}}"
            );
            rejects("x : real in [0, 1] | | 0 <= x", &step, why);
        };
        // Undefined at a point, a jump, a kink.
        refused("u : real in [0, 1]", "-log(u)", "u > 0 is not shown");
        refused("u : real in [0, 1]", "-floor(u)", "floor");
        refused("u : real in [-1, 1]", "-abs(u)", "u != 0 is not shown");
        refused("n : integer in [0, 1]", "n^2", "not a real variable");
        refused("x : real in [0, 1]", "x^2", "already declared");
    }
}
