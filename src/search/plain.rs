//! Signs that are plain from the shape of a term, so that the kernel sees them too.

use num_rational::BigRational;
use num_traits::{Signed, Zero};

use crate::enclosure::Function;
use crate::expression::{Constant, End, Node, Term};
use crate::statement::Sequent;

use super::laurent::Algebra;

/// Whether a term is positive by its shape alone.
#[must_use]
pub fn is_plainly_positive(s: &Sequent, term: &Term) -> bool {
    match term.node() {
        Node::Number(q) => q.is_positive(),
        Node::Constant(_) => true,
        Node::Variable(name) => s.declaration(name).is_some_and(|d| {
            let end = d.domain.lower.finite().and_then(Term::as_number);
            end.is_some_and(|q| q.is_positive() || (q.is_zero() && d.domain.lower_open))
        }),
        Node::Add(a, b) => {
            (is_plainly_positive(s, a) && is_plainly_non_negative(s, b))
                || (is_plainly_non_negative(s, a) && is_plainly_positive(s, b))
        }
        Node::Subtract(a, b) => {
            let (Some(q), Some(d)) = (a.as_number(), b.as_variable().and_then(|x| s.declaration(x))) else {
                return false;
            };
            let end = d.domain.upper.finite().and_then(Term::as_number);
            end.is_some_and(|e| e < q || (e == q && d.domain.upper_open))
        }
        Node::Multiply(a, b) | Node::Divide(a, b) => is_plainly_positive(s, a) && is_plainly_positive(s, b),
        Node::Power(a, _) => is_plainly_positive(s, a),
        Node::Apply(Function::Exp | Function::Cosh, _) => true,
        Node::Apply(Function::Sqrt, args) => is_plainly_positive(s, &args[0]),
        Node::Apply(Function::Sin, args) => within_arch(s, &args[0], 0),
        Node::Apply(Function::Cos, args) => within_arch(s, &args[0], 1),
        Node::Apply(Function::Log, args) => {
            args[0].as_number().is_some_and(|q| *q > BigRational::from_integer(1.into()))
        }
        _ => false,
    }
}

/// Whether a term is not negative by its shape alone.
#[must_use]
pub fn is_plainly_non_negative(s: &Sequent, term: &Term) -> bool {
    let even = |p: &Term| p.as_integer().is_some_and(|n| !num_integer::Integer::is_odd(n) && n.is_positive());
    match term.node() {
        Node::Number(q) => !q.is_negative(),
        Node::Variable(name) => s.declaration(name).is_some_and(|d| {
            d.domain.lower.finite().and_then(Term::as_number).is_some_and(|q| !q.is_negative())
        }),
        Node::Add(a, b) | Node::Multiply(a, b) => {
            is_plainly_non_negative(s, a) && is_plainly_non_negative(s, b)
        }
        Node::Divide(a, b) => is_plainly_non_negative(s, a) && is_plainly_positive(s, b),
        Node::Power(_, p) if even(p) => true,
        Node::Power(a, p) if p.as_number().is_some_and(Signed::is_positive) => is_plainly_non_negative(s, a),
        Node::Apply(Function::Sqrt | Function::Abs, _) => true,
        _ => is_plainly_positive(s, term),
    }
}

/// Whether `a` stays strictly within the first arch of the sine (`shift` 0) or of the
/// cosine (`shift` 1), as the kernel sees it for multiples of one variable.
fn within_arch(s: &Sequent, a: &Term, shift: i64) -> bool {
    let pi = Term::constant(Constant::Pi);
    // The variable and its factor in half turns, the factor of pi apart.
    let (x, turns) = match a.node() {
        Node::Variable(x) => (x, false),
        Node::Multiply(p, x) if *p == pi => match x.node() {
            Node::Variable(x) => (x, true),
            _ => return false,
        },
        _ => return false,
    };
    let Some(d) = s.declaration(x) else { return false };
    let algebra = Algebra { positive: &|_| true };
    let end = |e: &End| {
        let e = e.finite()?;
        if e.is_zero() {
            return Some(BigRational::zero());
        }
        let value = if turns { e.clone() } else { e.divide(&pi) };
        algebra.poly(&value)?.as_number()
    };
    let half = BigRational::new(shift.into(), 2.into());
    let (Some(low), Some(high)) = (end(&d.domain.lower), end(&d.domain.upper)) else { return false };
    let (low, high) = (low + &half, high + &half);
    let one = BigRational::from_integer(1.into());
    (low.is_positive() || (low.is_zero() && d.domain.lower_open))
        && (high < one || (high == one && d.domain.upper_open))
}
