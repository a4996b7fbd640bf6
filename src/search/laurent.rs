//! Terms as sums of power products of atoms, for the search's own arithmetic.
//!
//! An atom is a variable, a constant, a call, a power `b^m` with a symbolic
//! exponent, or a *base*: a sum of several products that stands with a negative
//! or fractional exponent. Exponentials are kept as powers of `exp(m)`, m a
//! product without coefficient. What is found here is a guess at what the kernel's
//! normal form will say; nothing rests on it.

use std::collections::BTreeMap;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, ToPrimitive, Zero};

use crate::enclosure::Function;
use crate::expression::{Constant, Node, Term};

use super::gamma::shifted;

/// An exponent: larger ones than a million are not handled.
pub type Exponent = num_rational::Ratio<i64>;

const MAX_EXPONENT: i64 = 1_000_000;

/// A small rational as an exponent.
fn small_exponent(q: &BigRational) -> Option<Exponent> {
    let (n, d) = (q.numer().to_i64()?, q.denom().to_i64()?);
    (n.abs() <= MAX_EXPONENT && d <= MAX_EXPONENT).then(|| Exponent::new(n, d))
}

/// The sum, quickly for integers.
fn add_numbers(a: &BigRational, b: &BigRational) -> BigRational {
    if a.denom().is_one() && b.denom().is_one() {
        return BigRational::from_integer(a.numer() + b.numer());
    }
    a + b
}

/// The product, quickly for integers.
fn multiply_numbers(a: &BigRational, b: &BigRational) -> BigRational {
    if a.denom().is_one() && b.denom().is_one() {
        return BigRational::from_integer(a.numer() * b.numer());
    }
    a * b
}

fn wide(e: &Exponent) -> BigRational {
    BigRational::new((*e.numer()).into(), (*e.denom()).into())
}

/// A product of atoms with exponents other than 0, by the order of terms.
#[derive(Clone, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub struct Monomial(Vec<(Term, Exponent)>);

impl Monomial {
    /// The empty product.
    #[must_use]
    pub fn one() -> Monomial {
        Monomial::default()
    }

    /// One atom to a power.
    #[must_use]
    pub fn atom(atom: Term, exponent: Exponent) -> Monomial {
        Monomial(if exponent.is_zero() { vec![] } else { vec![(atom, exponent)] })
    }

    /// The atoms and their exponents.
    #[must_use]
    pub fn factors(&self) -> &[(Term, Exponent)] {
        &self.0
    }

    /// Whether it is the empty product.
    #[must_use]
    pub fn is_one(&self) -> bool {
        self.0.is_empty()
    }

    /// The exponent of an atom, 0 if it does not occur.
    #[must_use]
    pub fn exponent(&self, atom: &Term) -> Exponent {
        self.0.iter().find(|(a, _)| a == atom).map_or_else(Exponent::zero, |(_, e)| *e)
    }

    /// The product of two.
    #[must_use]
    pub fn times(&self, other: &Monomial) -> Monomial {
        let mut product = Vec::with_capacity(self.0.len() + other.0.len());
        let (mut a, mut b) = (self.0.iter().peekable(), other.0.iter().peekable());
        loop {
            match (a.peek(), b.peek()) {
                (Some(x), Some(y)) if x.0 == y.0 => {
                    let sum = x.1 + y.1;
                    if !sum.is_zero() {
                        product.push((x.0.clone(), sum));
                    }
                    a.next();
                    b.next();
                }
                (Some(x), Some(y)) if x.0 < y.0 => product.extend(a.next().cloned()),
                (Some(_), None) => product.extend(a.next().cloned()),
                (_, Some(_)) => product.extend(b.next().cloned()),
                (None, None) => return Monomial(product),
            }
        }
    }

    /// Every exponent multiplied.
    #[must_use]
    pub fn raised(&self, by: &Exponent) -> Monomial {
        if by.is_zero() {
            return Monomial::one();
        }
        Monomial(self.0.iter().map(|(a, e)| (a.clone(), e * by)).collect())
    }

    /// Splits by a property of the atoms.
    pub fn partition(&self, mut keep: impl FnMut(&Term) -> bool) -> (Monomial, Monomial) {
        let (yes, no) = self.0.iter().cloned().partition(|(a, _)| keep(a));
        (Monomial(yes), Monomial(no))
    }

    /// As a term, with a coefficient.
    #[must_use]
    pub fn to_term(&self, coefficient: &BigRational) -> Term {
        let mut over: Vec<Term> = Vec::new();
        let mut under: Vec<Term> = Vec::new();
        let mut exponent = Poly::zero();
        for (atom, e) in &self.0 {
            if let Node::Apply(Function::Exp, args) = atom.node() {
                let mut part = Poly::of_term_shallow(&args[0]);
                part.scale(&wide(e));
                exponent = exponent.plus(&part);
                continue;
            }
            let place = if e.is_negative() { &mut under } else { &mut over };
            let size = e.abs();
            place.push(if size.is_one() {
                atom.clone()
            } else if size == Exponent::new(1, 2) {
                Term::apply1(Function::Sqrt, atom)
            } else {
                atom.power(&Term::number(wide(&size)))
            });
        }
        if !exponent.is_empty() {
            over.push(Term::apply1(Function::Exp, &exponent.to_term()));
        }
        let negative = coefficient.is_negative();
        let size = coefficient.abs();
        if !size.numer().is_one() || over.is_empty() {
            over.insert(0, Term::integer(size.numer().clone()));
        }
        if !size.denom().is_one() {
            under.insert(0, Term::integer(size.denom().clone()));
        }
        let product = |list: Vec<Term>| list.into_iter().reduce(|a, b| a.multiply(&b));
        let top = product(over).unwrap_or_else(|| Term::integer(1));
        let whole = match product(under) {
            Some(bottom) => top.divide(&bottom),
            None => top,
        };
        if negative { whole.negate() } else { whole }
    }
}

/// Whole powers of numbers move into the coefficient.
fn folded(mut m: Monomial, mut q: BigRational) -> (Monomial, BigRational) {
    for (atom, e) in &mut m.0 {
        if let Some(base) = atom.as_number()
            && let whole = e.floor()
            && !whole.is_zero()
            && let Ok(n) = i32::try_from(whole.to_integer())
            && n.unsigned_abs() <= 400
        {
            q *= base.pow(n);
            *e -= whole;
        }
    }
    m.0.retain(|(_, e)| !e.is_zero());
    (m, q)
}

/// A sum of monomials with coefficients other than 0.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Poly(BTreeMap<Monomial, BigRational>);

/// Larger sums are not handled.
const MAX_TERMS: usize = 300;
/// Integer powers of sums up to this are multiplied out.
const MAX_EXPANDED: i64 = 12;

impl Poly {
    /// The empty sum.
    #[must_use]
    pub fn zero() -> Poly {
        Poly::default()
    }

    /// A number.
    #[must_use]
    pub fn number(q: BigRational) -> Poly {
        Poly::single(q, Monomial::one())
    }

    /// The number 1.
    #[must_use]
    pub fn one() -> Poly {
        Poly::number(BigRational::one())
    }

    /// One product.
    #[must_use]
    pub fn single(q: BigRational, m: Monomial) -> Poly {
        let mut sum = Poly::zero();
        sum.add(m, q);
        sum
    }

    /// The products with their coefficients.
    pub fn terms(&self) -> impl DoubleEndedIterator<Item = (&Monomial, &BigRational)> {
        self.0.iter()
    }

    /// How many products.
    #[must_use]
    pub fn len(&self) -> usize {
        self.0.len()
    }

    /// Whether it is the empty sum as written; see [`Poly::is_zero`].
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// The number, if it is one.
    #[must_use]
    pub fn as_number(&self) -> Option<BigRational> {
        match self.0.len() {
            0 => Some(BigRational::zero()),
            1 => self.0.iter().next().filter(|(m, _)| m.is_one()).map(|(_, q)| q.clone()),
            _ => None,
        }
    }

    fn add(&mut self, m: Monomial, q: BigRational) {
        let (m, q) = folded(m, q);
        use std::collections::btree_map::Entry;
        match self.0.entry(m) {
            Entry::Vacant(place) => {
                if !q.is_zero() {
                    place.insert(q);
                }
            }
            Entry::Occupied(mut place) => {
                let sum = add_numbers(place.get(), &q);
                *place.get_mut() = sum;
                if place.get().is_zero() {
                    place.remove();
                }
            }
        }
    }

    /// The sum.
    #[must_use]
    pub fn plus(&self, other: &Poly) -> Poly {
        let mut sum = self.clone();
        for (m, q) in &other.0 {
            sum.add(m.clone(), q.clone());
        }
        sum
    }

    /// The difference.
    #[must_use]
    pub fn minus(&self, other: &Poly) -> Poly {
        let mut sum = self.clone();
        for (m, q) in &other.0 {
            sum.add(m.clone(), -q);
        }
        sum
    }

    /// Multiplies in place by a number.
    pub fn scale(&mut self, q: &BigRational) {
        if q.is_zero() {
            self.0.clear();
        }
        for value in self.0.values_mut() {
            *value = multiply_numbers(value, q);
        }
    }

    /// Multiplied by one product.
    #[must_use]
    pub fn shifted(&self, by: &Monomial) -> Poly {
        let mut product = Poly::zero();
        for (m, q) in &self.0 {
            product.add(m.times(by), q.clone());
        }
        product
    }

    /// The product, unless it is too large.
    #[must_use]
    pub fn times(&self, other: &Poly) -> Option<Poly> {
        if self.len().saturating_mul(other.len()) > 20 * MAX_TERMS {
            return None;
        }
        let mut product = Poly::zero();
        for (m, q) in &self.0 {
            for (n, r) in &other.0 {
                let both = m.times(n);
                let value = multiply_numbers(q, r);
                match both.0.iter().position(|(a, e)| is_cosine(a) && *e >= Exponent::from_integer(2)) {
                    None => product.add(both, value),
                    Some(i) => {
                        // cos^2 = 1 - sin^2
                        let (atom, _) = both.0[i].clone();
                        let rest = Monomial::atom(atom.clone(), Exponent::from_integer(-2));
                        let lowered = both.times(&rest);
                        let Node::Apply(_, args) = atom.node() else { return None };
                        let sine = Term::apply1(Function::Sin, &args[0]);
                        let squared = Monomial::atom(sine, Exponent::from_integer(2));
                        let circle = Poly::one().minus(&Poly::single(BigRational::one(), squared));
                        product = product.plus(&Poly::single(value, lowered).times(&circle)?);
                    }
                }
            }
            if product.len() > MAX_TERMS {
                return None;
            }
        }
        Some(product)
    }

    /// A quadratic in one variable with rational zeros as a product of linear factors,
    /// as the kernel takes it apart.
    fn linear_factors(&self) -> Option<[Poly; 2]> {
        let x = self.0.keys().find_map(|m| match m.0.as_slice() {
            [(x, e)] if *e == Exponent::from_integer(2) && x.as_variable().is_some() => Some(x.clone()),
            _ => None,
        })?;
        let coefficient = |e: i64| {
            let m = Monomial::atom(x.clone(), Exponent::from_integer(e));
            self.0.get(&m).cloned().unwrap_or_else(BigRational::zero)
        };
        let (a, b, c) = (coefficient(2), coefficient(1), coefficient(0));
        if self.len() != 1 + usize::from(!b.is_zero()) + usize::from(!c.is_zero()) {
            return None;
        }
        let discriminant = &b * &b - &a * &c * BigRational::from_integer(4.into());
        let root = |n: &BigInt| Some(n.sqrt()).filter(|r| r * r == *n);
        if discriminant.is_negative() {
            return None;
        }
        let root = BigRational::new(root(discriminant.numer())?, root(discriminant.denom())?);
        let half = (&a * BigRational::from_integer(2.into())).recip();
        let x = Poly::single(BigRational::one(), Monomial::atom(x, Exponent::one()));
        let minus = |zero: BigRational| x.minus(&Poly::number(zero));
        let mut first = minus((&root - &b) * &half);
        first.scale(&a);
        Some([first, minus((-&root - &b) * &half)])
    }

    /// As a term.
    #[must_use]
    pub fn to_term(&self) -> Term {
        let mut sum: Option<Term> = None;
        // Positive summands first, so that the text does not open with a minus.
        let (plus, minus): (Vec<_>, Vec<_>) = self.0.iter().rev().partition(|(_, q)| q.is_positive());
        for (m, q) in plus.into_iter().chain(minus) {
            sum = Some(match sum {
                None => m.to_term(q),
                Some(s) if q.is_negative() => s.subtract(&m.to_term(&-q)),
                Some(s) => s.add(&m.to_term(q)),
            });
        }
        sum.unwrap_or_else(|| Term::integer(0))
    }

    /// A product as it stands inside `exp`: atoms of a product that was written by [`Monomial::to_term`].
    fn of_term_shallow(term: &Term) -> Poly {
        Algebra { positive: &|_| false }.poly(term).unwrap_or_else(|| {
            Poly::single(BigRational::one(), Monomial::atom(term.clone(), Exponent::one()))
        })
    }

    /// E, if it is `exp(E)` as written.
    fn exponent(&self) -> Option<Poly> {
        let (m, _) = self.0.iter().next().filter(|(_, q)| self.len() == 1 && q.is_one())?;
        if m.is_one() {
            return None;
        }
        let mut sum = Poly::zero();
        for (atom, e) in m.factors() {
            let Node::Apply(Function::Exp, args) = atom.node() else { return None };
            let mut part = Poly::of_term_shallow(&args[0]);
            part.scale(&wide(e));
            sum = sum.plus(&part);
        }
        Some(sum)
    }

    /// The largest product that divides every summand, by exponents of atoms, and
    /// the greatest rational factor (positive).
    #[must_use]
    pub fn content(&self) -> (BigRational, Monomial) {
        let mut common: Option<BTreeMap<Term, Exponent>> = None;
        for m in self.0.keys() {
            let own: BTreeMap<Term, Exponent> = m.0.iter().cloned().collect();
            common = Some(match common {
                None => own,
                Some(mut before) => {
                    for (a, e) in &own {
                        let least = before.get(a).cloned().unwrap_or_else(Exponent::zero).min(*e);
                        before.insert(a.clone(), least);
                    }
                    for (a, e) in &mut before {
                        if !own.contains_key(a) {
                            *e = (*e).min(Exponent::zero());
                        }
                    }
                    before
                }
            });
        }
        let factors = common.unwrap_or_default().into_iter().filter(|(_, e)| !e.is_zero()).collect();
        let (mut top, mut bottom) = (BigInt::zero(), BigInt::one());
        for q in self.0.values() {
            top = num_integer::Integer::gcd(&top, q.numer());
            bottom = num_integer::Integer::lcm(&bottom, q.denom());
        }
        let factor = if top.is_zero() { BigRational::one() } else { BigRational::new(top.abs(), bottom) };
        (factor, Monomial(factors))
    }

    /// `(numerator, m)` with `self = numerator * m`, no negative exponents in the
    /// numerator, no common factor, bases multiplied out but for their fractional parts.
    #[must_use]
    pub fn cleared(&self) -> Option<(Poly, Monomial)> {
        let mut current = self.clone();
        let mut front = Monomial::one();
        // Multiplying out one base may bring in others.
        for _ in 0..8 {
            let (_, common) = current.content();
            // A fractional exponent that all share stays with its floor only.
            let common = Monomial(
                common
                    .0
                    .into_iter()
                    .map(|(a, e)| if is_base(&a) { (a, e.floor()) } else { (a, e) })
                    .filter(|(_, e)| !e.is_zero())
                    .collect(),
            );
            current = current.shifted(&common.raised(&-Exponent::one()));
            front = front.times(&common);
            let whole = |m: &Monomial| m.0.iter().any(|(a, e)| is_base(a) && *e >= Exponent::one());
            if !current.0.keys().any(whole) {
                return Some((current, front));
            }
            current = current.multiplied_out()?;
        }
        Some((current, front))
    }

    /// The same with whole powers of bases multiplied out once.
    #[must_use]
    pub fn multiplied_out(&self) -> Option<Poly> {
        let mut sum = Poly::zero();
        for (m, q) in &self.0 {
            let mut product = Poly::single(q.clone(), Monomial::one());
            let mut rest = Monomial::one();
            for (a, e) in &m.0 {
                let n = if is_base(a) { e.floor() } else { Exponent::zero() };
                if n.is_positive() {
                    let n = n.to_integer().to_i64().filter(|n| *n <= 40)?;
                    let base = match a.as_number() {
                        Some(q) => Poly::number(q.clone()),
                        None => Algebra { positive: &|_| false }.poly(a)?,
                    };
                    for _ in 0..n {
                        product = product.times(&base)?;
                    }
                    rest = rest.times(&Monomial::atom(a.clone(), e - Exponent::from_integer(n)));
                } else {
                    rest = rest.times(&Monomial::atom(a.clone(), *e));
                }
            }
            sum = sum.plus(&product.shifted(&rest));
            if sum.len() > MAX_TERMS {
                return None;
            }
        }
        Some(sum)
    }

    /// Whether it is 0 after clearing denominators.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.is_empty() || self.cleared().is_some_and(|(n, _)| n.is_empty())
    }

    /// The highest power of the linear term `base` in `x` that divides every summand,
    /// and what is left: divisions of polynomials in `x`, and fractional powers of the
    /// base as they stand. None if there is no such power, or the sum is no polynomial in
    /// `x` apart from other atoms.
    #[must_use]
    pub fn common_power(&self, x: &str, base: &Term) -> Option<(Exponent, Poly)> {
        let variable = Term::variable(x);
        let linear = Algebra { positive: &|_| false }.poly(base)?;
        let [b, a] = linear.polynomial_in(x)?.try_into().ok()?;
        let root = -b.as_number()? / a.as_number()?;
        // Summands by the rest of the monomial and the exponent of the base.
        let mut groups: BTreeMap<(Monomial, Exponent), Vec<BigRational>> = BTreeMap::new();
        for (m, q) in &self.0 {
            let (power, of_base) = (m.exponent(&variable), m.exponent(base));
            let place = power.to_integer().to_usize().filter(|n| power.is_integer() && *n <= 60)?;
            let away =
                Monomial::atom(variable.clone(), -power).times(&Monomial::atom(base.clone(), -of_base));
            let list = groups.entry((m.times(&away), of_base)).or_default();
            if list.len() <= place {
                list.resize(place + 1, BigRational::zero());
            }
            list[place] += q;
        }
        let mut least: Option<Exponent> = None;
        let mut divided = Vec::new();
        for ((rest, mut e), mut list) in groups {
            while let Some(quotient) = divided_at(&list, &root) {
                let scale = a.as_number()?.recip();
                list = quotient.iter().map(|c| c * &scale).collect();
                e += Exponent::one();
            }
            least = Some(least.map_or(e, |l| l.min(e)));
            divided.push((rest, e, list));
        }
        let least = least.filter(|l| l.is_positive())?;
        let mut left = Poly::zero();
        for (rest, e, list) in divided {
            let (whole, part) = ((e - least).floor(), (e - least).fract());
            let mut own = Poly::zero();
            for (i, c) in list.iter().enumerate() {
                let power = Monomial::atom(variable.clone(), Exponent::from_integer(i as i64));
                own = own.plus(&Poly::single(c.clone(), power));
            }
            for _ in 0..whole.to_integer() {
                own = own.times(&linear)?;
            }
            left = left.plus(&own.shifted(&rest.times(&Monomial::atom(base.clone(), part))));
        }
        Some((least, left))
    }

    /// Coefficients by powers of a variable, lowest first; none if the variable
    /// occurs otherwise than with natural exponents.
    #[must_use]
    pub fn polynomial_in(&self, x: &str) -> Option<Vec<Poly>> {
        let variable = Term::variable(x);
        let mut list: Vec<Poly> = Vec::new();
        for (m, q) in &self.0 {
            let e = m.exponent(&variable);
            let rest = m.times(&Monomial::atom(variable.clone(), -e));
            if !e.is_integer() || e.is_negative() || rest.0.iter().any(|(a, _)| a.mentions(x)) {
                return None;
            }
            let place = e.to_integer().to_usize().filter(|n| *n <= 200)?;
            if list.len() <= place {
                list.resize(place + 1, Poly::zero());
            }
            list[place].add(rest, q.clone());
        }
        Some(list)
    }
}

/// The polynomial divided by `x - root`, if that leaves nothing; not for constants.
fn divided_at(list: &[BigRational], root: &BigRational) -> Option<Vec<BigRational>> {
    let mut quotient = Vec::with_capacity(list.len());
    let mut carried = BigRational::zero();
    for c in list.iter().rev() {
        carried = carried * root + c;
        quotient.push(carried.clone());
    }
    // Last comes the value at the root.
    let value = quotient.pop()?;
    quotient.reverse();
    (value.is_zero() && quotient.iter().any(|c| !c.is_zero())).then_some(quotient)
}

fn is_cosine(atom: &Term) -> bool {
    matches!(atom.node(), Node::Apply(Function::Cos, _))
}

/// Whether an atom is a base: a sum, or a number under a root.
pub fn is_base(atom: &Term) -> bool {
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

/// The way from terms to sums of products; `positive` says which atoms may be
/// taken as positive, so that roots of their powers are taken apart.
pub struct Algebra<'a> {
    /// Whether an atom is positive.
    pub positive: &'a dyn Fn(&Term) -> bool,
}

fn small(q: &BigRational) -> Option<i64> {
    if q.is_integer() { q.to_integer().to_i64() } else { None }
}

impl Algebra<'_> {
    /// The term as a sum of products; none if that would be too large or divides by 0.
    #[must_use]
    pub fn poly(&self, term: &Term) -> Option<Poly> {
        let atom = |t: Term| Some(Poly::single(BigRational::one(), Monomial::atom(t, Exponent::one())));
        match term.node() {
            Node::Number(q) => Some(Poly::number(q.clone())),
            Node::Constant(Constant::E) => self.exponential(&Poly::one()),
            Node::Constant(_) | Node::Variable(_) | Node::Series { .. } => atom(term.clone()),
            Node::Negate(a) => {
                let mut a = self.poly(a)?;
                a.scale(&-BigRational::one());
                Some(a)
            }
            Node::Add(a, b) => Some(self.poly(a)?.plus(&self.poly(b)?)),
            Node::Subtract(a, b) => Some(self.poly(a)?.minus(&self.poly(b)?)),
            Node::Multiply(a, b) => self.poly(a)?.times(&self.poly(b)?),
            Node::Divide(a, b) => self.poly(a)?.times(&self.reciprocal(b)?),
            Node::Power(b, p) => {
                let exponent = self.poly(p)?;
                if let Some(q) = exponent.as_number() {
                    return self.power(&self.poly(b)?, &q);
                }
                if matches!(b.node(), Node::Constant(Constant::E)) {
                    return self.exponential(&exponent);
                }
                let base = self.poly(b)?;
                if let Some(log) = base.exponent() {
                    return self.exponential(&log.times(&exponent)?);
                }
                let written = base.to_term();
                let mut product = Poly::one();
                for (m, q) in exponent.terms() {
                    let factor = if m.is_one() {
                        self.power(&base, q)?
                    } else {
                        let power = written.power(&m.to_term(&BigRational::one()));
                        Poly::single(BigRational::one(), Monomial::atom(power, small_exponent(q)?))
                    };
                    product = product.times(&factor)?;
                }
                Some(product)
            }
            Node::Apply(f, args) => {
                let list: Option<Vec<Poly>> = args.iter().map(|a| self.poly(a)).collect();
                let list = list?;
                match (f, list.as_slice()) {
                    (Function::Exp, [a]) => self.exponential(a),
                    (Function::Sqrt, [a]) => self.power(a, &BigRational::new(1.into(), 2.into())),
                    (Function::Log, [a]) => self.logarithm(a),
                    (Function::Gamma | Function::Lgamma | Function::Digamma | Function::Trigamma, [a]) => {
                        shifted(self, *f, a)
                    }
                    (Function::Log2, [a]) => {
                        let two = self.logarithm(&Poly::number(BigRational::from_integer(2.into())))?;
                        self.logarithm(a)?.times(&self.power(&two, &-BigRational::one())?)
                    }
                    (Function::Sinh | Function::Cosh | Function::Tanh, [a]) => {
                        let up = self.exponential(a)?;
                        let down = self.power(&up, &-BigRational::one())?;
                        let mut half = match f {
                            Function::Cosh => up.plus(&down),
                            _ => up.minus(&down),
                        };
                        if *f == Function::Tanh {
                            // (E^2 - 1)/(E^2 + 1) keeps one exponential.
                            let square = up.times(&up)?;
                            let under = self.power(&square.plus(&Poly::one()), &-BigRational::one())?;
                            return square.minus(&Poly::one()).times(&under);
                        }
                        half.scale(&BigRational::new(1.into(), 2.into()));
                        Some(half)
                    }
                    (Function::Tan, [a]) => {
                        let arg = a.to_term();
                        let sine = self.poly_atom(Term::apply1(Function::Sin, &arg));
                        let cosine = Monomial::atom(Term::apply1(Function::Cos, &arg), -Exponent::one());
                        Some(sine.shifted(&cosine))
                    }
                    (f, list) => atom(Term::apply(*f, list.iter().map(Poly::to_term).collect())),
                }
            }
            Node::Quantity(name, args) => {
                let args: Option<Vec<Term>> = args.iter().map(|a| Some(self.poly(a)?.to_term())).collect();
                atom(Term::quantity(name.clone(), args?))
            }
        }
    }

    /// `1/term`, keeping the factors of the term apart.
    fn reciprocal(&self, term: &Term) -> Option<Poly> {
        let minus_one = -BigRational::one();
        match term.node() {
            Node::Multiply(a, b) => self.reciprocal(a)?.times(&self.reciprocal(b)?),
            Node::Divide(a, b) => self.reciprocal(a)?.times(&self.poly(b)?),
            Node::Power(b, p) => match p.as_number() {
                Some(q) => self.power(&self.poly(b)?, &-q),
                None => self.power(&self.poly(term)?, &minus_one),
            },
            _ => self.power(&self.poly(term)?, &minus_one),
        }
    }

    /// A term as an atom.
    #[must_use]
    pub fn poly_atom(&self, atom: Term) -> Poly {
        Poly::single(BigRational::one(), Monomial::atom(atom, Exponent::one()))
    }

    fn exponential(&self, p: &Poly) -> Option<Poly> {
        let mut product = Monomial::one();
        let mut front = Poly::one();
        for (m, q) in p.terms() {
            // exp(q log b) = b^q
            if let [(atom, e)] = m.factors()
                && e.is_one()
                && let Node::Apply(Function::Log, args) = atom.node()
            {
                front = front.times(&self.power(&self.poly(&args[0])?, q)?)?;
                continue;
            }
            let atom = Term::apply1(Function::Exp, &m.to_term(&BigRational::one()));
            product = product.times(&Monomial::atom(atom, small_exponent(q)?));
        }
        Some(front.shifted(&product))
    }

    /// `log(p)`, factors known to be positive split off.
    #[must_use]
    pub fn logarithm(&self, p: &Poly) -> Option<Poly> {
        let positive = |a: &Term| matches!(a.node(), Node::Apply(Function::Exp, _)) || (self.positive)(a);
        let (numerator, front) = p.cleared()?;
        if let Some([f, g]) = numerator.linear_factors().and_then(|pair| self.oriented(pair, false)) {
            let apart = self.logarithm(&f)?.plus(&self.logarithm(&g)?);
            if front.is_one() {
                return Some(apart);
            }
            return Some(apart.plus(&self.logarithm(&Poly::single(BigRational::one(), front))?));
        }
        let (content, common) = numerator.content();
        let single = numerator.len() == 1;
        let mut sum = Poly::zero();
        let mut kept = Monomial::one();
        let (numerator, outside) =
            if single { (numerator, front.times(&common)) } else { with_own_exponentials(numerator, &front) };
        for (a, e) in outside.factors() {
            if !positive(a) {
                kept = kept.times(&Monomial::atom(a.clone(), *e));
                continue;
            }
            let part = match a.node() {
                Node::Apply(Function::Exp, args) => self.poly(&args[0])?,
                Node::Power(b, n) => self.poly_atom(Term::apply1(Function::Log, b)).times(&self.poly(n)?)?,
                // log gamma(x) is lgamma(x) for x > 0, without steps: they were made.
                Node::Apply(Function::Gamma, args) if (self.positive)(&args[0]) => {
                    self.poly_atom(Term::apply1(Function::Lgamma, &args[0]))
                }
                _ => self.poly_atom(Term::apply1(Function::Log, a)),
            };
            let mut part = part;
            part.scale(&wide(e));
            sum = sum.plus(&part);
        }
        let negative = single && numerator.terms().next().is_some_and(|(_, q)| q.is_negative());
        for (prime, n) in primes(&content) {
            let mut part = self.poly_atom(Term::apply1(Function::Log, &Term::integer(prime)));
            part.scale(&BigRational::from_integer(n.into()));
            sum = sum.plus(&part);
        }
        let rest = if single {
            Poly::single(if negative { -BigRational::one() } else { BigRational::one() }, kept)
        } else {
            let mut rest = numerator;
            rest.scale(&content.recip());
            rest.shifted(&kept)
        };
        if rest.as_number().is_some_and(|q| q.is_one()) {
            return Some(sum);
        }
        Some(sum.plus(&self.poly_atom(Term::apply1(Function::Log, &rest.to_term()))))
    }

    /// Two factors with signs such that both are plainly positive; `whatever` their signs
    /// if that does not matter.
    fn oriented(&self, [f, g]: [Poly; 2], whatever: bool) -> Option<[Poly; 2]> {
        let both = |f: &Poly, g: &Poly| positive_sum(self, f) && positive_sum(self, g);
        if whatever || both(&f, &g) {
            return Some([f, g]);
        }
        let (minus_f, minus_g) = (Poly::zero().minus(&f), Poly::zero().minus(&g));
        both(&minus_f, &minus_g).then_some([minus_f, minus_g])
    }

    /// `p^q` for a rational q.
    #[must_use]
    pub fn power(&self, p: &Poly, q: &BigRational) -> Option<Poly> {
        if q.is_zero() {
            return Some(Poly::one());
        }
        if q.is_one() {
            return Some(p.clone());
        }
        let small_q = small_exponent(q)?;
        if p.is_empty() {
            return if q.is_positive() { Some(Poly::zero()) } else { None };
        }
        if let (Some(n), true) = (small(q), p.len() > 1)
            && (2..=MAX_EXPANDED).contains(&n)
        {
            let mut product = p.clone();
            for _ in 1..n {
                product = product.times(p)?;
            }
            return Some(product);
        }
        let (mut numerator, front) = p.cleared()?;
        if numerator.is_empty() {
            return None;
        }
        let integer = q.is_integer();
        if let Some([f, g]) = numerator.linear_factors().and_then(|pair| self.oriented(pair, integer)) {
            let front = self.power(&Poly::single(BigRational::one(), front), q)?;
            return front.times(&self.power(&f, q)?)?.times(&self.power(&g, q)?);
        }
        let positive = |a: &Term| {
            matches!(a.node(), Node::Apply(Function::Exp, _) | Node::Number(_)) || (self.positive)(a)
        };
        let (content, common) = numerator.content();
        let mut outside = if numerator.len() == 1 { front.times(&common) } else { front };
        if !integer && numerator.len() > 1 {
            (numerator, outside) = with_own_exponentials(numerator, &outside);
        }
        if numerator.len() == 1 {
            let sign = numerator.terms().next().map(|(_, c)| c.signum()).unwrap_or_else(BigRational::one);
            numerator = Poly::number(sign);
        } else {
            numerator.scale(&content.recip());
        }
        let (mut taken, mut inside) = (Monomial::one(), Monomial::one());
        for (a, e) in outside.factors() {
            let own = Monomial::atom(a.clone(), *e);
            if integer || positive(a) { taken = taken.times(&own) } else { inside = inside.times(&own) }
        }
        let mut result = number_power(&content, q)?.shifted(&bounded(taken.raised(&small_q))?);
        // Of a base and its negative, the one that is plainly positive stays under an
        // integer power, else the one without a leading minus.
        let mut turned = numerator.clone();
        turned.scale(&-BigRational::one());
        let leading_negative =
            if numerator.len() == 1 || (!positive_sum(self, &turned) && !positive_sum(self, &numerator)) {
                numerator.terms().next_back().is_some_and(|(_, c)| c.is_negative())
            } else {
                positive_sum(self, &turned)
            };
        if integer && leading_negative {
            numerator.scale(&-BigRational::one());
            if small(q).is_none_or(|n| n % 2 != 0) {
                result.scale(&-BigRational::one());
            }
        }
        let base = numerator.shifted(&inside);
        if base.as_number().is_some_and(|c| c.is_one()) {
            return Some(result);
        }
        // Under a root an atom without a known sign may stand alone: x^(1/2) is itself.
        let atom = match base.0.iter().next() {
            Some((m, c)) if base.len() == 1 && c.is_one() && m.0.len() == 1 && m.0[0].1.is_one() => {
                m.0[0].0.clone()
            }
            _ => base.to_term(),
        };
        Some(result.shifted(&Monomial::atom(atom, small_exponent(q)?)))
    }
}

/// The kernel takes an exponential out of a sum under a root or a logarithm only if
/// all summands share it: gives back to the sum what was taken out otherwise.
fn with_own_exponentials(sum: Poly, outside: &Monomial) -> (Poly, Monomial) {
    let shared = |a: &Term| sum.terms().all(|(m, _)| m.exponent(a).is_zero());
    let (back, rest) = outside.partition(|a| matches!(a.node(), Node::Apply(Function::Exp, _)) && !shared(a));
    (sum.shifted(&back), rest)
}

/// The product, if its exponents are bearable.
fn bounded(m: Monomial) -> Option<Monomial> {
    let fits = |e: &Exponent| e.numer().abs() <= MAX_EXPONENT && *e.denom() <= MAX_EXPONENT;
    m.0.iter().all(|(_, e)| fits(e)).then_some(m)
}

fn positive_sum(algebra: &Algebra, p: &Poly) -> bool {
    (algebra.positive)(&p.to_term())
}

/// `c^q` for a positive rational c: primes with fractional exponents become atoms.
fn number_power(c: &BigRational, q: &BigRational) -> Option<Poly> {
    if c.is_one() {
        return Some(Poly::one());
    }
    if let Some(n) = small(q) {
        let n = i32::try_from(n).ok().filter(|n| n.unsigned_abs() <= 400)?;
        return Some(Poly::number(c.pow(n)));
    }
    let (mut number, mut atoms) = (BigRational::one(), Monomial::one());
    for (prime, n) in primes(c) {
        let e = q * BigRational::from_integer(n.into());
        let whole = e.floor();
        let n = whole.to_integer().to_i32().filter(|n| n.unsigned_abs() <= 400)?;
        number *= BigRational::from_integer(prime.clone()).pow(n);
        atoms = atoms.times(&Monomial::atom(Term::integer(prime), small_exponent(&(e - whole))?));
    }
    Some(Poly::single(number, atoms))
}

/// Prime factors below 1000 with their exponents; what is left counts as one prime.
fn primes(q: &BigRational) -> Vec<(BigInt, i64)> {
    let mut found: BTreeMap<BigInt, i64> = BTreeMap::new();
    for (part, sign) in [(q.numer(), 1), (q.denom(), -1)] {
        let mut rest = part.abs();
        let mut p = 2u32;
        while p < 1000 && !rest.is_one() {
            let divisor = BigInt::from(p);
            while (&rest % &divisor).is_zero() {
                rest /= &divisor;
                *found.entry(divisor.clone()).or_insert(0) += sign;
            }
            p += 1;
        }
        if !rest.is_one() {
            *found.entry(rest).or_insert(0) += sign;
        }
    }
    found.into_iter().filter(|(_, n)| *n != 0).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::sample::term;

    fn poly(text: &str, positive: &[&str]) -> Poly {
        let positive: Vec<Term> = positive.iter().map(|t| term(t)).collect();
        Algebra { positive: &|a| positive.contains(a) }.poly(&term(text)).unwrap()
    }

    #[test]
    fn quadratics_fall_into_linear_factors() {
        let signs = ["x + 1", "1 - x"];
        assert_eq!(poly("log(1 - x^2)", &signs), poly("log(1 + x) + log(1 - x)", &signs));
        assert_eq!(poly("sqrt(1 - x^2)", &signs), poly("sqrt(1 + x)*sqrt(1 - x)", &signs));
        assert_eq!(poly("1/(x^2 - 1)", &[]), poly("1/((x - 1)*(x + 1))", &[]));
        // The factors may both be negative.
        assert_ne!(poly("log(1 - x^2)", &[]), poly("log(1 + x) + log(1 - x)", &[]));
        assert_eq!(poly("log(x^2 + 1)", &[]).len(), 1);
    }

    #[test]
    fn common_powers_of_a_line() {
        let sum = poly("3*(x + 1)^2 - (x + 1)*(x + 2)*(x + 1)^(1/3)", &[]);
        let (power, left) = sum.common_power("x", &term("x + 1")).unwrap();
        assert_eq!(power, Exponent::new(4, 3));
        assert_eq!(left, poly("3*(x + 1)^(2/3) - x - 2", &[]));
        assert!(sum.common_power("x", &term("x + 2")).is_none());
        assert!(poly("exp(x) + x + 1", &[]).common_power("x", &term("x + 1")).is_none());
    }
}
