//! What becomes of a term when an integer goes on by one, by the recurrences of gamma
//! and its kin and by splitting off the last terms of sums.
//!
//! Source: Abramowitz and Stegun, Handbook of Mathematical Functions, 6.1.15, 6.3.5.

use num_bigint::BigInt;
use num_traits::ToPrimitive;

use crate::enclosure::Function;
use crate::expression::{Constant, End, Name, Node, SeriesKind, Term, simplify};
use crate::search::laurent::Algebra;

/// Most steps of an argument at once.
const MOST_STEPS: i64 = 6;

/// The term with gamma for factorials and binomial coefficients, outside of series.
pub fn by_gamma(t: &Term) -> Term {
    let gamma = |a: Term| Term::apply1(Function::Gamma, &simplify(&a));
    let one = Term::integer(1);
    match t.node() {
        Node::Apply(Function::Factorial, args) if args[0].as_number().is_none() => {
            gamma(by_gamma(&args[0]).add(&one))
        }
        Node::Apply(Function::Binomial, args) if t.free_variables().iter().next().is_some() => {
            let (n, k) = (&args[0], &args[1]);
            let below = gamma(k.add(&one)).multiply(&gamma(n.subtract(k).add(&one)));
            gamma(n.add(&one)).divide(&below)
        }
        Node::Series { .. } => t.clone(),
        _ => t.map_children(&mut by_gamma),
    }
}

/// The logarithm of a product of powers, taken apart.
pub fn logarithm(t: &Term) -> Term {
    match t.node() {
        Node::Number(q) if q.is_integer() && t.is_one() => Term::integer(0),
        Node::Constant(Constant::E) => Term::integer(1),
        Node::Multiply(a, b) => logarithm(a).add(&logarithm(b)),
        Node::Divide(a, b) => logarithm(a).subtract(&logarithm(b)),
        Node::Power(b, p) => p.multiply(&logarithm(b)),
        Node::Apply(Function::Exp, args) => args[0].clone(),
        Node::Apply(Function::Sqrt, args) => Term::ratio(1, 2).multiply(&logarithm(&args[0])),
        Node::Apply(Function::Gamma, args) => Term::apply1(Function::Lgamma, &args[0]),
        _ => Term::apply1(Function::Log, t),
    }
}

/// By how many steps a term moves when `n` does one.
pub fn moves(t: &Term, n: &Name) -> Option<i64> {
    let next = t.with(n, &Term::variable(n.clone()).add(&Term::integer(1)));
    let algebra = Algebra { positive: &|_| false };
    let steps = algebra.poly(&next.subtract(t))?.as_number()?;
    let steps = if steps.is_integer() { steps.to_integer().to_i64()? } else { return None };
    (steps.abs() <= MOST_STEPS).then_some(steps)
}

/// Whether a term without variables is 0 by exact values of factorials alone.
pub fn is_exactly_zero(t: &Term) -> bool {
    Algebra { positive: &|_| true }.poly(&valued(t)).is_some_and(|p| p.is_zero())
}

/// With numbers for factorials, binomial coefficients and gamma functions of small integers.
fn valued(t: &Term) -> Term {
    let whole = |a: &Term| {
        let q = a.rational_value()?;
        if q.is_integer() { q.to_integer().to_i64().filter(|m| (0..=60).contains(m)) } else { None }
    };
    let factorial = |m: i64| Term::integer((1..=m).fold(BigInt::from(1), |product, k| product * k));
    let inner = t.map_children(&mut valued);
    match inner.node() {
        Node::Apply(Function::Factorial, args) => whole(&args[0]).map(factorial),
        Node::Apply(Function::Gamma, args) => whole(&args[0]).filter(|m| *m > 0).map(|m| factorial(m - 1)),
        Node::Apply(Function::Lgamma, args) => {
            whole(&args[0]).filter(|m| *m > 0).map(|m| Term::apply1(Function::Log, &factorial(m - 1)))
        }
        _ => None,
    }
    .unwrap_or(inner)
}

/// The term at `n + 1` in terms of functions and sums at `n`; nothing if a sum changes
/// in another way than by its last terms.
pub fn advance(t: &Term, n: &Name) -> Option<Term> {
    if !t.mentions(n) {
        return Some(t.clone());
    }
    match t.node() {
        Node::Apply(f @ (Function::Gamma | Function::Lgamma | Function::Digamma), args)
            if let Some(steps) = moves(&args[0], n) =>
        {
            let mut value = t.clone();
            for i in 0..steps.abs() {
                let up = steps > 0;
                let at = simplify(&args[0].add(&Term::integer(if up { i } else { -i - 1 })));
                value = one_step(*f, &value, &at, up);
            }
            Some(value)
        }
        Node::Series { kind: SeriesKind::Sum, index, lower, upper: End::Finite(b), body } => {
            if body.mentions(n) || lower.finite().is_some_and(|a| a.mentions(n)) {
                return None;
            }
            let steps = moves(b, n).filter(|m| *m >= 0)?;
            let mut value = t.clone();
            for i in 1..=steps {
                value = value.add(&body.with(index, &simplify(&b.add(&Term::integer(i)))));
            }
            Some(value)
        }
        Node::Series { .. } => None,
        Node::Variable(_) => Some(t.add(&Term::integer(1))),
        _ => {
            let mut known = true;
            let new = t.map_children(&mut |c| {
                advance(c, n).unwrap_or_else(|| {
                    known = false;
                    c.clone()
                })
            });
            known.then_some(new)
        }
    }
}

/// From the value at an argument to that at the next (`up`: from `at` to `at + 1`;
/// otherwise from `at + 1` to `at`).
fn one_step(f: Function, value: &Term, at: &Term, up: bool) -> Term {
    let part = match f {
        Function::Gamma => return if up { value.multiply(at) } else { value.divide(at) },
        Function::Lgamma => Term::apply1(Function::Log, at),
        _ => Term::integer(1).divide(at),
    };
    if up { value.add(&part) } else { value.subtract(&part) }
}

/// The sums of a term that change with `n`.
pub fn moving_sums(t: &Term, n: &Name) -> Vec<Term> {
    let mut found: Vec<Term> = Vec::new();
    t.walk(&mut |part| {
        if matches!(part.node(), Node::Series { .. }) {
            if part.mentions(n) && !found.contains(part) {
                found.push(part.clone());
            }
            return false;
        }
        true
    });
    found
}

/// The factor of a part in a term that is linear in it.
pub fn factor(t: &Term, part: &Term) -> Option<Term> {
    let at = |value: i64| t.replace(part, &Term::integer(value));
    let factor = simplify(&at(1).subtract(&at(0)));
    let again = simplify(&at(2).subtract(&at(1)));
    (again == factor).then_some(factor)
}

/// A sum with a name among special functions: law, its argument, and the value.
pub fn special_sum(t: &Term) -> Option<(&'static str, Term, Term)> {
    let Node::Series { kind: SeriesKind::Sum, index, lower: End::Finite(a), upper: End::Finite(b), body } =
        t.node()
    else {
        return None;
    };
    if !a.is_one() {
        return None;
    }
    let k = Term::variable(index.clone());
    let one = Term::integer(1);
    let at = |f: Function| Term::apply1(f, &simplify(&b.add(&one)));
    let (law, value) = if *body == one.divide(&k) {
        ("sum-reciprocals", at(Function::Digamma).add(&Term::constant(Constant::Euler)))
    } else if *body == Term::apply1(Function::Log, &k) {
        ("sum-logarithms", at(Function::Lgamma))
    } else {
        return None;
    };
    Some((law, b.clone(), value))
}
