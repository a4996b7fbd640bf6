//! Strictness of a sum of terms that are not negative and do not vanish together: the
//! range of a variable is halved, and in each half some summand is plainly positive,
//! as in `0 < p*a + (1 - p)*b` for p in [0, 1].

use num_rational::BigRational;

use crate::expression::{End, Sort, Term};
use crate::search::engine::{Method, Search, Stuck};
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::proof::Proof;
use crate::statement::{Rel, Relation, Sequent};

/// The method.
pub struct Halves;

impl Method for Halves {
    fn name(&self) -> &'static str {
        "halves of a range"
    }

    fn attempt(&self, s: &Sequent, search: &mut Search) -> Result<Proof, Stuck> {
        let none = Stuck::NotApplicable("no strict inequality whose sides differ by plain signs");
        let Some(goal) = s.relation().map(Relation::turned).filter(|g| g.rel == Rel::Less) else {
            return Err(none);
        };
        let difference = goal.difference();
        search.spend(u64::from(difference.size()))?;
        if !is_plainly_non_negative(s, &difference) {
            return Err(none);
        }
        for (i, d) in s.variables.iter().enumerate() {
            let end = |e: &End| e.finite().and_then(Term::as_number).cloned();
            let (Some(a), Some(b)) = (end(&d.domain.lower), end(&d.domain.upper)) else { continue };
            if d.domain.sort != Sort::Real || a >= b || !difference.mentions(&d.name) {
                continue;
            }
            let middle = Term::number((a + b) / BigRational::from_integer(2.into()));
            let (mut below, mut above) = (s.clone(), s.clone());
            let low = &mut below.variables[i].domain;
            (low.upper, low.upper_open) = (End::Finite(middle.clone()), false);
            let high = &mut above.variables[i].domain;
            (high.lower, high.lower_open) = (End::Finite(middle.clone()), false);
            if is_plainly_positive(&below, &difference) && is_plainly_positive(&above, &difference) {
                let sign = || Proof::new("sign");
                return Ok(Proof::new("split").word(&d.name).with(middle).with(sign()).with(sign()));
            }
        }
        Err(Stuck::NotApplicable("no range whose halves help"))
    }
}

#[cfg(test)]
mod tests {
    use super::super::testing::{leaves, proves};
    use super::*;

    #[test]
    fn summands_that_do_not_vanish_together() {
        proves(
            &Halves,
            "for p in [0, 1], x in (-infinity, infinity): 0 < p*exp(x) + (1 - p)*exp(-x)",
            "split",
        );
        leaves(
            &Halves,
            &[
                "for p in [0, 1], x in (-infinity, infinity): 0 < p*exp(x) + p*(1 - p)*exp(-x)",
                "for p in [0, 2], x in (-infinity, infinity): 0 < p*exp(x) + (1 - p)*exp(-x)",
            ],
        );
    }
}
