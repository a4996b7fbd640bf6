//! Polynomials in numbered variables with exact rational coefficients, dense in
//! the exponents and sparse in the monomials: the workhorse of sums of squares.

use std::collections::BTreeMap;
use std::collections::btree_map::Entry;

use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

/// The exponents of a monomial, one a variable.
pub type Powers = Vec<u16>;

/// Products with more monomials are not carried out.
pub const MAX_MONOMIALS: usize = 20_000;

/// A sum of monomials with coefficients other than 0.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Polynomial(BTreeMap<Powers, BigRational>);

/// The equation `variable^power = by`, used from left to right. What stands on the
/// right must not lead back to the left.
#[derive(Clone, Debug)]
pub struct Rewrite {
    /// The variable.
    pub variable: usize,
    /// Its power.
    pub power: u16,
    /// What is put for it.
    pub by: Polynomial,
}

impl Polynomial {
    /// A number; monomials have as many exponents as there are variables.
    #[must_use]
    pub fn number(q: BigRational, variables: usize) -> Polynomial {
        Polynomial::single(q, vec![0; variables])
    }

    /// One monomial.
    #[must_use]
    pub fn single(q: BigRational, powers: Powers) -> Polynomial {
        let mut p = Polynomial::default();
        p.add(powers, q);
        p
    }

    /// A variable.
    #[must_use]
    pub fn variable(v: usize, variables: usize) -> Polynomial {
        let mut powers = vec![0; variables];
        powers[v] = 1;
        Polynomial::single(BigRational::one(), powers)
    }

    /// Adds a monomial.
    pub fn add(&mut self, powers: Powers, q: BigRational) {
        match self.0.entry(powers) {
            Entry::Vacant(place) => {
                if !q.is_zero() {
                    place.insert(q);
                }
            }
            Entry::Occupied(mut place) => {
                *place.get_mut() += q;
                if place.get().is_zero() {
                    place.remove();
                }
            }
        }
    }

    /// The monomials, in a fixed order.
    pub fn terms(&self) -> impl DoubleEndedIterator<Item = (&Powers, &BigRational)> {
        self.0.iter()
    }

    /// How many monomials.
    #[must_use]
    pub fn len(&self) -> usize {
        self.0.len()
    }

    /// Whether it is 0.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// The coefficient of a monomial.
    #[must_use]
    pub fn coefficient(&self, powers: &Powers) -> BigRational {
        self.0.get(powers).cloned().unwrap_or_else(BigRational::zero)
    }

    /// Whether a monomial occurs.
    #[must_use]
    pub fn has(&self, powers: &Powers) -> bool {
        self.0.contains_key(powers)
    }

    /// Its value if it is a number.
    #[must_use]
    pub fn as_number(&self) -> Option<BigRational> {
        match self.len() {
            _ if self.is_empty() => Some(BigRational::zero()),
            1 => self.0.iter().next().filter(|(m, _)| m.iter().all(|e| *e == 0)).map(|(_, q)| q.clone()),
            _ => None,
        }
    }

    /// The total degree; 0 for the polynomial 0.
    #[must_use]
    pub fn degree(&self) -> usize {
        self.0.keys().map(|m| m.iter().map(|e| usize::from(*e)).sum()).max().unwrap_or(0)
    }

    /// The sum.
    #[must_use]
    pub fn plus(&self, other: &Polynomial) -> Polynomial {
        let mut sum = self.clone();
        for (m, q) in &other.0 {
            sum.add(m.clone(), q.clone());
        }
        sum
    }

    /// A multiple.
    #[must_use]
    pub fn scaled(&self, q: &BigRational) -> Polynomial {
        if q.is_zero() {
            return Polynomial::default();
        }
        Polynomial(self.0.iter().map(|(m, c)| (m.clone(), c * q)).collect())
    }

    /// The product, unless it is too large.
    #[must_use]
    pub fn times(&self, other: &Polynomial) -> Option<Polynomial> {
        let mut product = Polynomial::default();
        for (m, q) in &self.0 {
            for (n, r) in &other.0 {
                let sum: Option<Powers> = m.iter().zip(n).map(|(a, b)| a.checked_add(*b)).collect();
                product.add(sum?, q * r);
            }
            if product.len() > MAX_MONOMIALS {
                return None;
            }
        }
        Some(product)
    }

    /// With every equation carried out as often as possible, unless that is too much.
    #[must_use]
    pub fn reduced(&self, rules: &[Rewrite]) -> Option<Polynomial> {
        let mut p = self.clone();
        for _ in 0..1000 {
            let hit = |m: &Powers| rules.iter().find(|r| m[r.variable] >= r.power);
            if !p.0.keys().any(|m| hit(m).is_some()) {
                return Some(p);
            }
            let mut next = Polynomial::default();
            for (m, q) in &p.0 {
                match hit(m) {
                    None => next.add(m.clone(), q.clone()),
                    Some(rule) => {
                        let mut rest = m.clone();
                        rest[rule.variable] -= rule.power;
                        next = next.plus(&rule.by.times(&Polynomial::single(q.clone(), rest))?);
                    }
                }
            }
            p = next;
        }
        None
    }

    /// The exact value at a point.
    #[must_use]
    pub fn value(&self, point: &[BigRational]) -> BigRational {
        let monomial = |m: &Powers| {
            m.iter()
                .zip(point)
                .fold(BigRational::one(), |p, (e, x)| p * num_traits::pow(x.clone(), usize::from(*e)))
        };
        self.0.iter().fold(BigRational::zero(), |sum, (m, q)| sum + q * monomial(m))
    }

    /// The value at a point.
    #[must_use]
    pub fn at(&self, point: &[f64]) -> f64 {
        let monomial = |m: &Powers| m.iter().zip(point).map(|(e, x)| x.powi(i32::from(*e))).product::<f64>();
        self.0.iter().map(|(m, q)| q.to_f64().unwrap_or(f64::NAN) * monomial(m)).sum()
    }

    /// The greatest positive rational that leaves whole coefficients without a common divisor.
    #[must_use]
    pub fn content(&self) -> BigRational {
        let mut top = num_bigint::BigInt::zero();
        let mut bottom = num_bigint::BigInt::one();
        for q in self.0.values() {
            top = top.gcd(q.numer());
            bottom = bottom.lcm(q.denom());
        }
        if top.is_zero() { BigRational::one() } else { BigRational::new(top.abs(), bottom) }
    }
}

/// All exponents in `variables` variables of total degree at most `degree`, those of
/// highest degree first.
#[must_use]
pub fn monomials(variables: usize, degree: usize) -> Vec<Powers> {
    let mut all: Vec<Powers> = vec![vec![]];
    for _ in 0..variables {
        let sum = |m: &Powers| m.iter().map(|e| usize::from(*e)).sum::<usize>();
        all = all
            .iter()
            .flat_map(|m| {
                (0..=(degree - sum(m)) as u16).map(move |e| {
                    let mut longer = m.clone();
                    longer.push(e);
                    longer
                })
            })
            .collect();
    }
    all.sort_by_key(|m| std::cmp::Reverse(m.iter().map(|e| usize::from(*e)).sum::<usize>()));
    all
}

#[cfg(test)]
mod tests {
    use super::*;

    fn q(n: i64) -> BigRational {
        BigRational::from_integer(n.into())
    }

    #[test]
    fn arithmetic() {
        let (x, y) = (Polynomial::variable(0, 2), Polynomial::variable(1, 2));
        let sum = x.plus(&y);
        let square = sum.times(&sum).unwrap();
        assert_eq!(square.coefficient(&vec![1, 1]), q(2));
        assert_eq!(square.degree(), 2);
        assert_eq!(square.at(&[3.0, -1.0]), 4.0);
        assert!(square.plus(&square.scaled(&q(-1))).is_empty());
        // x^2 = 1 - y^2 leaves 1 + 2 x y.
        let circle = Polynomial::number(q(1), 2).plus(&y.times(&y).unwrap().scaled(&q(-1)));
        let rule = Rewrite { variable: 0, power: 2, by: circle };
        let reduced = square.reduced(&[rule]).unwrap();
        assert_eq!((reduced.len(), reduced.coefficient(&vec![0, 0])), (2, q(1)));
        assert_eq!(monomials(3, 2).len(), 10);
        assert_eq!(monomials(2, 3).last(), Some(&vec![0, 0]));
        assert_eq!(
            square.scaled(&BigRational::new(4.into(), 3.into())).content(),
            BigRational::new(4.into(), 3.into())
        );
    }
}
