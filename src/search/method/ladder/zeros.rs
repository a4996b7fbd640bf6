//! Where two sides touch inside the domain: a sampled minimum near 0, refined and
//! read as an exact number, verified by algebra.

use std::cmp::Ordering;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use crate::enclosure::{BigInterval, Bits, Function};
use crate::expression::evaluate::at;
use crate::expression::{Constant, Term, differentiate};
use crate::search::laurent::Algebra;
use crate::search::plain::is_plainly_positive;

use super::line::Line;

const BITS: u32 = 320;

/// An exact inner zero of a term that is `>= 0` along the line of a sequent in one variable.
#[must_use]
pub fn inner_zero(line: &Line, term: &Term) -> Option<Term> {
    if line.inside.variables.len() != 1 {
        return None;
    }
    let slope = differentiate(term, &line.x).ok()?;
    let values = line.values(&slope)?;
    let signs: Vec<i32> = values
        .iter()
        .map(|(_, v)| i32::from(v.is_certainly_positive()) - i32::from(v.is_certainly_negative()))
        .collect();
    for i in 1..values.len() {
        // A sample may hit the zero itself.
        let c = match (signs[i - 1], signs[i], signs.get(i + 1)) {
            (-1, 0, Some(1)) => values[i].0.clone(),
            (-1, 1, _) => match root(line, &slope, &values[i - 1].0, &values[i].0) {
                Some(c) => c,
                None => continue,
            },
            _ => continue,
        };
        let names = [line.x.clone()];
        let value = at(term, &names, std::slice::from_ref(&c), &line.inside, BITS)?;
        let small = value.magnitude().to_f64(crate::enclosure::Toward::Up) < 1e-50;
        if !small {
            continue;
        }
        let algebra = Algebra { positive: &|a| is_plainly_positive(&line.inside, a) };
        for reading in readings(&c) {
            let inside = line.sign_at_ends(&reading);
            if inside && algebra.poly(&term.with(&line.x, &reading)).is_some_and(|p| p.is_zero()) {
                return Some(reading);
            }
        }
    }
    None
}

/// A root between two points of opposite signs, by bisection.
fn root(line: &Line, term: &Term, x: &BigInterval, y: &BigInterval) -> Option<BigInterval> {
    let names = [line.x.clone()];
    let half = BigInterval::from_rational(&BigRational::new(1.into(), 2.into()), Bits::new(BITS));
    let (mut x, mut y) = (x.clone(), y.clone());
    for _ in 0..220 {
        let middle = BigInterval::point(x.plus(&y).times(&half).midpoint()?);
        let v = at(term, &names, std::slice::from_ref(&middle), &line.inside, BITS)?;
        if v.is_certainly_negative() {
            x = middle;
        } else if v.is_certainly_positive() {
            y = middle;
        } else {
            return Some(middle);
        }
    }
    Some(BigInterval::point(x.plus(&y).times(&half).midpoint()?))
}

/// Exact numbers near a value: rationals, and multiples, powers and roots that
/// hand-derived bounds are likely to have.
fn readings(c: &BigInterval) -> Vec<Term> {
    let bits = Bits::new(BITS);
    let mut list = Vec::new();
    let mut see = |value: Option<BigInterval>, back: &dyn Fn(Term) -> Term| {
        if let Some(q) = value.and_then(|v| simple(&v)) {
            list.push(back(Term::number(q)));
        }
    };
    see(Some(c.clone()), &|q| q);
    let pi = BigInterval::pi(bits);
    let mut defined = crate::enclosure::Definedness::Continuous;
    see(Some(c.over(&pi, &mut defined)), &|q| q.multiply(&Term::constant(Constant::Pi)));
    if c.is_certainly_positive() {
        let log = BigInterval::apply(Function::Log, std::slice::from_ref(c), &mut defined);
        see(Some(log), &|q| Term::apply1(Function::Exp, &q));
    }
    let exp = BigInterval::apply(Function::Exp, std::slice::from_ref(c), &mut defined);
    if exp.is_bounded() && c.to_interval().magnitude() < 50.0 {
        see(Some(exp), &|q| Term::apply1(Function::Log, &q));
    }
    see(Some(c.times(c)), &|q| {
        let root = Term::apply1(Function::Sqrt, &q);
        if c.is_certainly_negative() { root.negate() } else { root }
    });
    list
}

/// The rational of small height that an interval is around, if there is one.
fn simple(v: &BigInterval) -> Option<BigRational> {
    let mid = v.midpoint()?;
    let f = mid.to_f64(crate::enclosure::Toward::Down);
    if !f.is_finite() || f.abs() > 1e6 {
        return None;
    }
    // Continued fraction of the f64 value, checked against the wide one.
    let (mut x, mut h, mut k) = (f, (BigInt::one(), BigInt::zero()), (BigInt::zero(), BigInt::one()));
    for _ in 0..20 {
        let a = BigInt::from(x.floor().to_i64()?);
        h = (&a * &h.0 + &h.1, h.0);
        k = (&a * &k.0 + &k.1, k.0);
        if h.0.abs() > BigInt::from(1_000_000) || k.0 > BigInt::from(100_000) {
            return None;
        }
        let q = BigRational::new(h.0.clone(), k.0.clone());
        let gap = v.minus(&BigInterval::from_rational(&q, Bits::new(BITS)));
        if gap.magnitude().to_f64(crate::enclosure::Toward::Up) < 1e-40 {
            return Some(q);
        }
        let rest = x - x.floor();
        if rest < 1e-12 {
            return None;
        }
        x = 1.0 / rest;
    }
    None
}

impl Line {
    /// Whether a closed term lies strictly between the ends.
    fn sign_at_ends(&self, c: &Term) -> bool {
        let domain = &self.declared.domain;
        let above =
            domain.lower.finite().is_none_or(|a| self.sign(&c.subtract(a)) == Some(Ordering::Greater));
        let below =
            domain.upper.finite().is_none_or(|b| self.sign(&b.subtract(c)) == Some(Ordering::Greater));
        above && below
    }
}
