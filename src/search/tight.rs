//! Sequents with some variables put where a hypothesis is tight.
//!
//! A false statement with hypotheses is often false only where they hold with
//! equality, and a scattered point meets an equation never. So an equation is
//! solved for a variable, and an inequality may be taken as an equation. Only
//! hypotheses that are linear in the variable are solved. Nothing here is a
//! verdict: a point found is put back into the whole sequent and tested there.

use crate::expression::{Name, Sort, Substitution, Term, differentiate, simplify};
use crate::statement::{Conclusion, Declaration, Rel, Relation, Sequent};

/// A sequent of which some variables are given by the others.
#[derive(Clone, Debug)]
pub struct Tight {
    /// What is left.
    pub sequent: Sequent,
    /// The variables that were put, each in terms of those that were left then.
    put: Vec<(Name, Term)>,
}

impl Tight {
    /// The sequent as it is.
    #[must_use]
    pub fn whole(s: &Sequent) -> Tight {
        Tight { sequent: s.clone(), put: Vec::new() }
    }

    /// A point of the whole sequent from one of what is left.
    #[must_use]
    pub fn restore(&self, whole: &Sequent, point: &[Term]) -> Vec<Term> {
        let names = self.sequent.variables.iter().map(|d| d.name.clone());
        let mut values: Substitution = names.zip(point.iter().cloned()).collect();
        for (name, term) in self.put.iter().rev() {
            let value = values.apply(term);
            let value = value.rational_value().map_or_else(|| simplify(&value), Term::number);
            values.insert(name.clone(), value);
        }
        whole.variables.iter().filter_map(|d| values.get(&d.name).cloned()).collect()
    }

    /// With the variable put where the hypothesis at `place` is tight, if it can be
    /// solved for it and no declaration comes to mention a later one.
    fn solved(&self, place: usize, x: &Name) -> Option<Tight> {
        let s = &self.sequent;
        let at = s.variables.iter().position(|d| d.name == *x)?;
        if s.variables[at].domain.sort != Sort::Real {
            return None;
        }
        let value = solve(&s.hypotheses[place], x)?;
        let inner = value.free_variables();
        let mentions = |d: &Declaration| d.domain.ends().any(|t| t.mentions(x));
        for (i, d) in s.variables.iter().enumerate().skip(at + 1) {
            if mentions(d) && s.variables[i..].iter().any(|later| inner.contains(&later.name)) {
                return None;
            }
        }
        let put = |t: &Term| t.with(x, &value);
        let mut variables = s.variables.clone();
        let own = variables.remove(at);
        for d in &mut variables {
            d.domain = d.domain.map(put);
        }
        let others = s.hypotheses.iter().enumerate().filter(|(i, _)| *i != place).map(|(_, h)| h.map(put));
        let hypotheses = own.domain.membership(&value).into_iter().chain(others).collect();
        let goal = match &s.goal {
            Conclusion::Relation(r) => Conclusion::Relation(r.map(put)),
            Conclusion::Absurd => Conclusion::Absurd,
        };
        let mut all = self.put.clone();
        all.push((x.clone(), value));
        Some(Tight { sequent: Sequent { variables, hypotheses, goal }, put: all })
    }

    fn solved_for_some(&self, place: usize) -> impl Iterator<Item = Tight> {
        // Variables declared last depend on the others by nature.
        self.sequent.variables.iter().rev().filter_map(move |d| self.solved(place, &d.name))
    }
}

/// Where both sides of a relation are equal, as a value of `x`; nothing unless
/// their difference is linear in `x`.
fn solve(relation: &Relation, x: &Name) -> Option<Term> {
    if !relation.left.mentions(x) && !relation.right.mentions(x) {
        return None;
    }
    root(&relation.left.subtract(&relation.right), x)
}

/// The value of `x` at which a term that is linear in it is 0.
#[must_use]
pub fn root(term: &Term, x: &Name) -> Option<Term> {
    let slope = simplify(&differentiate(term, x).ok()?);
    if slope.mentions(x) || slope.is_zero() {
        return None;
    }
    Some(simplify(&term.with(x, &Term::integer(0)).divide(&slope).negate()))
}

/// The sequent with its equations solved, then with more and more of its
/// inequalities tight: at most `most` in all.
#[must_use]
pub fn tight(s: &Sequent, most: usize) -> Vec<Tight> {
    let mut first = Tight::whole(s);
    let equation = |t: &Tight| {
        let places = t.sequent.hypotheses.iter().enumerate().filter(|(_, h)| h.rel == Rel::Equal);
        places.map(|(i, _)| i).find_map(|i| t.solved_for_some(i).next())
    };
    while let Some(next) = equation(&first) {
        first = next;
    }
    let mut all = vec![first];
    let mut seen = std::collections::BTreeSet::new();
    let mut done = 0;
    while done < all.len() && all.len() < most {
        let here = all[done].clone();
        done += 1;
        let weak = |h: &Relation| matches!(h.rel, Rel::LessEqual | Rel::GreaterEqual);
        let places = here.sequent.hypotheses.iter().enumerate().filter(|(_, h)| weak(h));
        for next in places.flat_map(|(i, _)| here.solved_for_some(i)) {
            if all.len() < most && seen.insert(next.sequent.to_string()) {
                all.push(next);
            }
        }
    }
    all
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::End;
    use crate::expression::sample::term;
    use crate::statement::Domain;

    fn context(names: &[&str], hypotheses: &[(&str, Rel, &str)]) -> Sequent {
        let from_zero =
            Domain { lower: End::Finite(Term::integer(0)), lower_open: false, ..Domain::all(Sort::Real) };
        Sequent {
            variables: names
                .iter()
                .map(|n| Declaration { name: (*n).into(), domain: from_zero.clone() })
                .collect(),
            hypotheses: hypotheses.iter().map(|(l, rel, r)| Relation::new(term(l), *rel, term(r))).collect(),
            goal: Conclusion::Absurd,
        }
    }

    #[test]
    fn equations_are_solved_and_points_restored() {
        let s = context(&["x", "y"], &[("2*x + y", Rel::Equal, "3")]);
        let all = tight(&s, 5);
        assert_eq!(all[0].sequent.variables.len(), 1);
        let point = all[0].restore(&s, &[term("1/2")]);
        assert_eq!(point, [term("1/2"), term("2")]);
    }

    #[test]
    fn inequalities_may_be_tight_and_strict_ones_may_not() {
        let s = context(&["x", "m"], &[("m", Rel::LessEqual, "x^2"), ("m", Rel::Less, "x^3")]);
        let all = tight(&s, 5);
        assert_eq!(all.len(), 2);
        assert_eq!(all[1].restore(&s, &[term("3")]), [term("3"), term("9")]);
    }

    #[test]
    fn only_linear_ones_are_solved() {
        let s = context(&["x", "y"], &[("x^2 + exp(y)", Rel::Equal, "3")]);
        assert_eq!(tight(&s, 5)[0].sequent, s);
    }
}
