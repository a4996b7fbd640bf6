//! Truth of closed relations, as the kernel will see it: rational parts exactly,
//! the rest by enclosures of rising precision, equality by simplification.

use crate::enclosure::BigInterval;
use crate::expression::evaluate::at;
use crate::expression::{Name, Sort, Sorts, Substitution, Term, simplify};
use crate::statement::{Rel, Relation, Sequent};

/// Closed terms have no variables, hence no sorts.
struct NoVariables;

impl Sorts for NoVariables {
    fn of_variable(&self, _: &Name) -> Sort {
        Sort::Real
    }

    fn is_non_negative(&self, _: &Name) -> bool {
        false
    }
}

/// An enclosure of a closed term; nothing if it is not seen to be defined.
#[must_use]
pub fn enclose(term: &Term, bits: u32) -> Option<BigInterval> {
    at(term, &[], &[], &NoVariables, bits)
}

/// Whether a closed relation is true; nothing if that is not seen at this precision.
#[must_use]
pub fn truth(relation: &Relation, bits: u32) -> Option<bool> {
    let r = relation.turned();
    if let (Some(a), Some(b)) = (r.left.rational_value(), r.right.rational_value()) {
        return Some(match r.rel {
            Rel::LessEqual => a <= b,
            Rel::Less => a < b,
            Rel::Equal => a == b,
            _ => a != b,
        });
    }
    let mut precision = 64;
    loop {
        let gap = enclose(&r.right, precision)?.minus(&enclose(&r.left, precision)?);
        let (positive, negative) = (gap.is_certainly_positive(), gap.is_certainly_negative());
        if positive || negative {
            return Some(match r.rel {
                Rel::LessEqual | Rel::Less => positive,
                Rel::Equal => false,
                _ => true,
            });
        }
        if gap.is_point() || precision >= bits {
            break;
        }
        precision = (precision * 2).min(bits);
    }
    // A gap of exactly 0 arises where both enclosures are the same exact number.
    let exactly = |t: &Term| enclose(t, 64).filter(|v| v.is_point());
    if let (Some(a), Some(b)) = (exactly(&r.left), exactly(&r.right))
        && a == b
    {
        return Some(matches!(r.rel, Rel::LessEqual | Rel::Equal));
    }
    let same = r.left == r.right || simplify(&r.right.subtract(&r.left)).is_zero();
    same.then_some(matches!(r.rel, Rel::LessEqual | Rel::Equal))
}

/// Whether a point of closed terms, one a variable, is seen to lie in the context:
/// of the sort, in the domain, and satisfying every hypothesis.
#[must_use]
pub fn is_inside(s: &Sequent, point: &[Term], bits: u32) -> bool {
    let put = placed(s, point);
    let sorted = s.variables.iter().zip(point).all(|(d, t)| match (d.domain.sort, t.as_number()) {
        (Sort::Real, _) => true,
        (Sort::Integer, Some(q)) => q.is_integer(),
        (Sort::Even, Some(q)) => q.is_integer() && num_integer::Integer::is_even(q.numer()),
        _ => false,
    });
    let ends = s.variables.iter().flat_map(|d| d.ends());
    sorted && ends.chain(s.hypotheses.iter().cloned()).all(|r| truth(&r.under(&put), bits) == Some(true))
}

/// Whether the goal is seen to be false at a point of the context.
#[must_use]
pub fn is_refuted(s: &Sequent, point: &[Term], bits: u32) -> bool {
    let Some(goal) = s.relation() else { return false };
    truth(&goal.under(&placed(s, point)), bits) == Some(false) && is_inside(s, point, bits)
}

/// The substitution of a point.
#[must_use]
pub fn placed(s: &Sequent, point: &[Term]) -> Substitution {
    s.variables.iter().map(|d| d.name.clone()).zip(point.iter().cloned()).collect()
}
