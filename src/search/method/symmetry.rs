//! Symmetric variables are put in order; then the coefficients may all be
//! non-negative once the domain has been moved to an orthant, or squares may have
//! the differences as multipliers.
//! Source: Hardy, Littlewood, Polya, Inequalities, 1934, for the use of order.

use crate::expression::{End, Name, Sort, Substitution, Term};
use crate::statement::{Rel, Relation, Sequent};

use super::super::engine::{Method, Search, Stuck};
use super::super::laurent::Algebra;
use super::super::plain::is_plainly_positive;
use super::super::proof::Proof;
use super::{Exact, Squares};

/// The method.
pub struct Symmetry {
    /// Whether squares are tried in that order, too.
    pub squares: bool,
}

/// More variables are not put in order.
const MAX_VARIABLES: usize = 8;

impl Method for Symmetry {
    fn name(&self) -> &'static str {
        if self.squares { "symmetry and squares" } else { "symmetry" }
    }

    fn share(&self) -> u64 {
        20
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let goal = s.relation().ok_or(Stuck::NotApplicable("no relation"))?.turned();
        if !matches!(goal.rel, Rel::LessEqual | Rel::Less) {
            return Err(Stuck::NotApplicable("no inequality"));
        }
        if s.variables.is_empty() || s.variables.len() > MAX_VARIABLES {
            return Err(Stuck::NotApplicable("too many variables, or none"));
        }
        search.spend(20)?;
        let (word, names) = symmetric(s, &goal).ok_or(Stuck::NotApplicable("no symmetry"))?;
        let ordered = ordered(s, word, &names);
        let rest = match search.attempt(&Exact, &ordered) {
            Ok(proof) => proof,
            Err(_) if self.squares => search.attempt(&Squares, &ordered)?,
            Err(stuck) => return Err(stuck),
        };
        let mut proof = Proof::new("order").word(word);
        for name in &names {
            proof = proof.word(name);
        }
        Ok(proof.with(rest))
    }
}

/// The largest set of variables that may be swapped freely, or moved round together.
fn symmetric(s: &Sequent, goal: &Relation) -> Option<(&'static str, Vec<Name>)> {
    let fits = |name: &Name| {
        s.variables
            .iter()
            .any(|d| d.name == *name && d.domain.sort == Sort::Real && d.domain.free_variables().is_empty())
            && !s.variables.iter().any(|d| d.domain.free_variables().contains(name))
    };
    let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).filter(fits).collect();
    let domain = |name: &Name| s.declaration(name).map(|d| &d.domain);
    let is_same = |from: &[Name], to: &[Name]| {
        let put: Substitution =
            from.iter().cloned().zip(to.iter().map(|n| Term::variable(n.clone()))).collect();
        s.hypotheses.iter().chain([goal]).all(|r| {
            let before = r.difference();
            let gap = before.subtract(&put.apply(&before));
            Algebra { positive: &|a| is_plainly_positive(s, a) }.poly(&gap).is_some_and(|p| p.is_zero())
        })
    };
    let mut best: Vec<Name> = Vec::new();
    for (i, first) in names.iter().enumerate() {
        let mut class = vec![first.clone()];
        for other in &names[i + 1..] {
            let swap = ([first.clone(), other.clone()], [other.clone(), first.clone()]);
            if domain(first) == domain(other) && is_same(&swap.0, &swap.1) {
                class.push(other.clone());
            }
        }
        if class.len() > best.len() {
            best = class;
        }
    }
    if best.len() > 1 {
        return Some(("full", best));
    }
    if names.len() > 2 && names.iter().all(|n| domain(n) == domain(&names[0])) {
        let round: Vec<Name> = names.iter().cycle().skip(1).take(names.len()).cloned().collect();
        if is_same(&names, &round) {
            return Some(("first", names));
        }
    }
    None
}

fn ordered(s: &Sequent, word: &str, names: &[Name]) -> Sequent {
    let mut s = s.clone();
    for (i, name) in names.iter().enumerate().skip(1) {
        let before = if word == "full" { &names[i - 1] } else { &names[0] };
        for d in s.variables.iter_mut().filter(|d| d.name == *name) {
            d.domain.lower = End::Finite(Term::variable(before.clone()));
            d.domain.lower_open = false;
        }
    }
    s
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::Symmetry;

    #[test]
    fn full_symmetry_only_where_it_is() {
        let three = "for x in [0, infinity), y in [0, infinity), z in [0, infinity)";
        let method = Symmetry { squares: false };
        proves(
            &method,
            &format!("{three}: x*(x - y)*(x - z) + y*(y - x)*(y - z) + z*(z - x)*(z - y) >= 0"),
            "order",
        );
        leaves(
            &method,
            &[
                &format!("{three}: x^2*z + y^2*x + z^2*y >= x^2*y + y^2*z + z^2*x"),
                &format!("{three}: x^3 + y^3 + z^3 >= 3.001*x*y*z"),
                "for x in [0, 1], y in [0, 2]: x + y <= 2",
            ],
        );
    }
}
