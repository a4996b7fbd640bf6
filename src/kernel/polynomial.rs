//! Polynomials in atoms, with exact rational coefficients.
//!
//! A monomial is a product of powers of atoms; an exponent is a whole number or
//! again such a polynomial. Two facts carry the arithmetic, each true wherever
//! both factors on its left are defined (`b > 0`; or `b = 0` and positive
//! exponents; or `b < 0` and integer exponents):
//! `b^p * b^q = b^(p+q)`, and `b^p / b^q = b^(p-q)` when `p - q` is a literal
//! that is not negative. Nothing here says that anything is defined.

use std::cell::Cell;
use std::cmp::Ordering;
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use num_bigint::BigInt;
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use super::number::Function;
use super::term::{Constant, Name, SeriesKind};
use super::verdict::{Checked, Reason, refuse};

/// Most monomials of one polynomial.
pub const MAX_MONOMIALS: usize = 100_000;
/// Most products of monomials while one normal form is computed.
pub const MAX_PRODUCTS: u64 = 500_000;
/// Highest power of a sum that is multiplied out.
pub const MAX_DEGREE: i64 = 200;
/// Longest literal, in bits, that a power is allowed to make.
pub const MAX_BITS: u64 = 40_000;

/// Counts products of monomials against [`MAX_PRODUCTS`].
#[derive(Default)]
pub struct Work(Cell<u64>);

impl Work {
    /// Adds to the count.
    pub fn spend(&self, amount: u64) -> Checked {
        self.0.set(self.0.get().saturating_add(amount));
        if self.0.get() > MAX_PRODUCTS {
            refuse(Reason::Limit, "a normal form takes too much work")
        } else {
            Ok(())
        }
    }

    /// The count so far.
    pub fn spent(&self) -> u64 {
        self.0.get()
    }
}

/// What a polynomial does not look into.
#[derive(Clone, Debug)]
pub struct Atom(Arc<Kind>);

/// The kinds of atoms.
#[derive(Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Kind {
    /// A literal under a power: an integer above 1 without small factors, or -1.
    Literal(BigInt),
    /// A named constant; powers of `e` stand for `exp`.
    Constant(Constant),
    /// A variable.
    Variable(Name),
    /// A function of normalised arguments.
    Apply(Function, Vec<Poly>),
    /// A quantity at normalised arguments.
    Quantity(Name, Vec<Poly>),
    /// A series; `None` is the infinite limit of its side.
    Series(SeriesKind, Name, Option<Poly>, Option<Poly>, Poly),
    /// A sum under a power.
    Group(Poly),
}

impl Atom {
    /// An atom.
    pub fn new(kind: Kind) -> Atom {
        Atom(Arc::new(kind))
    }

    /// What it is.
    pub fn kind(&self) -> &Kind {
        &self.0
    }
}

impl PartialEq for Atom {
    fn eq(&self, other: &Atom) -> bool {
        Arc::ptr_eq(&self.0, &other.0) || self.0 == other.0
    }
}

impl Eq for Atom {}

impl PartialOrd for Atom {
    fn partial_cmp(&self, other: &Atom) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Atom {
    fn cmp(&self, other: &Atom) -> Ordering {
        if Arc::ptr_eq(&self.0, &other.0) { Ordering::Equal } else { self.0.cmp(&other.0) }
    }
}

/// An exponent.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Exponent {
    /// A whole number.
    Whole(i64),
    /// Anything else, settled.
    General(Arc<Poly>),
}

impl Exponent {
    /// The exponent with that value; `p` is settled.
    pub fn of(p: Poly) -> Exponent {
        match p.as_constant().filter(|q| q.is_integer()).and_then(|q| q.to_integer().to_i64()) {
            Some(n) => Exponent::Whole(n),
            None => Exponent::General(Arc::new(p)),
        }
    }

    /// Its value as a polynomial.
    pub fn poly(&self) -> Poly {
        match self {
            Exponent::Whole(n) => Poly::constant(BigRational::from_integer((*n).into())),
            Exponent::General(p) => (**p).clone(),
        }
    }

    /// Its value if it is a literal.
    pub fn literal(&self) -> Option<BigRational> {
        match self {
            Exponent::Whole(n) => Some(BigRational::from_integer((*n).into())),
            Exponent::General(p) => p.as_constant(),
        }
    }

    fn plus(&self, other: &Exponent, work: &Work) -> Checked<Exponent> {
        if let (Exponent::Whole(a), Exponent::Whole(b)) = (self, other)
            && let Some(sum) = a.checked_add(*b)
        {
            return Ok(Exponent::Whole(sum));
        }
        Ok(Exponent::of(self.poly().plus(&other.poly()).settled(work)?))
    }

    /// The product of two exponents.
    pub fn times(&self, other: &Exponent, work: &Work) -> Checked<Exponent> {
        if let (Exponent::Whole(a), Exponent::Whole(b)) = (self, other)
            && let Some(product) = a.checked_mul(*b)
        {
            return Ok(Exponent::Whole(product));
        }
        Ok(Exponent::of(self.poly().times(&other.poly(), work)?.settled(work)?))
    }

    /// The largest whole number that may be taken off its literal part, and what
    /// is left, whose literal part lies in [0, 1).
    fn whole_and_rest(&self) -> (BigInt, Poly) {
        match self {
            Exponent::Whole(n) => ((*n).into(), Poly::default()),
            Exponent::General(p) => {
                let whole = p.coefficient(&[]).floor();
                let rest = p.plus(&Poly::constant(-whole.clone()));
                (whole.to_integer(), rest)
            }
        }
    }

    /// Its literal part, and the rest.
    fn literal_and_rest(&self) -> (BigRational, Poly) {
        match self {
            Exponent::Whole(n) => (BigRational::from_integer((*n).into()), Poly::default()),
            Exponent::General(p) => {
                let literal = p.coefficient(&[]);
                let rest = p.plus(&Poly::constant(-literal.clone()));
                (literal, rest)
            }
        }
    }
}

/// A product of powers: atoms in order, no exponent zero.
pub type Monomial = Vec<(Atom, Exponent)>;

/// A sum of monomials with non-zero coefficients.
#[derive(Clone, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub struct Poly {
    terms: BTreeMap<Monomial, BigRational>,
}

impl Poly {
    /// A number.
    pub fn constant(q: BigRational) -> Poly {
        Poly::single(q, Vec::new())
    }

    /// One monomial with its coefficient.
    pub fn single(q: BigRational, m: Monomial) -> Poly {
        let mut p = Poly::default();
        if !q.is_zero() {
            p.terms.insert(m, q);
        }
        p
    }

    /// One atom.
    pub fn atom(a: Atom) -> Poly {
        Poly::single(BigRational::one(), vec![(a, Exponent::Whole(1))])
    }

    /// Its monomials with their coefficients, in a fixed order.
    pub fn terms(&self) -> impl DoubleEndedIterator<Item = (&Monomial, &BigRational)> {
        self.terms.iter()
    }

    /// How many monomials it has.
    pub fn len(&self) -> usize {
        self.terms.len()
    }

    /// Whether no monomial is left.
    pub fn is_empty(&self) -> bool {
        self.terms.is_empty()
    }

    /// Its value if it is a number.
    pub fn as_constant(&self) -> Option<BigRational> {
        match self.terms.len() {
            0 => Some(BigRational::zero()),
            1 => self.terms.get(&[] as &[(Atom, Exponent)]).cloned(),
            _ => None,
        }
    }

    /// The only monomial with its coefficient.
    pub fn as_single(&self) -> Option<(&Monomial, &BigRational)> {
        if self.terms.len() == 1 { self.terms.first_key_value() } else { None }
    }

    /// The coefficient of a monomial.
    pub fn coefficient(&self, m: &[(Atom, Exponent)]) -> BigRational {
        self.terms.get(m).cloned().unwrap_or_else(BigRational::zero)
    }

    fn insert(&mut self, m: Monomial, q: BigRational) {
        match self.terms.entry(m) {
            std::collections::btree_map::Entry::Vacant(e) => {
                if !q.is_zero() {
                    e.insert(q);
                }
            }
            std::collections::btree_map::Entry::Occupied(mut e) => {
                let sum = exact_sum(e.get(), &q);
                *e.get_mut() = sum;
                if e.get().is_zero() {
                    e.remove();
                }
            }
        }
    }

    /// The sum.
    pub fn plus(&self, other: &Poly) -> Poly {
        let (mut sum, small) =
            if self.len() >= other.len() { (self.clone(), other) } else { (other.clone(), self) };
        for (m, q) in &small.terms {
            sum.insert(m.clone(), q.clone());
        }
        sum
    }

    /// A multiple by a number.
    pub fn scaled(&self, factor: &BigRational) -> Poly {
        if factor.is_zero() {
            return Poly::default();
        }
        Poly { terms: self.terms.iter().map(|(m, q)| (m.clone(), q * factor)).collect() }
    }

    /// The product.
    pub fn times(&self, other: &Poly, work: &Work) -> Checked<Poly> {
        let mut product = Poly::default();
        for (m, p) in &self.terms {
            for (n, q) in &other.terms {
                work.spend(1)?;
                let (monomial, literal) = multiply(m, n, work)?;
                let coefficient = exact_product(p, q);
                product.insert(monomial, if literal.is_one() { coefficient } else { coefficient * literal });
            }
            if product.len() > MAX_MONOMIALS {
                return refuse(Reason::Limit, format!("more than {MAX_MONOMIALS} monomials"));
            }
        }
        Ok(product)
    }

    /// A small natural power, multiplied out.
    pub fn multiplied_out(&self, n: i64, work: &Work) -> Checked<Poly> {
        if !(0..=MAX_DEGREE).contains(&n) {
            return refuse(Reason::Limit, format!("a sum to the power {n} is not multiplied out"));
        }
        // At most binomial(n + k - 1, n) monomials come out of k.
        let mut monomials: u128 = 1;
        for i in 1..=n as u128 {
            monomials = monomials * (self.len() as u128 + i - 1) / i;
            if monomials > MAX_MONOMIALS as u128 {
                return refuse(Reason::Limit, format!("more than {MAX_MONOMIALS} monomials"));
            }
        }
        let mut power = Poly::constant(BigRational::one());
        for _ in 0..n {
            power = power.times(self, work)?;
        }
        Ok(power)
    }

    /// Whether an atom occurs at the top, not inside other atoms.
    fn atoms(&self) -> BTreeSet<&Atom> {
        self.terms.keys().flatten().map(|(a, _)| a).collect()
    }

    /// A monomial that can be divided out of every summand without leaving the
    /// points where the summands are defined: a common power, or a negative
    /// literal power that some summand has anyway.
    fn content(&self) -> Monomial {
        let mut common = Vec::new();
        for atom in self.atoms() {
            let of = |m: &Monomial| exponent_of(m, atom).literal_and_rest();
            let mut all = self.terms.keys().map(of);
            let Some((mut least, rest)) = all.next() else { continue };
            let mut same_rest = true;
            let mut least_literal = if rest.is_empty() { least.clone() } else { BigRational::zero() };
            for (literal, other) in all {
                same_rest &= other == rest;
                if other.is_empty() && literal < least_literal {
                    least_literal = literal.clone();
                }
                if literal < least {
                    least = literal;
                }
            }
            let shared = if same_rest {
                rest.plus(&Poly::constant(least))
            } else if least_literal.is_negative() {
                Poly::constant(least_literal)
            } else {
                continue;
            };
            if !shared.is_empty() {
                common.push((atom.clone(), Exponent::of(shared)));
            }
        }
        common
    }

    /// `self = monomial * sum`, where the sum has no content and no group or sine
    /// in it stands under a power that could be multiplied out.
    pub fn reduced(&self, work: &Work) -> Checked<(Monomial, Poly)> {
        let mut outside: Monomial = Vec::new();
        let mut sum = self.clone();
        loop {
            let content = sum.content();
            if !content.is_empty() {
                let inverse = Poly::single(BigRational::one(), invert(&content));
                sum = sum.times(&inverse, work)?;
                let (product, literal) = multiply(&outside, &content, work)?;
                outside = product;
                sum = sum.scaled(&literal);
            }
            match sum.opened_once(work)? {
                Some(opened) => sum = opened,
                None => return Ok((outside, sum)),
            }
        }
    }

    /// Multiplies out one group (or the square of one sine), if there is any.
    /// Powers whose exponents differ by whole numbers are brought to the lowest
    /// of them; whole powers to 0.
    fn opened_once(&self, work: &Work) -> Checked<Option<Poly>> {
        for atom in self.atoms() {
            let (inside, step) = match atom.kind() {
                Kind::Group(p) => (p.clone(), 1),
                Kind::Apply(Function::Sin, args) => {
                    let cos = Poly::atom(Atom::new(Kind::Apply(Function::Cos, args.clone())));
                    let square = cos.times(&cos, work)?.scaled(&-BigRational::one());
                    (square.plus(&Poly::constant(BigRational::one())), 2)
                }
                _ => continue,
            };
            let mut lowest: BTreeMap<Poly, BigInt> = BTreeMap::new();
            lowest.insert(Poly::default(), BigInt::zero());
            let split: Vec<(BigInt, Poly)> =
                self.terms.keys().map(|m| exponent_of(m, atom).whole_and_rest()).collect();
            for (whole, rest) in &split {
                let low = lowest.entry(rest.clone()).or_insert_with(|| whole.clone());
                if whole < low {
                    *low = whole.clone();
                }
            }
            let above = |(whole, rest): &(BigInt, Poly)| (whole - &lowest[rest]).div_floor(&step.into());
            if split.iter().all(|s| above(s).is_zero()) {
                continue;
            }
            let mut opened = Poly::default();
            let mut powers: BTreeMap<i64, Poly> = BTreeMap::new();
            for ((m, q), part) in self.terms.iter().zip(&split) {
                let Some(n) = above(part).to_i64() else {
                    return refuse(Reason::Limit, "a power is too high to be multiplied out");
                };
                if n == 0 {
                    opened.insert(m.clone(), q.clone());
                    continue;
                }
                let left = Exponent::of(
                    part.1.plus(&Poly::constant(BigRational::from_integer(&part.0 - BigInt::from(n * step)))),
                );
                let mut rest: Monomial = m.iter().filter(|(a, _)| a != atom).cloned().collect();
                if left != Exponent::Whole(0) {
                    rest.push((atom.clone(), left));
                    rest.sort();
                }
                if let std::collections::btree_map::Entry::Vacant(e) = powers.entry(n) {
                    e.insert(inside.multiplied_out(n, work)?);
                }
                opened = opened.plus(&powers[&n].times(&Poly::single(q.clone(), rest), work)?);
                if opened.len() > MAX_MONOMIALS {
                    return refuse(Reason::Limit, format!("more than {MAX_MONOMIALS} monomials"));
                }
            }
            return Ok(Some(opened));
        }
        Ok(None)
    }

    /// One canonical way of writing it: everything multiplied out over a common
    /// denominator. Sums without groups are left alone.
    pub fn settled(&self, work: &Work) -> Checked<Poly> {
        let plain = |a: &Atom| !matches!(a.kind(), Kind::Group(_) | Kind::Apply(Function::Sin, _));
        if self.terms.keys().flatten().all(|(a, _)| plain(a)) {
            return Ok(self.clone());
        }
        let (numerator, denominator) = self.fraction(work)?;
        numerator.times(&Poly::single(BigRational::one(), invert(&denominator)), work)
    }

    /// `self = numerator / denominator`: the numerator multiplied out, the
    /// denominator a product of literal positive powers.
    pub fn fraction(&self, work: &Work) -> Checked<(Poly, Monomial)> {
        let (outside, sum) = self.reduced(work)?;
        let negative = |e: &Exponent| e.literal().is_some_and(|q| q.is_negative());
        let (below, above): (Monomial, Monomial) = outside.into_iter().partition(|(_, e)| negative(e));
        let mut numerator = sum.times(&Poly::single(BigRational::one(), above), work)?;
        while let Some(opened) = numerator.opened_once(work)? {
            numerator = opened;
        }
        Ok((numerator, invert(&below)))
    }

    /// A quadratic in one variable with rational zeros as the product of two linear factors.
    fn linear_factors(&self) -> Option<[Poly; 2]> {
        let mut terms = self.terms.iter().rev();
        let (square, a) = terms.next()?;
        let x = match square.as_slice() {
            [(x, Exponent::Whole(2))] if matches!(x.kind(), Kind::Variable(_)) => x,
            _ => return None,
        };
        let linear: Monomial = vec![(x.clone(), Exponent::Whole(1))];
        let (b, c) = (self.coefficient(&linear), self.coefficient(&[]));
        if self.len() != 1 + usize::from(!b.is_zero()) + usize::from(!c.is_zero()) {
            return None;
        }
        let discriminant = &b * &b - a * &c * BigRational::from_integer(4.into());
        let root = |n: &BigInt| Some(n.sqrt()).filter(|r| r * r == *n);
        if discriminant.is_negative() {
            return None;
        }
        let root = BigRational::new(root(discriminant.numer())?, root(discriminant.denom())?);
        let half = (a * BigRational::from_integer(2.into())).recip();
        let minus = |zero: BigRational| Poly::atom(x.clone()).plus(&Poly::constant(-zero));
        Some([minus((&root - &b) * &half).scaled(a), minus((-&root - &b) * &half)])
    }

    /// `self = literal * monomial`, with sums kept as primitive groups; zero is refused.
    pub fn product_form(&self, work: &Work) -> Checked<(BigRational, Monomial)> {
        if let Some((m, q)) = self.as_single() {
            return Ok((q.clone(), m.clone()));
        }
        let (outside, sum) = self.reduced(work)?;
        if let Some((m, q)) = sum.as_single() {
            let (product, literal) = multiply(&outside, m, work)?;
            return Ok((q * literal, product));
        }
        if let Some(linear) = sum.linear_factors() {
            let (mut product, mut literal) = (outside, BigRational::one());
            for factor in linear {
                let (q, m) = factor.product_form(work)?;
                let (longer, more) = multiply(&product, &m, work)?;
                (product, literal) = (longer, literal * q * more);
            }
            return Ok((literal, product));
        }
        let Some((_, leading)) = sum.terms.last_key_value() else {
            return refuse(Reason::Condition, "zero is no product of powers");
        };
        let (mut gcd, mut lcm) = (BigInt::zero(), BigInt::one());
        for q in sum.terms.values() {
            gcd = gcd.gcd(q.numer());
            lcm = lcm.lcm(q.denom());
        }
        let size = BigRational::new(gcd, lcm);
        let literal = if leading.is_negative() { -size } else { size };
        let group = Atom::new(Kind::Group(sum.scaled(&literal.recip())));
        let (product, more) = multiply(&outside, &vec![(group, Exponent::Whole(1))], work)?;
        Ok((literal * more, product))
    }
}

/// The exponent of an atom in a monomial.
pub fn exponent_of(m: &Monomial, atom: &Atom) -> Exponent {
    m.iter().find(|(a, _)| a == atom).map_or(Exponent::Whole(0), |(_, e)| e.clone())
}

/// The reciprocal of a monomial.
pub fn invert(m: &Monomial) -> Monomial {
    let minus = |e: &Exponent| match e {
        Exponent::Whole(n) if *n != i64::MIN => Exponent::Whole(-n),
        _ => Exponent::of(e.poly().scaled(&-BigRational::one())),
    };
    m.iter().map(|(a, e)| (a.clone(), minus(e))).collect()
}

/// The product of two monomials, and the literal it leaves: whole powers of
/// literals are carried out.
pub fn multiply(m: &Monomial, n: &Monomial, work: &Work) -> Checked<(Monomial, BigRational)> {
    let mut product: Monomial = Vec::with_capacity(m.len() + n.len());
    let mut literal = BigRational::one();
    let (mut i, mut j) = (0, 0);
    while i < m.len() || j < n.len() {
        let order = match (m.get(i), n.get(j)) {
            (Some((a, _)), Some((b, _))) => a.cmp(b),
            (Some(_), None) => Ordering::Less,
            _ => Ordering::Greater,
        };
        let (atom, exponent) = match order {
            Ordering::Less => (&m[i].0, m[i].1.clone()),
            Ordering::Greater => (&n[j].0, n[j].1.clone()),
            Ordering::Equal => (&m[i].0, m[i].1.plus(&n[j].1, work)?),
        };
        i += usize::from(order != Ordering::Greater);
        j += usize::from(order != Ordering::Less);
        let exponent = match atom.kind() {
            Kind::Literal(base) => carry_out(base, exponent, &mut literal),
            _ => exponent,
        };
        if exponent != Exponent::Whole(0) {
            product.push((atom.clone(), exponent));
        }
    }
    Ok((product, literal))
}

/// Moves the whole part of a literal's power into `literal`, unless it is huge.
pub fn carry_out(base: &BigInt, exponent: Exponent, literal: &mut BigRational) -> Exponent {
    let (whole, rest) = exponent.whole_and_rest();
    if base.is_negative() {
        // The base is -1.
        if whole.is_odd() {
            *literal = -literal.clone();
        }
        return Exponent::of(rest);
    }
    match whole.to_i64() {
        Some(n) if n.unsigned_abs().saturating_mul(base.bits()) <= MAX_BITS => {
            *literal *= integer_power(&BigRational::from_integer(base.clone()), n);
            Exponent::of(rest)
        }
        _ => exponent,
    }
}

/// `q^n` for a non-zero `q`; the caller has checked the size.
pub fn integer_power(q: &BigRational, n: i64) -> BigRational {
    let power = num_traits::pow(q.clone(), n.unsigned_abs() as usize);
    if n < 0 { power.recip() } else { power }
}

/// The product, without a common divisor to look for if both are integers.
fn exact_product(p: &BigRational, q: &BigRational) -> BigRational {
    if p.is_integer() && q.is_integer() { BigRational::from_integer(p.numer() * q.numer()) } else { p * q }
}

/// The sum, likewise.
fn exact_sum(p: &BigRational, q: &BigRational) -> BigRational {
    if p.is_integer() && q.is_integer() { BigRational::from_integer(p.numer() + q.numer()) } else { p + q }
}
