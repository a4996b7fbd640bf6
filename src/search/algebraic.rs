//! A term as a polynomial in atoms with the equations that hold among them: roots
//! are variables w with `w^n = g`, absolute values with `a^2 = g^2`, cosines with
//! `c^2 = 1 - s^2`. The kernel's normal form knows the same equations.

use std::collections::BTreeMap;

use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive};

use crate::enclosure::{Function, Interval};
use crate::expression::tape::{Jets, Order, Tape};
use crate::expression::{Name, Node, Term};
use crate::statement::{Rel, Sequent};

use super::laurent::{Algebra, Exponent, Monomial, Poly};
use super::plain::{is_plainly_non_negative, is_plainly_positive};
use super::polynomial::{Polynomial, Rewrite};

/// More atoms are not handled.
const MAX_ATOMS: usize = 8;

/// A term seen as a polynomial.
pub struct Algebraic<'a> {
    s: &'a Sequent,
    /// The atoms, as terms.
    pub atoms: Vec<Term>,
    /// What each atom is the root of, and its order.
    roots: Vec<(Term, i64)>,
    /// The equations.
    pub rules: Vec<Rewrite>,
    /// The polynomial.
    pub target: Polynomial,
    /// `target = factor * term`, where the factor is meant to be positive.
    pub factor: Term,
    /// Whether the factor is positive by its shape.
    pub factor_is_plain: bool,
}

impl<'a> Algebraic<'a> {
    /// The term at the points of the sequent; nothing if it is not algebraic enough.
    #[must_use]
    pub fn of(s: &'a Sequent, term: &Term) -> Option<Algebraic<'a>> {
        let positive =
            |a: &Term| is_plainly_positive(s, a) || (is_plainly_non_negative(s, a) && !has_log(term));
        let algebra = Algebra { positive: &positive };
        let (mut numerator, front) = algebra.poly(term)?.cleared()?;
        let mut factor = Monomial::one();
        let mut factor_is_plain = true;
        for (a, e) in front.factors() {
            let power = Monomial::atom(a.clone(), *e);
            if is_plainly_positive(s, a) {
                factor = factor.times(&power);
            } else if e.is_positive() {
                numerator = numerator.shifted(&power);
            } else if e.is_integer() && e.numer().is_odd() && !is_plainly_non_negative(s, a) {
                // The square of the denominator has a sign.
                let odd = Monomial::atom(a.clone(), Exponent::from_integer(1));
                let own =
                    if is_sum(a) { algebra.poly(a)? } else { Poly::single(BigRational::one(), odd.clone()) };
                numerator = numerator.times(&own)?;
                factor = factor.times(&power).times(&odd.raised(&-Exponent::from_integer(1)));
                factor_is_plain = false;
            } else {
                factor = factor.times(&power);
                factor_is_plain = false;
            }
        }
        let mut found = Algebraic {
            s,
            atoms: Vec::new(),
            roots: Vec::new(),
            rules: Vec::new(),
            target: Polynomial::default(),
            factor: factor.raised(&-Exponent::from_integer(1)).to_term(&BigRational::one()),
            factor_is_plain,
        };
        found.name_atoms(&numerator, &algebra)?;
        found.target = found.converted(&numerator)?.reduced(&found.rules)?;
        Some(found)
    }

    /// Another term as a polynomial in the same atoms.
    #[must_use]
    pub fn polynomial(&self, term: &Term) -> Option<Polynomial> {
        let positive = |a: &Term| is_plainly_non_negative(self.s, a);
        let (numerator, front) = Algebra { positive: &positive }.poly(term)?.cleared()?;
        let whole = |(_, e): &(Term, Exponent)| e.is_positive();
        if !front.factors().iter().all(whole) {
            return None;
        }
        self.converted(&numerator.shifted(&front))?.reduced(&self.rules)
    }

    /// A polynomial as a term.
    #[must_use]
    pub fn term(&self, p: &Polynomial) -> Term {
        let mut sum: Option<Term> = None;
        let (plus, minus): (Vec<_>, Vec<_>) = p.terms().rev().partition(|(_, q)| q.is_positive());
        for (powers, q) in plus.into_iter().chain(minus) {
            let product = self.product(powers, &q.abs());
            sum = Some(match sum {
                None if q.is_negative() => product.negate(),
                None => product,
                Some(s) if q.is_negative() => s.subtract(&product),
                Some(s) => s.add(&product),
            });
        }
        sum.unwrap_or_else(|| Term::integer(0))
    }

    /// A monomial with a positive coefficient as a term.
    #[must_use]
    pub fn product(&self, powers: &[u16], q: &BigRational) -> Term {
        let mut factors = Vec::new();
        for (atom, e) in self.atoms.iter().zip(powers).filter(|(_, e)| **e > 0) {
            factors.push(if *e == 1 { atom.clone() } else { atom.power(&Term::integer(i64::from(*e))) });
        }
        if !q.numer().is_one() || factors.is_empty() {
            factors.insert(0, Term::integer(q.numer().clone()));
        }
        let top = factors.into_iter().reduce(|a, b| a.multiply(&b)).unwrap_or_else(|| Term::integer(1));
        if q.denom().is_one() { top } else { top.divide(&Term::integer(q.denom().clone())) }
    }

    /// Whether an atom is positive (`Some(true)`) or not negative by its shape.
    #[must_use]
    pub fn sign(&self, atom: usize) -> Option<bool> {
        let t = &self.atoms[atom];
        if is_plainly_positive(self.s, t) {
            return Some(true);
        }
        (self.roots[atom].1 > 1 || is_plainly_non_negative(self.s, t)).then_some(false)
    }

    fn name_atoms(&mut self, p: &Poly, algebra: &Algebra) -> Option<()> {
        // Atoms with the common denominator of their exponents; those under roots too.
        let mut orders: BTreeMap<Term, i64> = BTreeMap::new();
        let mut waiting = vec![p.clone()];
        while let Some(p) = waiting.pop() {
            for (a, e) in p.terms().flat_map(|(m, _)| m.factors()) {
                let order = e.denom().to_i64()?;
                let is_new = !orders.contains_key(a);
                let entry = orders.entry(a.clone()).or_insert(1);
                let had_rule = *entry > 1;
                *entry = entry.lcm(&order);
                if *entry > 12 || orders.len() > MAX_ATOMS {
                    return None;
                }
                let base = inside(a, orders[a]);
                if let Some(base) = base
                    && (is_new || !had_rule)
                {
                    waiting.push(algebra.poly(&base)?);
                }
            }
        }
        for (a, order) in &orders {
            let atom = match order {
                1 => a.clone(),
                2 => Term::apply1(Function::Sqrt, a),
                n => a.power(&Term::ratio(1, *n)),
            };
            self.atoms.push(atom);
            self.roots.push((a.clone(), *order));
        }
        for (i, (a, order)) in self.roots.clone().iter().enumerate() {
            if let Some(base) = inside(a, *order) {
                let by = self.converted(&algebra.poly(&base)?)?;
                let power = if *order > 1 { u16::try_from(*order).ok()? } else { 2 };
                let by = if *order > 1 { by } else { by.times(&by)? };
                self.rules.push(Rewrite { variable: i, power, by });
            } else if let Node::Apply(Function::Cos, args) = a.node() {
                let sine = Term::apply1(Function::Sin, &args[0]);
                if let Some(j) = self.roots.iter().position(|(t, n)| *t == sine && *n == 1) {
                    let n = self.atoms.len();
                    let s = Polynomial::variable(j, n);
                    let by = Polynomial::number(BigRational::one(), n)
                        .plus(&s.times(&s)?.scaled(&-BigRational::one()));
                    self.rules.push(Rewrite { variable: i, power: 2, by });
                }
            }
        }
        Some(())
    }

    fn converted(&self, p: &Poly) -> Option<Polynomial> {
        let mut sum = Polynomial::default();
        for (m, q) in p.terms() {
            let mut powers = vec![0u16; self.atoms.len()];
            for (a, e) in m.factors() {
                let i = self.roots.iter().position(|(t, _)| t == a)?;
                let e = e * Exponent::from_integer(self.roots[i].1);
                if !e.is_integer() {
                    return None;
                }
                powers[i] = e.to_integer().to_u16().filter(|e| *e <= 200)?;
            }
            sum.add(powers, q.clone());
        }
        Some(sum)
    }

    /// The values of the atoms at points in general position of the domain, at most `most`.
    #[must_use]
    pub fn points(&self, most: usize) -> Vec<Vec<f64>> {
        self.sampled(most).unwrap_or_default()
    }

    fn sampled(&self, most: usize) -> Option<Vec<Vec<f64>>> {
        let s = self.s;
        let names: Vec<Name> = s.variables.iter().map(|d| d.name.clone()).collect();
        let mut ends = Vec::new();
        for (i, d) in s.variables.iter().enumerate() {
            let tape = |end: &crate::expression::End| match end.finite() {
                None => Some(None),
                Some(t) => Some(Some(Tape::<f64>::new(std::slice::from_ref(t), &names[..i], s, ())?)),
            };
            ends.push((tape(&d.domain.lower)?, tape(&d.domain.upper)?));
        }
        let relations: Vec<_> =
            s.hypotheses.iter().map(|h| h.turned()).filter(|h| h.rel != Rel::NotEqual).collect();
        let terms: Vec<Term> =
            self.atoms.iter().cloned().chain(relations.iter().map(|h| h.difference())).collect();
        let tape: Tape<f64> = Tape::new(&terms, &names, s, ())?;
        let mut jets = Jets::default();
        let mut state = 0x9e37_79b9_7f4a_7c15_u64;
        let mut uniform = || {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / (1u64 << 53) as f64
        };
        let mut found = Vec::new();
        for _ in 0..most * 30 {
            if found.len() >= most {
                break;
            }
            let mut point: Vec<Interval> = Vec::new();
            for (lower, upper) in &ends {
                let mut value = |t: &Option<Tape<f64>>| {
                    let t = t.as_ref()?;
                    t.run(&point, Order::Value, &mut jets);
                    t.value(0, &jets).midpoint()
                };
                let x = match (value(lower), value(upper)) {
                    (Some(a), Some(b)) => a + (b - a) * uniform(),
                    (Some(a), None) => a + 0.8 * (uniform() + uniform() + uniform()),
                    (None, Some(b)) => b - 0.8 * (uniform() + uniform() + uniform()),
                    (None, None) => 2.0 * (uniform() + uniform() + uniform() + uniform() - 2.0),
                };
                point.push(Interval::point(x));
            }
            tape.run(&point, Order::Value, &mut jets);
            if !jets.defined.is_everywhere() {
                continue;
            }
            let seen = |i: usize| tape.value(i, &jets).midpoint().filter(|x| x.is_finite());
            let inside = relations.iter().enumerate().all(|(i, h)| {
                seen(self.atoms.len() + i)
                    .is_some_and(|x| if h.rel == Rel::Equal { x.abs() < 1e-12 } else { x > 0.0 })
            });
            let values: Option<Vec<f64>> = (0..self.atoms.len()).map(seen).collect();
            if let Some(values) = values
                && inside
            {
                found.push(values);
            }
        }
        Some(found)
    }
}

/// What an atom is the root of, or the absolute value of; nothing for plain variables.
fn inside(atom: &Term, order: i64) -> Option<Term> {
    match atom.node() {
        Node::Apply(Function::Abs, args) if order == 1 => Some(args[0].clone()),
        _ if order > 1 && is_sum(atom) => Some(atom.clone()),
        _ => None,
    }
}

fn is_sum(atom: &Term) -> bool {
    matches!(
        atom.node(),
        Node::Add(..)
            | Node::Subtract(..)
            | Node::Negate(_)
            | Node::Number(_)
            | Node::Multiply(..)
            | Node::Divide(..)
    )
}

fn has_log(term: &Term) -> bool {
    let mut found = false;
    term.walk(&mut |t| {
        found |= matches!(t.node(), Node::Apply(Function::Log | Function::Log2, _));
        !found
    });
    found
}
