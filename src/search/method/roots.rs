//! Polynomials in one variable by Sturm's theorem, touching included: the kernel
//! counts, the search only sees whether it should.

use crate::statement::{Rel, Sequent};

use super::super::algebraic::Algebraic;
use super::super::engine::{Method, Search, Stuck};
use super::super::proof::Proof;

/// The method.
pub struct Roots;

/// Higher degrees cost too much.
const MAX_DEGREE: usize = 100;

impl Method for Roots {
    fn name(&self) -> &'static str {
        "roots"
    }

    fn share(&self) -> u64 {
        10
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let goal = s.relation().ok_or(Stuck::NotApplicable("no relation"))?.turned();
        if goal.rel == Rel::Equal {
            return Err(Stuck::NotApplicable("an equation"));
        }
        search.spend(10)?;
        let form = Algebraic::of(s, &goal.difference()).ok_or(Stuck::NotApplicable("not a polynomial"))?;
        let [atom] = form.atoms.as_slice() else { return Err(Stuck::NotApplicable("not one variable")) };
        let name = atom.as_variable().ok_or(Stuck::NotApplicable("not a polynomial"))?;
        let degree = form.target.degree();
        if degree > MAX_DEGREE {
            return Err(Stuck::NotApplicable("of too high a degree"));
        }
        search.spend((degree * degree) as u64)?;
        search.accepted(s, Proof::new("roots").word(name))
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::Roots;

    #[test]
    fn touching_at_irrational_points() {
        proves(&Roots, "for x in (-infinity, infinity): x^4 + 4 >= 4*x^2", "roots");
        leaves(
            &Roots,
            &[
                "for x in (-infinity, infinity): x^4 + 4 > 4*x^2",
                "for x in (-infinity, infinity): x^4 + 4 >= 4.0001*x^2",
                "for x in [0, 1], y in [0, 1]: x >= x*y",
            ],
        );
    }
}
