//! The gamma function and its logarithmic derivatives in the search's algebra:
//! arguments are brought down by whole steps, as the kernel's normal form does.
//!
//! Source: NIST Digital Library of Mathematical Functions, 5.5.1, 5.5.2, 5.15.5.

use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive};

use crate::enclosure::Function;

use super::laurent::{Algebra, Poly};

/// Most steps by which an argument is shifted, as in the kernel.
const MAX_SHIFT: usize = 24;
/// Factorials up to this are written out.
const MAX_FACTORIAL: u32 = 20;

/// `f(a)` for `f` one of `gamma`, `lgamma`, `digamma` and `trigamma`.
pub fn shifted(algebra: &Algebra, f: Function, a: &Poly) -> Option<Poly> {
    let one = Poly::one();
    let (mut factor, mut sum, mut argument) = (Poly::one(), Poly::zero(), a.clone());
    let literal = |p: &Poly| p.terms().find(|(m, _)| m.is_one()).map(|(_, q)| q.clone());
    for _ in 0..MAX_SHIFT {
        let number = literal(&argument);
        let below = argument.minus(&one);
        let down = number.as_ref().is_some_and(|q| *q >= BigRational::one());
        let (x, up) = if down && (algebra.positive)(&below.to_term()) {
            (below.clone(), false)
        } else if number.is_some_and(|q| q.is_negative()) && (algebra.positive)(&argument.to_term()) {
            (argument.clone(), true)
        } else {
            break;
        };
        let power = |n: i64| algebra.power(&x, &BigRational::from_integer(n.into()));
        let mut part = match f {
            Function::Gamma => {
                factor = factor.times(&power(if up { -1 } else { 1 })?)?;
                Poly::zero()
            }
            Function::Lgamma => algebra.logarithm(&x)?,
            Function::Digamma => power(-1)?,
            _ => Poly::zero().minus(&power(-2)?),
        };
        if up {
            part.scale(&-BigRational::one());
        }
        sum = sum.plus(&part);
        argument = if up { argument.plus(&one) } else { below };
    }
    let value = match argument.as_number().filter(BigRational::is_integer).and_then(|q| q.to_u32()) {
        Some(n @ 1..=MAX_FACTORIAL) if f == Function::Gamma || f == Function::Lgamma => {
            let product = Poly::number((1..n).map(|k| BigRational::from_integer(k.into())).product());
            if f == Function::Gamma { product } else { algebra.logarithm(&product)? }
        }
        _ => algebra.poly_atom(crate::expression::Term::apply1(f, &argument.to_term())),
    };
    Some(factor.times(&value)?.plus(&sum))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::Term;

    #[test]
    fn steps_and_logarithms() {
        let x = Term::variable("x");
        let algebra = Algebra { positive: &|t| !matches!(t.as_number(), Some(q) if !q.is_positive()) };
        let call = |f, t: &Term| Term::apply1(f, t);
        let same = |a: Term, b: Term| {
            assert!(algebra.poly(&a.subtract(&b)).unwrap().is_zero(), "{a} {b}");
        };
        let next = x.add(&Term::integer(1));
        same(call(Function::Gamma, &next), x.multiply(&call(Function::Gamma, &x)));
        same(
            call(Function::Log, &call(Function::Gamma, &next)),
            call(Function::Log, &x).add(&call(Function::Lgamma, &x)),
        );
        same(call(Function::Digamma, &next), call(Function::Digamma, &x).add(&Term::integer(1).divide(&x)));
        same(
            call(Function::Trigamma, &next),
            call(Function::Trigamma, &x).subtract(&x.power(&Term::integer(-2))),
        );
        same(call(Function::Gamma, &Term::integer(5)), Term::integer(24));
        // Nothing is known about the sign of the argument: no step.
        let wary = Algebra { positive: &|_| false };
        let p = wary.poly(&call(Function::Gamma, &next).subtract(&x.multiply(&call(Function::Gamma, &x))));
        assert!(!p.unwrap().is_zero());
    }
}
