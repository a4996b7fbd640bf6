//! What the kernel sees at a glance: both sides have one normal form, the goal is a
//! hypothesis or follows from signs, all coefficients are of one sign after a shift
//! of the domain to an orthant, a quadratic has no roots. Equations that are no
//! identities are shown as two inequalities.

use num_rational::BigRational;
use num_traits::Signed;

use crate::expression::{End, Term};
use crate::statement::{Conclusion, Rel, Relation, Sequent};

use super::super::engine::{Method, Search, Stuck};
use super::super::laurent::{Algebra, Poly};
use super::super::plain::is_plainly_positive;
use super::super::proof::Proof;

/// The method.
pub struct Exact;

/// Most choices of ends for a shift.
const MOST_SHIFTS: usize = 8;

impl Method for Exact {
    fn name(&self) -> &'static str {
        "exact"
    }

    fn share(&self) -> u64 {
        10
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation() else { return Err(Stuck::NotApplicable("no relation")) };
        let rel = goal.turned().rel;
        let mut steps = vec![Proof::new("sign")];
        if matches!(rel, Rel::Equal | Rel::LessEqual) {
            steps.push(Proof::new("identity"));
        }
        if matches!(rel, Rel::LessEqual | Rel::Less) {
            steps.extend(shifts(s, goal));
        }
        for step in steps {
            if let Ok(proof) = search.accepted(s, step) {
                return Ok(proof);
            }
        }
        if matches!(rel, Rel::LessEqual | Rel::Less) {
            return quadratic(s, goal, search);
        }
        Err(Stuck::NotApplicable("not seen at a glance"))
    }
}

/// Shifts of all variables of the goal that have ends: first to their lower ends.
fn shifts(s: &Sequent, goal: &Relation) -> Vec<Proof> {
    let mut moved = goal.free_variables();
    // The ends of a variable move with the variables they mention.
    for d in s.variables.iter().rev() {
        if moved.contains(&d.name) {
            moved.extend(d.domain.ends().flat_map(Term::free_variables));
        }
    }
    let mut choices = vec![Proof::new("shift")];
    for d in s.variables.iter().filter(|d| moved.contains(&d.name)) {
        let has = |e: &End| e.finite().is_some();
        let ways: Vec<&str> = [("lo", &d.domain.lower), ("hi", &d.domain.upper)]
            .into_iter()
            .filter(|(_, e)| has(e))
            .map(|(word, _)| word)
            .collect();
        if ways.is_empty() {
            continue;
        }
        let longer =
            |way: &&str| choices.iter().map(|c| c.clone().word(&d.name).word(way)).collect::<Vec<_>>();
        let both: Vec<Proof> = ways.iter().flat_map(longer).collect();
        choices = if both.len() <= MOST_SHIFTS { both } else { longer(&ways[0]) };
    }
    choices.retain(|c| !c.fields.is_empty());
    choices
}

/// A quadratic in one variable with a discriminant of the right sign.
fn quadratic(s: &Sequent, goal: &Relation, search: &mut Search) -> Result<Proof, Stuck> {
    let mut told = Stuck::NotApplicable("no quadratic");
    let positive = |t: &Term| is_plainly_positive(s, t);
    let Some(poly) = (Algebra { positive: &positive }).poly(&goal.difference()) else { return Err(told) };
    for x in goal.free_variables() {
        let Some([c, b, a]) = poly.polynomial_in(&x).and_then(|list| <[Poly; 3]>::try_from(list).ok()) else {
            continue;
        };
        if a.as_number().is_some_and(|q| !q.is_positive()) {
            continue;
        }
        let product = |p: &Poly, q: &Poly| p.times(q);
        let Some((mut less, square)) = product(&a, &c).zip(product(&b, &b)) else { continue };
        less.scale(&BigRational::from_integer(4.into()));
        let above = |rel, p: &Poly| s.with_goal(Relation::new(Term::integer(0), rel, p.to_term()));
        let written = |rel, t: Term| s.with_goal(Relation::new(Term::integer(0), rel, t));
        let (a_term, b_term, c_term) = (a.to_term(), b.to_term(), c.to_term());
        let rel = goal.turned().rel;
        // As the kernel writes it, then multiplied out.
        let discriminant =
            Term::integer(4).multiply(&a_term).multiply(&c_term).subtract(&b_term.power(&Term::integer(2)));
        let proved = (|| {
            let leading = search.prove(&above(Rel::Less, &a))?;
            let expanded = above(rel, &less.minus(&square));
            let rest = match &expanded.goal {
                Conclusion::Relation(r) => {
                    Proof::new("linear").with(r.clone()).with(search.prove(&expanded)?)
                }
                Conclusion::Absurd => return Err(Stuck::because("no relation")),
            };
            search.accepted(&written(rel, discriminant.clone()), rest.clone())?;
            let step = Proof::new("quadratic").with(Term::variable(x.clone()));
            let step = step.with(a_term.clone()).with(b_term.clone()).with(c_term.clone());
            search.accepted(s, step.with(leading).with(rest))
        })();
        match proved {
            Ok(proof) => return Ok(proof),
            Err(stuck) => told = stuck,
        }
    }
    Err(told)
}

/// Equations as two inequalities.
pub struct Equation;

impl Method for Equation {
    fn name(&self) -> &'static str {
        "two inequalities"
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let Some(goal) = s.relation().filter(|r| r.rel == Rel::Equal) else {
            return Err(Stuck::NotApplicable("no equation"));
        };
        let one = Relation::new(goal.left.clone(), Rel::LessEqual, goal.right.clone());
        let two = Relation::new(goal.right.clone(), Rel::LessEqual, goal.left.clone());
        let mut inner = s.with_goal(one.clone());
        let first = search.prove(&inner)?;
        inner.hypotheses.push(one.clone());
        inner = inner.with_goal(two.clone());
        let second = search.prove(&inner)?;
        let rest = Proof::new("cut").with(two).with(second).with(Proof::new("sign"));
        search.accepted(s, Proof::new("cut").with(one).with(first).with(rest))
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn normal_forms_hypotheses_and_signs() {
        proves(&Exact, "for a in (0, infinity), b in (0, infinity): log(a*b^2) = log(a) + 2*log(b)", "sign");
        proves(&Exact, "for x in (-infinity, infinity) given x^3 <= 2: x^3 <= 2", "sign");
        proves(&Exact, "for a in [0, infinity), b in (0, infinity): 0 <= a*exp(a)/b", "sign");
        leaves(
            &Exact,
            &[
                "for a in (0, infinity), b in (0, infinity): log(a*b^2) = log(a) + log(b)",
                "for x in (-infinity, infinity) given x^3 <= 2: x^3 < 2",
                "for a in [0, infinity), b in (0, infinity): 0 < a*exp(a)/b",
            ],
        );
    }

    #[test]
    fn shifts_to_ends_of_the_domain() {
        let triangle = "for x in [0, infinity), y in [x, infinity): x^2 + 2*x*y <= 3*y^2";
        proves(&Exact, triangle, "shift");
        proves(&Exact, "for x in [0, 1], y in [0, 1]: x*y >= x + y - 1", "shift");
        leaves(&Exact, &["for x in [0, infinity), y in [x, infinity): x^2 + 2*x*y <= 2*y^2"]);
    }

    #[test]
    fn quadratics_without_roots() {
        let three = "for x in (-infinity, infinity), c in [1, infinity)";
        proves(&Exact, &format!("{three}: c*x^2 + 2*x + 1 >= 0"), "quadratic");
        leaves(&Exact, &[&format!("{three}: c*x^2 + 2*x + 1 > 0")]);
        leaves(&Exact, &[&format!("{three}: c*x^2 + 3*x + 1 >= 0")]);
    }
}
