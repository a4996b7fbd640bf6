//! The range of a term made of rational operations only, in exact arithmetic.
//!
//! Ends of such a range are often short decimals, which an enclosure of any
//! precision can only approach: rounded outward, 0.04 would become 0.04000001.

use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::Function;
use crate::expression::{End, Name, Node, Term};

/// Longest numerator or denominator on the way, in bits.
const MAX_BITS: u64 = 4096;

/// The least and the greatest value.
pub type Range = (BigRational, BigRational);

/// What the term ranges over, every operation taken by itself; nothing unless all
/// of them are rational, the ends rational and finite, and the term defined
/// everywhere.
pub fn range(term: &Term, ranges: &[(Name, End, End)]) -> Option<Range> {
    let of = |t: &Term| range(t, ranges);
    let (lo, hi) = match term.node() {
        Node::Number(value) => (value.clone(), value.clone()),
        Node::Variable(name) => {
            let (_, lower, upper) = ranges.iter().find(|(known, ..)| known == name)?;
            (lower.finite()?.rational_value()?, upper.finite()?.rational_value()?)
        }
        Node::Negate(a) => of(a).map(|(lo, hi)| (-hi, -lo))?,
        Node::Add(a, b) => {
            let ((a, b), (c, d)) = (of(a)?, of(b)?);
            (a + c, b + d)
        }
        Node::Subtract(a, b) => {
            let ((a, b), (c, d)) = (of(a)?, of(b)?);
            (a - d, b - c)
        }
        Node::Multiply(a, b) => product(&of(a)?, &of(b)?)?,
        Node::Divide(a, b) => product(&of(a)?, &reciprocal(of(b)?)?)?,
        Node::Power(base, exponent) => power(of(base)?, i32::try_from(whole(&of(exponent)?)?).ok()?)?,
        Node::Apply(function, arguments) => {
            let arguments = arguments.iter().map(of).collect::<Option<Vec<Range>>>()?;
            apply(*function, arguments)?
        }
        _ => return None,
    };
    let short = |q: &BigRational| q.numer().bits().max(q.denom().bits()) <= MAX_BITS;
    (lo <= hi && short(&lo) && short(&hi)).then_some((lo, hi))
}

fn product((a, b): &Range, (c, d): &Range) -> Option<Range> {
    let corners = [a * c, a * d, b * c, b * d];
    Some((corners.iter().min()?.clone(), corners.iter().max()?.clone()))
}

fn reciprocal((lo, hi): Range) -> Option<Range> {
    (lo.is_positive() || hi.is_negative()).then(|| (hi.recip(), lo.recip()))
}

/// The integer that a range consists of.
fn whole((lo, hi): &Range) -> Option<i64> {
    (lo == hi && lo.is_integer()).then(|| i64::try_from(lo.numer()).ok())?
}

fn power(base: Range, n: i32) -> Option<Range> {
    let (lo, hi) = if n < 0 { reciprocal(base)? } else { base };
    let n = n.checked_abs()?;
    let bits = [&lo, &hi].map(|q| q.numer().bits().max(q.denom().bits()));
    if bits.iter().any(|bits| bits.saturating_mul(u64::from(n.unsigned_abs())) > MAX_BITS) {
        return None;
    }
    let straddles = !lo.is_positive() && !hi.is_negative();
    if n == 0 {
        // 0^0 is undefined.
        return (!straddles).then(|| (BigRational::one(), BigRational::one()));
    }
    let (from, to) = (lo.pow(n), hi.pow(n));
    Some(match n % 2 == 0 {
        true if straddles => (BigRational::zero(), from.max(to)),
        true if hi.is_negative() => (to, from),
        _ => (from, to),
    })
}

fn apply(function: Function, arguments: Vec<Range>) -> Option<Range> {
    let mut arguments = arguments.into_iter();
    let (lo, hi) = arguments.next()?;
    Some(match function {
        Function::Abs if lo.is_negative() && hi.is_positive() => (BigRational::zero(), hi.max(-lo)),
        Function::Abs => (lo.abs().min(hi.abs()), lo.abs().max(hi.abs())),
        Function::Min => arguments.fold((lo, hi), |(a, b), (c, d)| (a.min(c), b.min(d))),
        Function::Max => arguments.fold((lo, hi), |(a, b), (c, d)| (a.max(c), b.max(d))),
        Function::Floor => (lo.floor(), hi.floor()),
        Function::Ceil => (lo.ceil(), hi.ceil()),
        Function::Sqrt => (root(&lo)?, root(&hi)?),
        _ => return None,
    })
}

/// The square root, if it is rational.
fn root(q: &BigRational) -> Option<BigRational> {
    if q.is_negative() {
        return None;
    }
    let root = BigRational::new(q.numer().sqrt(), q.denom().sqrt());
    (&root * &root == *q).then_some(root)
}

#[cfg(test)]
mod tests {
    use super::super::request::{read, split_range};
    use super::*;

    fn found(expression: &str, boxed: &[&str]) -> Option<String> {
        let boxed: Vec<_> = boxed.iter().map(|text| split_range(text).unwrap()).collect();
        let question = read(expression, &boxed).unwrap();
        range(&question.term, &question.ranges).map(|(lo, hi)| format!("{lo} {hi}"))
    }

    #[test]
    fn ranges_are_exact() {
        for (expression, boxed, expected) in [
            ("x^2", "x=[-0.1, 0.2]", "0 1/25"),
            ("x^2", "x=[-3, -2]", "4 9"),
            ("x^3", "x=[-2, 1]", "-8 1"),
            ("x^(-2)", "x=[2, 4]", "1/16 1/4"),
            ("-x*(x - 1)", "x=[0, 1]", "0 1"),
            ("1/x", "x=[-4, -2]", "-1/2 -1/4"),
            ("abs(x)", "x=[-2, 1]", "0 2"),
            ("floor(3*x) + ceil(x)", "x=[1/3, 1]", "2 4"),
            ("max(x, 1/2) - min(x, 2, 0)", "x=[0, 1]", "1/2 1"),
            ("sqrt(x)", "x=[0.01, 0.04]", "1/10 1/5"),
        ] {
            assert_eq!(found(expression, &[boxed]).as_deref(), Some(expected), "{expression} {boxed}");
        }
    }

    #[test]
    fn anything_else_is_left_to_enclosures() {
        for (expression, boxed) in [
            ("1/x", "x=[0, 1]"),
            ("x^(-1)", "x=[-1, 1]"),
            ("x^0", "x=[0, 1]"),
            ("sqrt(x)", "x=[-1, 4]"),
            ("sqrt(x)", "x=[1, 2]"),
            ("exp(x)", "x=[0, 1]"),
            ("x^(1/2)", "x=[1, 4]"),
            ("x", "x=[0, inf]"),
            ("x", "x=[1, 0]"),
            ("x^100000", "x=[2, 3]"),
        ] {
            assert_eq!(found(expression, &[boxed]), None, "{expression} {boxed}");
        }
    }
}
