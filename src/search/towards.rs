//! How a term behaves towards an end of an interval of one variable: truncated
//! expansions in powers, logarithms and exponentials of a large quantity.
//!
//! The mirror of what the kernel does on its own when it checks an end's sign;
//! here it serves to foresee what the kernel will accept. Source: Hardy, Orders
//! of Infinity, 1910; NIST Digital Library of Mathematical Functions 5.11, 7.12.

use std::cmp::Ordering;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::Function;
use crate::expression::{Constant, Node, Term};
use crate::statement::{Rel, Relation};

use super::laurent::{Algebra, Poly};

#[derive(Clone, Copy, PartialEq, Eq)]
enum Is {
    Positive,
    Negative,
    NonZero,
}

/// Most terms kept of an expansion.
const MAX_TERMS: usize = 12;
/// Highest power of the small part in a Taylor expansion.
const ORDER: usize = 8;
/// The same for a first look.
const LOW_ORDER: usize = 4;

/// Where the variable tends to, always from inside its interval.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Place {
    /// To plus infinity.
    Above,
    /// To minus infinity.
    Below,
    /// Down to a finite lower end.
    From(Term),
    /// Up to a finite upper end.
    To(Term),
}

/// What a term tends to.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Tends {
    /// To the value of a term free of the variable.
    To(Term),
    /// To plus infinity.
    Up,
    /// To minus infinity.
    Down,
}

/// What shows a sign towards an end.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Claim {
    /// Nothing: the limit is 0.
    Free,
    /// The sign of a term without the variable.
    Needs(Relation),
}

/// The study of terms towards one end.
pub struct Towards<'a> {
    /// The strict sign of a term without the variable, where the kernel settles it
    /// without a proof.
    pub sign: &'a dyn Fn(&Term) -> Option<Ordering>,
    /// The variable.
    pub x: &'a str,
    /// The end.
    pub place: Place,
    /// Highest power of the small part; 0 for the usual one.
    pub order: usize,
}

/// `u^power (log u)^log exp(sum of c u^d)`, the sum by falling d.
#[derive(Clone, Debug, PartialEq, Eq)]
struct Scale {
    exponent: Vec<(BigRational, Term)>,
    power: BigRational,
    log: BigRational,
}

type Terms = Vec<(Term, Scale)>;

#[derive(Clone, Debug)]
struct Series {
    terms: Terms,
    rest: Option<Scale>,
}

impl Scale {
    fn one() -> Scale {
        Scale { exponent: vec![], power: BigRational::zero(), log: BigRational::zero() }
    }

    fn u(power: i64) -> Scale {
        Scale { power: BigRational::from_integer(power.into()), ..Scale::one() }
    }
}

impl Series {
    fn constant(c: Term) -> Series {
        Series { terms: if c == Term::integer(0) { vec![] } else { vec![(c, Scale::one())] }, rest: None }
    }

    fn number(n: i64) -> Series {
        Series::constant(Term::integer(n))
    }

    /// The largest scale it may have; none if it is exactly 0.
    fn top(&self) -> Option<&Scale> {
        self.terms.first().map(|t| &t.1).or(self.rest.as_ref())
    }
}

fn ratio(n: i64, d: i64) -> BigRational {
    BigRational::new(n.into(), d.into())
}

fn add_terms(a: &Term, b: &Term) -> Term {
    match (a.as_number(), b.as_number()) {
        (Some(p), Some(q)) => Term::number(p + q),
        (Some(p), _) if p.is_zero() => b.clone(),
        (_, Some(q)) if q.is_zero() => a.clone(),
        _ => a.add(b),
    }
}

fn multiply_terms(a: &Term, b: &Term) -> Term {
    match (a.as_number(), b.as_number()) {
        (Some(p), Some(q)) => Term::number(p * q),
        (Some(p), _) if p.is_one() => b.clone(),
        (_, Some(q)) if q.is_one() => a.clone(),
        (Some(p), _) if p.is_zero() => a.clone(),
        (_, Some(q)) if q.is_zero() => b.clone(),
        _ => a.multiply(b),
    }
}

fn pi() -> Term {
    Term::constant(Constant::Pi)
}

impl Towards<'_> {
    /// What the term tends to.
    #[must_use]
    pub fn limit(&self, term: &Term) -> Option<Tends> {
        let s = self.series(term)?;
        let Some((c, scale)) = s.terms.first() else {
            return match &s.rest {
                Some(r) if self.compare(r, &Scale::one())? == Ordering::Greater => None,
                _ => Some(Tends::To(Term::integer(0))),
            };
        };
        match self.compare(scale, &Scale::one())? {
            Ordering::Less => Some(Tends::To(Term::integer(0))),
            Ordering::Equal => Some(Tends::To(c.clone())),
            Ordering::Greater if self.is(c, Is::Positive) => Some(Tends::Up),
            Ordering::Greater if self.is(c, Is::Negative) => Some(Tends::Down),
            Ordering::Greater => None,
        }
    }

    /// The weak signs (true for `>= 0`) that the kernel will see near the end, each
    /// with what it still needs.
    #[must_use]
    pub fn claims(&self, term: &Term) -> Vec<(bool, Claim)> {
        let quick = Towards { order: LOW_ORDER, place: self.place.clone(), ..*self };
        let found = quick.claims_at_order(term);
        if found.is_empty() { self.claims_at_order(term) } else { found }
    }

    fn claims_at_order(&self, term: &Term) -> Vec<(bool, Claim)> {
        let Some(s) = self.series(term) else { return Vec::new() };
        let one = Scale::one();
        let Some((c, scale)) = s.terms.first() else {
            let small = s.rest.as_ref().is_none_or(|r| self.compare(r, &one) != Some(Ordering::Greater));
            return if small { vec![(true, Claim::Free), (false, Claim::Free)] } else { Vec::new() };
        };
        let strict = match self.compare(scale, &one) {
            Some(Ordering::Less) => return vec![(true, Claim::Free), (false, Claim::Free)],
            Some(Ordering::Equal) => false,
            Some(Ordering::Greater) => true,
            None => return Vec::new(),
        };
        let zero = Term::integer(0);
        let needs = |rel| Claim::Needs(Relation::new(c.clone(), rel, zero.clone()));
        match (self.sign)(c) {
            Some(Ordering::Greater) => {
                vec![(true, needs(if strict { Rel::Greater } else { Rel::GreaterEqual }))]
            }
            Some(Ordering::Less) => vec![(false, needs(if strict { Rel::Less } else { Rel::LessEqual }))],
            // Either, if it can be proved.
            _ if strict => vec![(true, needs(Rel::Greater)), (false, needs(Rel::Less))],
            _ => vec![(true, needs(Rel::GreaterEqual)), (false, needs(Rel::LessEqual))],
        }
    }

    fn poly(&self, c: &Term) -> Option<Poly> {
        Algebra { positive: &|a| (self.sign)(a) == Some(Ordering::Greater) }.poly(c)
    }

    fn is(&self, c: &Term, wanted: Is) -> bool {
        match (self.sign)(c) {
            Some(Ordering::Greater) => wanted != Is::Negative,
            Some(Ordering::Less) => wanted != Is::Positive,
            _ => false,
        }
    }

    fn is_zero(&self, c: &Term) -> Option<bool> {
        match c.as_number() {
            Some(q) => Some(q.is_zero()),
            None => {
                Some(Algebra { positive: &|a| (self.sign)(a) == Some(Ordering::Greater) }.poly(c)?.is_zero())
            }
        }
    }

    // Scales.

    fn times(&self, a: &Scale, b: &Scale) -> Option<Scale> {
        let mut exponent = a.exponent.clone();
        for (d, c) in &b.exponent {
            match exponent.iter().position(|(e, _)| e <= d) {
                Some(i) if exponent[i].0 == *d => {
                    let sum = add_terms(&exponent[i].1, c);
                    if self.is_zero(&sum)? {
                        exponent.remove(i);
                    } else {
                        exponent[i].1 = sum;
                    }
                }
                Some(i) => exponent.insert(i, (d.clone(), c.clone())),
                None => exponent.push((d.clone(), c.clone())),
            }
        }
        Some(Scale { exponent, power: &a.power + &b.power, log: &a.log + &b.log })
    }

    fn raised(&self, a: &Scale, p: &BigRational) -> Scale {
        if p.is_zero() {
            return Scale::one();
        }
        let exponent = a
            .exponent
            .iter()
            .map(|(d, c)| (d.clone(), multiply_terms(&Term::number(p.clone()), c)))
            .collect();
        Scale { exponent, power: &a.power * p, log: &a.log * p }
    }

    fn over(&self, a: &Scale, b: &Scale) -> Option<Scale> {
        self.times(a, &self.raised(b, &-BigRational::one()))
    }

    /// Which of two scales grows faster.
    fn compare(&self, a: &Scale, b: &Scale) -> Option<Ordering> {
        let q = self.over(a, b)?;
        if let Some((_, c)) = q.exponent.first() {
            return if self.is(c, Is::Positive) {
                Some(Ordering::Greater)
            } else if self.is(c, Is::Negative) {
                Some(Ordering::Less)
            } else {
                None
            };
        }
        let zero = BigRational::zero();
        Some(q.power.cmp(&zero).then(q.log.cmp(&zero)))
    }

    fn larger(&self, a: Option<Scale>, b: Option<Scale>) -> Option<Option<Scale>> {
        Some(match (a, b) {
            (Some(a), Some(b)) => Some(if self.compare(&a, &b)? == Ordering::Less { b } else { a }),
            (a, b) => a.or(b),
        })
    }

    // Series.

    /// Collects terms by scale, largest first, dropping what the rest covers.
    fn collect(&self, terms: Vec<(Term, Scale)>, mut rest: Option<Scale>) -> Option<Series> {
        let mut kept: Vec<(Term, Scale)> = Vec::new();
        for (c, scale) in terms {
            if let Some(r) = &rest
                && self.compare(&scale, r)? == Ordering::Less
            {
                continue;
            }
            let mut place = kept.len();
            let mut equal = false;
            for (i, (_, other)) in kept.iter().enumerate() {
                match self.compare(&scale, other)? {
                    Ordering::Less => continue,
                    order => {
                        (place, equal) = (i, order == Ordering::Equal);
                        break;
                    }
                }
            }
            if equal {
                kept[place].0 = add_terms(&kept[place].0, &c);
            } else {
                kept.insert(place, (c, scale));
            }
        }
        let mut nonzero = Vec::with_capacity(kept.len());
        for (c, scale) in kept {
            let c = match c.as_number() {
                Some(_) => c,
                // Otherwise the coefficients of products would grow and grow.
                None => {
                    let poly = self.poly(&c)?;
                    if poly.is_zero() { Term::integer(0) } else { poly.to_term() }
                }
            };
            if !c.is_zero() {
                nonzero.push((c, scale));
            }
        }
        let most = if self.order == 0 { MAX_TERMS } else { self.order + 2 };
        if nonzero.len() > most {
            nonzero.truncate(most);
            // What is dropped is smaller than the last scale kept.
            rest = nonzero.last().map(|t| t.1.clone());
        }
        Some(Series { terms: nonzero, rest })
    }

    fn sum(&self, a: Series, b: Series) -> Option<Series> {
        let rest = self.larger(a.rest, b.rest)?;
        self.collect(a.terms.into_iter().chain(b.terms).collect(), rest)
    }

    fn scaled(&self, a: Series, by: &Term) -> Option<Series> {
        self.product(&a, &Series::constant(by.clone()))
    }

    fn product(&self, a: &Series, b: &Series) -> Option<Series> {
        let (Some(top_a), Some(top_b)) = (a.top(), b.top()) else { return Some(Series::number(0)) };
        let left = match &a.rest {
            Some(r) => Some(self.times(r, top_b)?),
            None => None,
        };
        let right = match &b.rest {
            Some(r) => Some(self.times(r, top_a)?),
            None => None,
        };
        let rest = self.larger(left, right)?;
        let mut terms = Vec::with_capacity(a.terms.len() * b.terms.len());
        for (c, s) in &a.terms {
            for (d, t) in &b.terms {
                terms.push((multiply_terms(c, d), self.times(s, t)?));
            }
        }
        self.collect(terms, rest)
    }

    /// `sum of coefficients[k] small^k`, plus `o` of the last power.
    fn compose(&self, coefficients: &[Term], small: &Series) -> Option<Series> {
        let most = if self.order == 0 { ORDER } else { self.order };
        let coefficients = &coefficients[..coefficients.len().min(most + 1)];
        let Some(top) = small.top().cloned() else {
            return Some(Series::constant(coefficients[0].clone()));
        };
        let mut sum = Series::number(0);
        let mut power = Series::number(1);
        for (k, c) in coefficients.iter().enumerate() {
            if k > 0 {
                power = self.product(&power, small)?;
            }
            sum = self.sum(sum, self.scaled(power.clone(), c)?)?;
        }
        let last = BigRational::from_integer((coefficients.len() - 1).into());
        let rest = self.larger(sum.rest, Some(self.raised(&top, &last)))?;
        self.collect(sum.terms, rest)
    }

    /// Splits into `(c, S, small)` with `t = c S (1 + small)`.
    fn leading(&self, s: &Series) -> Option<(Term, Scale, Series)> {
        let (c, scale) = s.terms.first()?;
        if !self.is(c, Is::NonZero) {
            return None;
        }
        let inverse = Term::integer(1).divide(c);
        let mut terms = Vec::new();
        for (d, t) in &s.terms[1..] {
            terms.push((multiply_terms(d, &inverse), self.over(t, scale)?));
        }
        let rest = match &s.rest {
            Some(r) => Some(self.over(r, scale)?),
            None => None,
        };
        Some((c.clone(), scale.clone(), self.collect(terms, rest)?))
    }

    /// Splits into what grows, the constant, and what tends to 0.
    fn parts(&self, s: &Series) -> Option<(Terms, Term, Series)> {
        let (mut large, mut constant, mut small) = (Vec::new(), Term::integer(0), Vec::new());
        for (c, scale) in &s.terms {
            match self.compare(scale, &Scale::one())? {
                Ordering::Greater => large.push((c.clone(), scale.clone())),
                Ordering::Equal => constant = c.clone(),
                Ordering::Less => small.push((c.clone(), scale.clone())),
            }
        }
        if let Some(r) = &s.rest
            && self.compare(r, &Scale::one())? == Ordering::Greater
        {
            return None;
        }
        Some((large, constant, Series { terms: small, rest: s.rest.clone() }))
    }

    /// `s^p`. A power that is not an integer needs a positive leading coefficient.
    fn power(&self, s: &Series, p: &BigRational) -> Option<Series> {
        if p.is_integer() && p.is_positive() && *p <= ratio(8, 1) {
            let mut product = s.clone();
            for _ in 1..p.to_integer().iter_u64_digits().next().unwrap_or(1) {
                product = self.product(&product, s)?;
            }
            return Some(product);
        }
        let (c, scale, small) = self.leading(s)?;
        if !p.is_integer() && !self.is(&c, Is::Positive) {
            return None;
        }
        let mut binomials = vec![Term::integer(1)];
        let mut last = BigRational::one();
        for k in 0..ORDER as i64 {
            last = last * (p - ratio(k, 1)) / ratio(k + 1, 1);
            binomials.push(Term::number(last.clone()));
        }
        let lead = match (c.as_number(), p.is_integer()) {
            (Some(q), _) if q.is_one() => c.clone(),
            (Some(q), true) if p.abs() <= ratio(64, 1) => {
                let n = p.to_integer();
                let n: i32 = n.try_into().unwrap_or(1);
                Term::number(q.pow(n))
            }
            _ => c.power(&Term::number(p.clone())),
        };
        let front = Series { terms: vec![(lead, self.raised(&scale, p))], rest: None };
        self.product(&front, &self.compose(&binomials, &small)?)
    }

    fn inverse(&self, s: &Series) -> Option<Series> {
        self.power(s, &-BigRational::one())
    }

    fn log(&self, s: &Series) -> Option<Series> {
        let (c, scale, small) = self.leading(s)?;
        if !self.is(&c, Is::Positive) {
            return None;
        }
        if !scale.log.is_zero() {
            return None;
        }
        let mut terms: Vec<(Term, Scale)> = scale
            .exponent
            .iter()
            .map(|(d, c)| (c.clone(), Scale { power: d.clone(), ..Scale::one() }))
            .collect();
        if !scale.power.is_zero() {
            terms
                .push((Term::number(scale.power.clone()), Scale { log: BigRational::one(), ..Scale::one() }));
        }
        if c != Term::integer(1) {
            terms.push((Term::apply1(Function::Log, &c), Scale::one()));
        }
        let mut coefficients = vec![Term::integer(0)];
        coefficients
            .extend((1..=ORDER as i64).map(|k| Term::number(ratio(if k % 2 == 1 { 1 } else { -1 }, k))));
        self.sum(Series { terms, rest: None }, self.compose(&coefficients, &small)?)
    }

    fn exp(&self, s: &Series) -> Option<Series> {
        let (large, constant, small) = self.parts(s)?;
        let mut scale = Scale::one();
        for (c, part) in large {
            if part.exponent.is_empty() && part.log.is_zero() {
                scale.exponent.push((part.power, c));
            } else if let (true, true, true, Some(q)) =
                (part.exponent.is_empty(), part.power.is_zero(), part.log.is_one(), c.as_number())
            {
                scale.power = q.clone();
            } else {
                return None;
            }
        }
        let front = if constant == Term::integer(0) {
            Term::integer(1)
        } else {
            Term::apply1(Function::Exp, &constant)
        };
        let front = Series { terms: vec![(front, scale)], rest: None };
        self.product(&front, &self.compose(&factorials(|_| 1), &small)?)
    }

    fn sine_cosine(&self, s: &Series) -> Option<(Series, Series)> {
        let (large, c, small) = self.parts(s)?;
        if !large.is_empty() {
            return None;
        }
        let sine = self.compose(&factorials(|k| [0, 1, 0, -1][k % 4]), &small)?;
        let cosine = self.compose(&factorials(|k| [1, 0, -1, 0][k % 4]), &small)?;
        let (sin_c, cos_c) = self.sine_cosine_at(&c)?;
        let a = self.sum(self.scaled(cosine.clone(), &sin_c)?, self.scaled(sine.clone(), &cos_c)?)?;
        let b = self.sum(
            self.scaled(cosine, &cos_c)?,
            self.scaled(sine, &multiply_terms(&Term::integer(-1), &sin_c))?,
        )?;
        Some((a, b))
    }

    /// Exact at multiples of pi/2 from -2 pi to 2 pi.
    fn sine_cosine_at(&self, c: &Term) -> Option<(Term, Term)> {
        for q in -4..=4_i64 {
            let angle = Term::number(ratio(q, 2)).multiply(&pi());
            let hit = if q == 0 { self.is_zero(c)? } else { self.is_zero(&c.subtract(&angle))? };
            if hit {
                let turn = q.rem_euclid(4) as usize;
                return Some((Term::integer([0, 1, 0, -1][turn]), Term::integer([1, 0, -1, 0][turn])));
            }
        }
        Some((Term::apply1(Function::Sin, c), Term::apply1(Function::Cos, c)))
    }

    fn atan(&self, s: &Series) -> Option<Series> {
        let (large, c, small) = self.parts(s)?;
        let series = |small: &Series| {
            let mut coefficients = vec![Term::integer(0)];
            for k in 1..=ORDER as i64 {
                coefficients.push(Term::number(ratio([0, 1, 0, -1][(k % 4) as usize], k)));
            }
            self.compose(&coefficients, small)
        };
        if let Some((lead, _)) = large.first() {
            let half = if self.is(lead, Is::Positive) {
                ratio(1, 2)
            } else if self.is(lead, Is::Negative) {
                ratio(-1, 2)
            } else {
                return None;
            };
            let quarter = Term::number(half).multiply(&pi());
            let small = series(&self.inverse(s)?)?;
            return self.sum(Series::constant(quarter), self.scaled(small, &Term::integer(-1))?);
        }
        if self.is_zero(&c)? {
            return series(&small);
        }
        // atan(c + d) = atan c + atan(d / (1 + c (c + d))) once the divisor is positive.
        let divisor = self.sum(Series::number(1), self.scaled(s.clone(), &c)?)?;
        let turned = self.product(&small, &self.inverse(&divisor)?)?;
        self.sum(Series::constant(Term::apply1(Function::Atan, &c)), series(&turned)?)
    }

    fn erfc(&self, s: &Series) -> Option<Series> {
        let (large, c, small) = self.parts(s)?;
        let over_root_pi = Term::integer(1).divide(&Term::apply1(Function::Sqrt, &pi()));
        let Some((lead, _)) = large.first() else {
            if !self.is_zero(&c)? {
                return self.value(Function::Erfc, &[c]);
            }
            let mut coefficients = vec![Term::integer(1)];
            let mut factorial = BigRational::one();
            for k in 1..=ORDER as i64 {
                let n = (k - 1) / 2;
                if k % 2 == 0 {
                    coefficients.push(Term::integer(0));
                    factorial *= ratio(-k / 2, 1);
                } else {
                    let q = ratio(-2, 2 * n + 1) / &factorial;
                    coefficients.push(multiply_terms(&Term::number(q), &over_root_pi));
                }
            }
            return self.compose(&coefficients, &small);
        };
        if self.is(lead, Is::Negative) {
            let mirrored = self.erfc(&self.scaled(s.clone(), &Term::integer(-1))?)?;
            return self.sum(Series::number(2), self.scaled(mirrored, &Term::integer(-1))?);
        }
        if !self.is(lead, Is::Positive) {
            return None;
        }
        let square = self.product(s, s)?;
        let inverse = self.inverse(s)?;
        let mut coefficients = vec![Term::integer(1)];
        let mut last = BigRational::one();
        for k in 1..=4_i64 {
            last *= ratio(-(2 * k - 1), 2);
            coefficients.push(Term::number(last.clone()));
        }
        let tail = self.compose(&coefficients, &self.inverse(&square)?)?;
        let bell = self.exp(&self.scaled(square, &Term::integer(-1))?)?;
        self.scaled(self.product(&self.product(&bell, &inverse)?, &tail)?, &over_root_pi)
    }

    /// Towards infinity: `lgamma t` and `digamma t`.
    fn stirling(&self, s: &Series) -> Option<(Series, Series)> {
        let (large, _, _) = self.parts(s)?;
        if !large.first().is_some_and(|(c, _)| self.is(c, Is::Positive)) {
            return None;
        }
        let (log, inverse) = (self.log(s)?, self.inverse(s)?);
        let numbers = |list: &[(i64, i64)]| -> Vec<Term> {
            list.iter().map(|&(n, d)| Term::number(ratio(n, d))).collect()
        };
        let tail = self.compose(
            &numbers(&[(0, 1), (1, 12), (0, 1), (-1, 360), (0, 1), (1, 1260), (0, 1), (-1, 1680)]),
            &inverse,
        )?;
        let slope_tail = self
            .compose(&numbers(&[(0, 1), (-1, 2), (-1, 12), (0, 1), (1, 120), (0, 1), (-1, 252)]), &inverse)?;
        let half_log_two_pi =
            Term::apply1(Function::Log, &Term::integer(2).multiply(&pi())).divide(&Term::integer(2));
        let shifted = self.sum(s.clone(), Series::constant(Term::number(ratio(-1, 2))))?;
        let main = self.sum(self.product(&shifted, &log)?, self.scaled(s.clone(), &Term::integer(-1))?)?;
        let value = self.sum(self.sum(main, Series::constant(half_log_two_pi))?, tail)?;
        Some((value, self.sum(log, slope_tail)?))
    }

    /// `f(c) + o(1)` for a function continuous on its domain, defined at the limit.
    fn value(&self, f: Function, limits: &[Term]) -> Option<Series> {
        let value = Term::apply(f, limits.to_vec());
        Some(Series { terms: Series::constant(value).terms, rest: Some(Scale::one()) })
    }

    fn series(&self, t: &Term) -> Option<Series> {
        if !t.mentions(self.x) {
            return Some(Series::constant(t.clone()));
        }
        let minus = Term::integer(-1);
        let half = ratio(1, 2);
        match t.node() {
            Node::Variable(_) => {
                let step =
                    |c: i64, p: i64| Series { terms: vec![(Term::integer(c), Scale::u(p))], rest: None };
                match &self.place {
                    Place::Above => Some(step(1, 1)),
                    Place::Below => Some(step(-1, 1)),
                    Place::From(a) => self.sum(Series::constant(a.clone()), step(1, -1)),
                    Place::To(b) => self.sum(Series::constant(b.clone()), step(-1, -1)),
                }
            }
            Node::Negate(a) => self.scaled(self.series(a)?, &minus),
            Node::Add(a, b) => self.sum(self.series(a)?, self.series(b)?),
            Node::Subtract(a, b) => self.sum(self.series(a)?, self.scaled(self.series(b)?, &minus)?),
            Node::Multiply(a, b) => self.product(&self.series(a)?, &self.series(b)?),
            Node::Divide(a, b) => self.product(&self.series(a)?, &self.inverse(&self.series(b)?)?),
            Node::Power(b, p) => match (b.node(), p.as_number()) {
                (_, Some(q)) if q.is_zero() => Some(Series::number(1)),
                (_, Some(q)) => self.power(&self.series(b)?, q),
                (Node::Constant(Constant::E), _) => self.exp(&self.series(p)?),
                _ => {
                    let log = self.log(&self.series(b)?)?;
                    self.exp(&self.product(&self.series(p)?, &log)?)
                }
            },
            Node::Apply(f, args) => {
                if args.len() != 1 {
                    return match f {
                        Function::Min | Function::Max => self.pointwise(*f, args),
                        _ => None,
                    };
                }
                let a = self.series(&args[0])?;
                let one = || Series::number(1);
                let asin = |a: &Series| {
                    let rest = self.sum(one(), self.scaled(self.product(a, a)?, &minus)?)?;
                    self.atan(&self.product(a, &self.power(&rest, &-half.clone())?)?)
                };
                let grown = |shift: i64| {
                    let root = self.power(&self.sum(Series::number(shift), self.product(&a, &a)?)?, &half)?;
                    self.log(&self.sum(a.clone(), root)?)
                };
                match f {
                    Function::Exp => self.exp(&a),
                    Function::Log => self.log(&a),
                    Function::Log2 => {
                        let log_two = Term::apply1(Function::Log, &Term::integer(2));
                        self.scaled(self.log(&a)?, &Term::integer(1).divide(&log_two))
                    }
                    Function::Sqrt => self.power(&a, &half),
                    Function::Sinh | Function::Cosh => {
                        let (up, down) = (self.exp(&a)?, self.exp(&self.scaled(a, &minus)?)?);
                        let down = if *f == Function::Sinh { self.scaled(down, &minus)? } else { down };
                        self.scaled(self.sum(up, down)?, &Term::number(half))
                    }
                    Function::Tanh => {
                        let e = self.exp(&self.scaled(a, &Term::integer(2))?)?;
                        let top = self.sum(e.clone(), Series::number(-1))?;
                        self.product(&top, &self.inverse(&self.sum(e, one())?)?)
                    }
                    Function::Sin => Some(self.sine_cosine(&a)?.0),
                    Function::Cos => Some(self.sine_cosine(&a)?.1),
                    Function::Tan => {
                        let (sine, cosine) = self.sine_cosine(&a)?;
                        self.product(&sine, &self.inverse(&cosine)?)
                    }
                    Function::Atan => self.atan(&a),
                    Function::Asin => asin(&a),
                    Function::Acos => {
                        let quarter = Series::constant(Term::number(half.clone()).multiply(&pi()));
                        self.sum(quarter, self.scaled(asin(&a)?, &minus)?)
                    }
                    Function::Asinh => grown(1),
                    Function::Acosh => grown(-1),
                    Function::Atanh => {
                        let up = self.log(&self.sum(one(), a.clone())?)?;
                        let down = self.log(&self.sum(one(), self.scaled(a, &minus)?)?)?;
                        self.scaled(self.sum(up, self.scaled(down, &minus)?)?, &Term::number(half))
                    }
                    Function::Erfc => self.erfc(&a),
                    Function::Erf => self.sum(one(), self.scaled(self.erfc(&a)?, &minus)?),
                    Function::Gamma | Function::Lgamma | Function::Digamma => {
                        let (large, c, _) = self.parts(&a)?;
                        match f {
                            _ if large.is_empty() => self.value(*f, &[c]),
                            Function::Gamma => self.exp(&self.stirling(&a)?.0),
                            Function::Lgamma => Some(self.stirling(&a)?.0),
                            _ => Some(self.stirling(&a)?.1),
                        }
                    }
                    Function::Abs => match a.terms.first() {
                        Some((c, _)) if self.is(c, Is::Positive) => Some(a),
                        Some((c, _)) if self.is(c, Is::Negative) => self.scaled(a, &minus),
                        _ => self.pointwise(*f, args),
                    },
                    _ => None,
                }
            }
            _ => None,
        }
    }

    fn pointwise(&self, f: Function, args: &[Term]) -> Option<Series> {
        let mut limits = Vec::new();
        for a in args {
            let (large, c, _) = self.parts(&self.series(a)?)?;
            if !large.is_empty() {
                return None;
            }
            limits.push(c);
        }
        self.value(f, &limits)
    }
}

/// `pattern(k)/k!` for k up to ORDER; `pattern` is 1 throughout for exp.
fn factorials(pattern: impl Fn(usize) -> i64) -> Vec<Term> {
    let mut factorial = BigInt::one();
    (0..=ORDER)
        .map(|k| {
            if k > 0 {
                factorial *= k;
            }
            Term::number(BigRational::new(pattern(k).into(), factorial.clone()))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::expression::evaluate::at;
    use crate::expression::sample::term;
    use crate::statement::{Conclusion, Sequent};

    fn limit(text: &str, place: Place) -> Option<Tends> {
        let nothing = Sequent { variables: vec![], hypotheses: vec![], goal: Conclusion::Absurd };
        let sign = |t: &Term| {
            let v = at(t, &[], &[], &nothing, 100)?;
            if v.is_certainly_positive() {
                Some(Ordering::Greater)
            } else {
                v.is_certainly_negative().then_some(Ordering::Less)
            }
        };
        Towards { sign: &sign, x: "x", place, order: 0 }.limit(&term(text))
    }

    #[test]
    fn limits() {
        let one = || Place::To(Term::integer(1));
        let zero = || Place::From(Term::integer(0));
        let number = |n: i64, d: i64| Some(Tends::To(Term::ratio(n, d)));
        assert_eq!(limit("pi*x/2 - asin(x)", one()), number(0, 1));
        assert_eq!(limit("x/sqrt(1 - x^2)", one()), Some(Tends::Up));
        assert_eq!(limit("log(1 + exp(x)) - x", Place::Above), number(0, 1));
        assert_eq!(limit("x*exp(x^2)*erfc(x) - 1/sqrt(pi)", Place::Above), number(0, 1));
        assert_eq!(limit("sqrt(x^2 + x) - x", Place::Above), number(1, 2));
        assert_eq!(limit("(x - sin(x))/x^3", zero()), number(1, 6));
        assert_eq!(limit("x*log(x)", zero()), number(0, 1));
        assert_eq!(limit("exp(x) - x^100", Place::Above), Some(Tends::Up));
        assert_eq!(limit("sin(x)", Place::Above), None);
    }
}
