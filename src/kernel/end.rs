//! How a term behaves towards an end of an interval of one variable (R19).
//!
//! Statement: for each fixed value of the other variables, towards the end in
//! question, `t = c_1 S_1 + .. + c_n S_n + o(R)`, where the coefficients are free
//! of the variable, the scales fall strictly and are of the form
//! `u^p (log u)^q exp(a_1 u^d_1 + ..)` with `d_j > 0`, and `u` tends to infinity
//! (`x = u`, `-u`, `a + 1/u` or `b - 1/u`). Without `R` the expansion is exact.
//!
//! Sound: sums and products of such expansions are again such expansions, the
//! largest neglected scale being kept as `R`; a reciprocal, a power, a logarithm and
//! an exponential are taken of the leading part exactly and of `1 + small` by
//! Taylor's theorem, whose remainder is `o` of the last power kept. Signs that
//! matter (a divisor's leading coefficient is not 0, a logarithm's is positive,
//! which scale is larger) are proved, never sampled; what is not decided is
//! refused. Nothing is claimed uniformly in the other variables.
//! Sources: Hardy, Orders of Infinity, 1910; for erfc, lgamma and digamma NIST
//! Digital Library of Mathematical Functions 7.12.1, 5.11.1, 5.11.2 (asymptotic
//! expansions in the sense of Poincare). From memory except the numbers cited.
//! Forgotten: infinity - infinity taken as 0; a leading coefficient that cancels
//! numerically but not exactly; a limit with other variables moving too.

use std::cmp::Ordering;

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use super::defined::require_defined;
use super::number::Function;
use super::rule::{Kernel, check};
use super::sequent::{Rel, Relation, Sequent};
use super::step::Step;
use super::term::{Constant, Node, Term};
use super::verdict::{Checked, Reason, refuse};
use super::{normal, sign};

/// Most terms kept of an expansion.
const MAX_TERMS: usize = 12;
/// Highest power of the small part in a Taylor expansion.
const ORDER: usize = 8;

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

/// The study of terms towards one end.
pub struct Towards<'a> {
    /// Gamma without the variable.
    pub base: &'a Sequent,
    /// The variable.
    pub x: &'a str,
    /// The end.
    pub place: Place,
    /// For work and signatures.
    pub kernel: &'a Kernel,
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
        Series { terms: if c == Term::zero() { vec![] } else { vec![(c, Scale::one())] }, rest: None }
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
    Node::Constant(Constant::Pi).into()
}

fn undecided<T>(what: &str) -> Checked<T> {
    refuse(Reason::Condition, format!("the behaviour towards the end is not decided: {what}"))
}

impl Towards<'_> {
    /// What the term tends to; for an infinite limit the sign of the leading
    /// coefficient must be settled.
    pub fn limit(&self, term: &Term) -> Checked<Tends> {
        let s = self.series(term)?;
        let Some((c, scale)) = s.terms.first() else {
            return match &s.rest {
                Some(r) if self.compare(r, &Scale::one())? == Ordering::Greater => {
                    undecided("no leading term")
                }
                _ => Ok(Tends::To(Term::zero())),
            };
        };
        match self.compare(scale, &Scale::one())? {
            Ordering::Less => Ok(Tends::To(Term::zero())),
            Ordering::Equal => Ok(Tends::To(c.clone())),
            Ordering::Greater if self.is(c, Rel::Gt) => Ok(Tends::Up),
            Ordering::Greater if self.is(c, Rel::Lt) => Ok(Tends::Down),
            Ordering::Greater => undecided(&format!("the sign of {c}")),
        }
    }

    /// Shows `liminf t >= 0` (`plus`) or `limsup t <= 0`; `proof` is for the sign of
    /// a finite limit or of a leading coefficient that is not settled quickly.
    pub fn has_sign(&self, term: &Term, plus: bool, proof: Option<&Step>) -> Checked {
        let s = self.series(term)?;
        let Some((c, scale)) = s.terms.first() else {
            return self.limit(term).map(|_| ());
        };
        let (weak, strict) = if plus { (Rel::Ge, Rel::Gt) } else { (Rel::Le, Rel::Lt) };
        let rel = match self.compare(scale, &Scale::one())? {
            Ordering::Less => return Ok(()),
            Ordering::Equal => weak,
            // The coefficient might be 0, and the next terms large.
            Ordering::Greater => strict,
        };
        if self.is(c, rel) {
            return Ok(());
        }
        let goal = Relation::new(c.clone(), rel, Term::zero());
        match proof {
            Some(step) => check(&self.base.with_goal(goal), step, self.kernel),
            None => undecided(&format!("{goal} is not settled")),
        }
    }

    fn is(&self, c: &Term, rel: Rel) -> bool {
        sign::settles(self.base, &Relation::new(c.clone(), rel, Term::zero()))
    }

    fn is_zero(&self, c: &Term) -> Checked<bool> {
        match c.as_number() {
            Some(q) => Ok(q.is_zero()),
            None => Ok(normal::normal_in(self.base, c)?.is_zero()),
        }
    }

    // Scales.

    fn times(&self, a: &Scale, b: &Scale) -> Checked<Scale> {
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
        Ok(Scale { exponent, power: &a.power + &b.power, log: &a.log + &b.log })
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

    fn over(&self, a: &Scale, b: &Scale) -> Checked<Scale> {
        self.times(a, &self.raised(b, &-BigRational::one()))
    }

    /// Which of two scales grows faster.
    fn compare(&self, a: &Scale, b: &Scale) -> Checked<Ordering> {
        let q = self.over(a, b)?;
        if let Some((_, c)) = q.exponent.first() {
            return if self.is(c, Rel::Gt) {
                Ok(Ordering::Greater)
            } else if self.is(c, Rel::Lt) {
                Ok(Ordering::Less)
            } else {
                undecided(&format!("the sign of {c}"))
            };
        }
        let zero = BigRational::zero();
        Ok(q.power.cmp(&zero).then(q.log.cmp(&zero)))
    }

    fn larger(&self, a: Option<Scale>, b: Option<Scale>) -> Checked<Option<Scale>> {
        Ok(match (a, b) {
            (Some(a), Some(b)) => Some(if self.compare(&a, &b)? == Ordering::Less { b } else { a }),
            (a, b) => a.or(b),
        })
    }

    // Series.

    /// Collects terms by scale, largest first, dropping what the rest covers.
    fn collect(&self, terms: Vec<(Term, Scale)>, mut rest: Option<Scale>) -> Checked<Series> {
        self.kernel.spend(10 + 10 * terms.len() as u64)?;
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
                None => normal::normal_in(self.base, &c)?.to_term(),
            };
            if c != Term::zero() {
                nonzero.push((c, scale));
            }
        }
        if nonzero.len() > MAX_TERMS {
            nonzero.truncate(MAX_TERMS);
            // What is dropped is smaller than the last scale kept.
            rest = nonzero.last().map(|t| t.1.clone());
        }
        Ok(Series { terms: nonzero, rest })
    }

    fn sum(&self, a: Series, b: Series) -> Checked<Series> {
        let rest = self.larger(a.rest, b.rest)?;
        self.collect(a.terms.into_iter().chain(b.terms).collect(), rest)
    }

    fn scaled(&self, a: Series, by: &Term) -> Checked<Series> {
        self.product(&a, &Series::constant(by.clone()))
    }

    fn product(&self, a: &Series, b: &Series) -> Checked<Series> {
        let (Some(top_a), Some(top_b)) = (a.top(), b.top()) else { return Ok(Series::number(0)) };
        let left = a.rest.as_ref().map(|r| self.times(r, top_b)).transpose()?;
        let right = b.rest.as_ref().map(|r| self.times(r, top_a)).transpose()?;
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
    fn compose(&self, coefficients: &[Term], small: &Series) -> Checked<Series> {
        let Some(top) = small.top().cloned() else {
            return Ok(Series::constant(coefficients[0].clone()));
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
    fn leading(&self, s: &Series) -> Checked<(Term, Scale, Series)> {
        let Some((c, scale)) = s.terms.first() else { return undecided("no leading term") };
        if !self.is(c, Rel::Ne) {
            return undecided(&format!("whether {c} is 0"));
        }
        let inverse = Term::integer(1).divide(c);
        let mut terms = Vec::new();
        for (d, t) in &s.terms[1..] {
            terms.push((multiply_terms(d, &inverse), self.over(t, scale)?));
        }
        let rest = s.rest.as_ref().map(|r| self.over(r, scale)).transpose()?;
        Ok((c.clone(), scale.clone(), self.collect(terms, rest)?))
    }

    /// Splits into what grows, the constant, and what tends to 0.
    fn parts(&self, s: &Series) -> Checked<(Terms, Term, Series)> {
        let (mut large, mut constant, mut small) = (Vec::new(), Term::zero(), Vec::new());
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
            return undecided("too few terms are known");
        }
        Ok((large, constant, Series { terms: small, rest: s.rest.clone() }))
    }

    /// `s^p`. A power that is not an integer needs a positive leading coefficient.
    fn power(&self, s: &Series, p: &BigRational) -> Checked<Series> {
        if p.is_integer() && p.is_positive() && *p <= ratio(8, 1) {
            let mut product = s.clone();
            for _ in 1..p.to_integer().iter_u64_digits().next().unwrap_or(1) {
                product = self.product(&product, s)?;
            }
            return Ok(product);
        }
        let (c, scale, small) = self.leading(s)?;
        if !p.is_integer() && !self.is(&c, Rel::Gt) {
            return undecided(&format!("whether {c} is positive"));
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

    fn inverse(&self, s: &Series) -> Checked<Series> {
        self.power(s, &-BigRational::one())
    }

    fn log(&self, s: &Series) -> Checked<Series> {
        let (c, scale, small) = self.leading(s)?;
        if !self.is(&c, Rel::Gt) {
            return undecided(&format!("whether {c} is positive"));
        }
        if !scale.log.is_zero() {
            return undecided("a logarithm of a logarithm");
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
            terms.push((Term::apply(Function::Log, &c), Scale::one()));
        }
        let mut coefficients = vec![Term::zero()];
        coefficients
            .extend((1..=ORDER as i64).map(|k| Term::number(ratio(if k % 2 == 1 { 1 } else { -1 }, k))));
        self.sum(Series { terms, rest: None }, self.compose(&coefficients, &small)?)
    }

    fn exp(&self, s: &Series) -> Checked<Series> {
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
                return undecided("an exponential of such growth");
            }
        }
        let front =
            if constant == Term::zero() { Term::integer(1) } else { Term::apply(Function::Exp, &constant) };
        let front = Series { terms: vec![(front, scale)], rest: None };
        self.product(&front, &self.compose(&factorials(|_| 1), &small)?)
    }

    fn sine_cosine(&self, s: &Series) -> Checked<(Series, Series)> {
        let (large, c, small) = self.parts(s)?;
        if !large.is_empty() {
            return undecided("an oscillation");
        }
        let sine = self.compose(&factorials(|k| [0, 1, 0, -1][k % 4]), &small)?;
        let cosine = self.compose(&factorials(|k| [1, 0, -1, 0][k % 4]), &small)?;
        let (sin_c, cos_c) = self.sine_cosine_at(&c)?;
        let a = self.sum(self.scaled(cosine.clone(), &sin_c)?, self.scaled(sine.clone(), &cos_c)?)?;
        let b = self.sum(
            self.scaled(cosine, &cos_c)?,
            self.scaled(sine, &multiply_terms(&Term::integer(-1), &sin_c))?,
        )?;
        Ok((a, b))
    }

    /// Exact at multiples of pi/2 from -2 pi to 2 pi.
    fn sine_cosine_at(&self, c: &Term) -> Checked<(Term, Term)> {
        for q in -4..=4_i64 {
            let angle = Term::number(ratio(q, 2)).multiply(&pi());
            let hit = if q == 0 { self.is_zero(c)? } else { self.is_zero(&c.subtract(&angle))? };
            if hit {
                let turn = q.rem_euclid(4) as usize;
                return Ok((Term::integer([0, 1, 0, -1][turn]), Term::integer([1, 0, -1, 0][turn])));
            }
        }
        Ok((Term::apply(Function::Sin, c), Term::apply(Function::Cos, c)))
    }

    fn atan(&self, s: &Series) -> Checked<Series> {
        let (large, c, small) = self.parts(s)?;
        let series = |small: &Series| {
            let mut coefficients = vec![Term::zero()];
            for k in 1..=ORDER as i64 {
                coefficients.push(Term::number(ratio([0, 1, 0, -1][(k % 4) as usize], k)));
            }
            self.compose(&coefficients, small)
        };
        if let Some((lead, _)) = large.first() {
            let half = if self.is(lead, Rel::Gt) {
                ratio(1, 2)
            } else if self.is(lead, Rel::Lt) {
                ratio(-1, 2)
            } else {
                return undecided(&format!("the sign of {lead}"));
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
        self.sum(Series::constant(Term::apply(Function::Atan, &c)), series(&turned)?)
    }

    fn erfc(&self, s: &Series) -> Checked<Series> {
        let (large, c, small) = self.parts(s)?;
        let over_root_pi = Term::integer(1).divide(&Term::apply(Function::Sqrt, &pi()));
        let Some((lead, _)) = large.first() else {
            if !self.is_zero(&c)? {
                return self.value(Function::Erfc, &[c]);
            }
            let mut coefficients = vec![Term::integer(1)];
            let mut factorial = BigRational::one();
            for k in 1..=ORDER as i64 {
                let n = (k - 1) / 2;
                if k % 2 == 0 {
                    coefficients.push(Term::zero());
                    factorial *= ratio(-k / 2, 1);
                } else {
                    let q = ratio(-2, 2 * n + 1) / &factorial;
                    coefficients.push(multiply_terms(&Term::number(q), &over_root_pi));
                }
            }
            return self.compose(&coefficients, &small);
        };
        if self.is(lead, Rel::Lt) {
            let mirrored = self.erfc(&self.scaled(s.clone(), &Term::integer(-1))?)?;
            return self.sum(Series::number(2), self.scaled(mirrored, &Term::integer(-1))?);
        }
        if !self.is(lead, Rel::Gt) {
            return undecided(&format!("the sign of {lead}"));
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
    fn stirling(&self, s: &Series) -> Checked<(Series, Series)> {
        let (large, _, _) = self.parts(s)?;
        if !large.first().is_some_and(|(c, _)| self.is(c, Rel::Gt)) {
            return undecided("an argument that does not grow");
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
            Term::apply(Function::Log, &Term::integer(2).multiply(&pi())).divide(&Term::integer(2));
        let shifted = self.sum(s.clone(), Series::constant(Term::number(ratio(-1, 2))))?;
        let main = self.sum(self.product(&shifted, &log)?, self.scaled(s.clone(), &Term::integer(-1))?)?;
        let value = self.sum(self.sum(main, Series::constant(half_log_two_pi))?, tail)?;
        Ok((value, self.sum(log, slope_tail)?))
    }

    /// `f(c) + o(1)` for a function continuous on its domain, defined at the limit.
    fn value(&self, f: Function, limits: &[Term]) -> Checked<Series> {
        let value: Term = Node::Apply(f, limits.to_vec()).into();
        require_defined(self.base, &[&value], None, self.kernel)?;
        Ok(Series { terms: Series::constant(value).terms, rest: Some(Scale::one()) })
    }

    fn series(&self, t: &Term) -> Checked<Series> {
        self.kernel.spend(20)?;
        if !t.mentions(self.x) {
            return Ok(Series::constant(t.clone()));
        }
        let minus = Term::integer(-1);
        let half = ratio(1, 2);
        match &**t {
            Node::Variable(_) => {
                let step =
                    |c: i64, p: i64| Series { terms: vec![(Term::integer(c), Scale::u(p))], rest: None };
                match &self.place {
                    Place::Above => Ok(step(1, 1)),
                    Place::Below => Ok(step(-1, 1)),
                    Place::From(a) => self.sum(Series::constant(a.clone()), step(1, -1)),
                    Place::To(b) => self.sum(Series::constant(b.clone()), step(-1, -1)),
                }
            }
            Node::Negate(a) => self.scaled(self.series(a)?, &minus),
            Node::Add(a, b) => self.sum(self.series(a)?, self.series(b)?),
            Node::Subtract(a, b) => self.sum(self.series(a)?, self.scaled(self.series(b)?, &minus)?),
            Node::Multiply(a, b) => self.product(&self.series(a)?, &self.series(b)?),
            Node::Divide(a, b) => self.product(&self.series(a)?, &self.inverse(&self.series(b)?)?),
            Node::Power(b, p) => match (&**b, p.as_number()) {
                (_, Some(q)) if q.is_zero() => Ok(Series::number(1)),
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
                        _ => undecided(f.name()),
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
                        let log_two = Term::apply(Function::Log, &Term::integer(2));
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
                    Function::Sin => Ok(self.sine_cosine(&a)?.0),
                    Function::Cos => Ok(self.sine_cosine(&a)?.1),
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
                            Function::Lgamma => Ok(self.stirling(&a)?.0),
                            _ => Ok(self.stirling(&a)?.1),
                        }
                    }
                    Function::Abs => match a.terms.first() {
                        Some((c, _)) if self.is(c, Rel::Gt) => Ok(a),
                        Some((c, _)) if self.is(c, Rel::Lt) => self.scaled(a, &minus),
                        _ => self.pointwise(*f, args),
                    },
                    _ => undecided(f.name()),
                }
            }
            _ => undecided(&t.to_string()),
        }
    }

    fn pointwise(&self, f: Function, args: &[Term]) -> Checked<Series> {
        let mut limits = Vec::new();
        for a in args {
            let (large, c, _) = self.parts(&self.series(a)?)?;
            if !large.is_empty() {
                return undecided(f.name());
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
    use std::collections::BTreeMap;

    use super::*;
    use crate::kernel::sample::sequent;

    fn limit_of(base: &str, text: &str, place: &str) -> Checked<Tends> {
        let base = sequent(&format!("{base} | | 0 <= 0"));
        let kernel = Kernel::new(BTreeMap::new());
        let read = |t: &str| crate::kernel::read::term(t).unwrap();
        let place = match place.split_once(' ') {
            Some(("from", a)) => Place::From(read(a)),
            Some((_, b)) => Place::To(read(b)),
            None if place == "inf" => Place::Above,
            None => Place::Below,
        };
        let towards = Towards { base: &base, x: "x", place, kernel: &kernel };
        towards.limit(&read(text))
    }

    fn tends(text: &str, place: &str, expected: &str) {
        let found = limit_of("", text, place).unwrap_or_else(|e| panic!("{text}: {e}"));
        let shown = match &found {
            Tends::Up => "up".to_string(),
            Tends::Down => "down".to_string(),
            Tends::To(c) => {
                let c = normal::normal(c).unwrap();
                let wanted =
                    normal::normal(&crate::kernel::read::term(expected).unwrap_or_else(|_| Term::zero()));
                if c.to_term() == wanted.unwrap().to_term() {
                    expected.to_string()
                } else {
                    c.to_term().to_string()
                }
            }
        };
        assert_eq!(shown, expected, "{text} towards {place}");
    }

    #[test]
    fn limits_at_infinity() {
        tends("x/(1 + x)", "inf", "1");
        tends("sqrt(x^2 + x) - x", "inf", "1/2");
        tends("atan(x)", "inf", "pi/2");
        tends("x*(pi/2 - atan(x))", "inf", "1");
        tends("(1 + 1/x)^(x + 1/2)", "inf", "exp(1)");
        tends("x^3*exp(-x^2/2)", "inf", "0");
        tends("exp(x) - x^100", "inf", "up");
        tends("log(x) - sqrt(x)", "inf", "down");
        tends("log(cosh(x)) - x", "inf", "-log(2)");
        tends("tanh(x)", "-inf", "-1");
        tends("x*exp(x^2)*erfc(x)", "inf", "1/sqrt(pi)");
        tends("erfc(x)", "-inf", "2");
        tends("lgamma(x) - (x - 1/2)*log(x) + x", "inf", "log(2*pi)/2");
        tends("x*(digamma(x) - log(x))", "inf", "-1/2");
        tends("log(1 + exp(x)) - x", "inf", "0");
    }

    #[test]
    fn limits_at_finite_ends() {
        tends("x*log(x)", "from 0", "0");
        tends("x^x", "from 0", "1");
        tends("1/x - 1/(2*x)", "from 0", "up");
        tends("(1 - cos(x))/x^2", "from 0", "1/2");
        tends("(x - sin(x))/x^3", "from 0", "1/6");
        tends("acos(x)/sqrt(1 - x)", "to 1", "sqrt(2)");
        tends("tan(x)*(pi/2 - x)", "to pi/2", "1");
        tends("(1 - x)*log(1 - x)", "to 1", "0");
        tends("atanh(x)/log(1 - x)", "to 1", "-1/2");
        tends("(tanh(x) - x)/x^3", "from 0", "-1/3");
        tends("(erf(x) - 2*x/sqrt(pi))/x^3", "from 0", "-2/(3*sqrt(pi))");
        tends("abs(x - 1)*x", "to 1", "0");
        tends("max(x, 1/2)", "to 1", "max(1, 1/2)");
    }

    #[test]
    fn parameters_ride_along() {
        let a = "a : real in (0, inf)";
        assert_eq!(limit_of(a, "exp(-a*x)*x^5", "inf").unwrap(), Tends::To(Term::zero()));
        assert_eq!(limit_of(a, "log(1 + a*x)/x", "from 0").unwrap(), Tends::To(Term::variable("a")));
        assert!(limit_of("a : real in [0, 1]", "exp(-a*x)*x", "inf").is_err());
        assert!(limit_of("a : real in [0, 1]", "1/(a + 1/x)", "inf").is_err());
    }

    #[test]
    fn what_is_not_decided_is_refused() {
        for text in ["sin(x)", "x*sin(1/x) + cos(x)", "floor(x)", "log(log(x))", "exp(x*log(x))", "q(x)"] {
            assert!(limit_of("", text, "inf").is_err(), "{text}");
        }
    }
}
