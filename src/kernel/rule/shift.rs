//! `{shift x lo y hi ..}`
//!
//! Put `a + x` for each variable x named with `lo` (a its declared lower end) and
//! `b - x` for those named with `hi`, last declared first; the new x ranges over
//! `[0, inf)`, or `(0, inf)` if the end is open. Then every summand of the
//! numerator of `r - l`, multiplied out, is `>= 0` by shape and so is the
//! denominator; for a strict goal one summand is `> 0`.
//! Sound: every point of Gamma comes from a point of the new context, which has
//! no hypotheses and no far ends; a sum of terms `>= 0` is `>= 0`, and a
//! denominator is not zero where the goal is defined (R29, R10).
//! Forgotten: a variable whose range after the shift still dips below 0.

use super::Kernel;
use crate::kernel::normal::{Quotient, normal_in, product_term};
use crate::kernel::sequent::{Domain, End, Goal, Rel, Relation, Sequent, Sort};
use crate::kernel::sign::sign_of;
use crate::kernel::step::Fields;
use crate::kernel::term::{Name, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let goal = s.relation()?;
    let mut choices = Vec::new();
    while let Some(name) = fields.optional_word() {
        choices.push((name.clone(), &**fields.word()? == "lo"));
    }
    fields.end()?;
    let (inside, difference) = shifted(s, &goal, &choices)?;
    let q = normal_in(&inside, &difference)?;
    k.spend(q.numerator.len() as u64 * 100)?;
    if is_sum_of_signs(&inside, &q, goal.rel)? {
        return Ok(());
    }
    refuse(Reason::NotProved, format!("after the shift {} has summands without a sign", q.to_term()))
}

/// The shifted context and the difference of the goal in it.
fn shifted(s: &Sequent, goal: &Relation, choices: &[(Name, bool)]) -> Checked<(Sequent, Term)> {
    let mut difference = goal.difference();
    let mut inside = Sequent { variables: vec![], hypotheses: vec![], goal: Goal::Absurd };
    for (i, (name, _)) in choices.iter().enumerate() {
        if s.declaration(name).is_none() || choices[..i].iter().any(|(n, _)| n == name) {
            return refuse(Reason::Name, format!("`{name}` is not a variable to be shifted once"));
        }
    }
    for d in s.variables.iter().rev() {
        let Some((_, low)) = choices.iter().find(|(n, _)| *n == d.name) else {
            // Ends in variables that move are not ends any more.
            let keep = |e: &Option<End>| e.clone().filter(|e| e.term.free_variables().is_empty());
            let domain =
                Domain { sort: d.domain.sort, lower: keep(&d.domain.lower), upper: keep(&d.domain.upper) };
            inside.variables.insert(0, crate::kernel::sequent::Declaration { name: d.name.clone(), domain });
            continue;
        };
        let end = if *low { &d.domain.lower } else { &d.domain.upper };
        let Some(end) = end else {
            return refuse(Reason::Condition, format!("`{}` has no such end", d.name));
        };
        let x = Term::variable(&d.name);
        let value = if *low { end.term.add(&x) } else { end.term.subtract(&x) };
        difference = difference.substitute(&d.name, &value);
        let lower = Some(End { term: Term::zero(), open: end.open });
        let domain = Domain { sort: Sort::Real, lower, upper: None };
        inside.variables.insert(0, crate::kernel::sequent::Declaration { name: d.name.clone(), domain });
    }
    Ok((inside, difference))
}

fn is_sum_of_signs(inside: &Sequent, q: &Quotient, rel: Rel) -> Checked<bool> {
    let one = num_traits::One::one();
    if !sign_of(inside, &product_term(&one, &q.denominator)).is_non_negative() {
        return Ok(false);
    }
    let mut strict = false;
    for (m, c) in q.numerator.terms() {
        let sign = sign_of(inside, &product_term(c, m));
        if !sign.is_non_negative() {
            return Ok(false);
        }
        strict |= sign.is_positive();
    }
    match rel {
        Rel::Le => Ok(true),
        Rel::Lt => Ok(strict),
        _ => refuse(Reason::Condition, "the goal is no inequality"),
    }
}

#[cfg(test)]
mod tests {
    use crate::kernel::rule::testing::{accepted, rejected};

    #[test]
    fn shifts() {
        accepted("for all x : real in [2, inf): x^2 - x > 1", "{shift x lo}");
        accepted(
            "for all x : real in [0, inf), y : real in [x, inf), z : real in [y, inf): x^3 + y^3 + z^3 >= 3*x*y*z",
            "{shift x lo y lo z lo}",
        );
        accepted("for all x : real in [0, 1], y : real in [0, 1]: x*y >= x + y - 1", "{shift x hi y hi}");
        accepted(
            "for all x : real in (1, inf), p : real in [0, inf): x*exp(p)/(x - 1) >= exp(p)",
            "{shift x lo}",
        );
    }

    #[test]
    fn refused() {
        rejected("for all x : real in [-1, inf): x^2 - x >= -1/5", "{shift x lo}");
        rejected("for all x : real in [2, inf): x^2 - x > 2", "{shift x lo}");
        rejected("for all x : real in [0, 1], y : real in [0, x]: y <= x/2", "{shift x lo y lo}");
        // y is not moved, and its end moves away with x.
        rejected("for all x : real in [1, inf), y : real in [0, x - 1]: x - y >= 1", "{shift x lo}");
        rejected("for all x : real in (-inf, inf): x >= 0", "{shift x lo}");
    }
}
