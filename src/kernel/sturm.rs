//! Signs of a polynomial in one variable with rational coefficients on an interval.
//!
//! Polynomials are lists of coefficients, lowest first, without zeros at the
//! end. Division is carried out up to positive factors, which change no sign.
//! Sources: Sturm's theorem and multiplicities by greatest common divisors as in
//! Basu, Pollack, Roy, Algorithms in Real Algebraic Geometry, 2006, 2.2.2.

use num_bigint::{BigInt, Sign};
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

type Line = Vec<BigInt>;

/// What is known of a polynomial on an open interval.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Signs {
    /// Whether it is positive just inside the lower end.
    pub starts_positive: bool,
    /// How often it changes sign.
    pub changes: usize,
    /// Whether it is zero anywhere.
    pub has_zero: bool,
}

/// The signs of a polynomial other than 0 on the open interval with these ends;
/// a missing end is infinite. The lower end is below the upper.
pub fn signs(coefficients: &[BigRational], low: Option<&BigRational>, high: Option<&BigRational>) -> Signs {
    let f = whole(coefficients);
    let mut simple = gcd(&f, &slope(&f));
    let mut roots = quotient(&f, &simple);
    let has_zero = count(&roots, low, high) > 0;
    // `roots` has a factor for each root still looked at, `simple` what is left of
    // `f`; in round i the roots that drop out have multiplicity i.
    let mut odd: Line = vec![BigInt::one()];
    let mut is_odd = true;
    while roots.len() > 1 {
        let next = gcd(&roots, &simple);
        if is_odd {
            odd = product(&odd, &quotient(&roots, &next));
        }
        simple = quotient(&simple, &next);
        roots = next;
        is_odd = !is_odd;
    }
    Signs { starts_positive: is_positive_after(&f, low), changes: count(&odd, low, high), has_zero }
}

/// The value of a polynomial.
pub fn value(coefficients: &[BigRational], at: &BigRational) -> BigRational {
    coefficients.iter().rev().fold(BigRational::zero(), |sum, c| sum * at + c)
}

/// A positive multiple with integers.
fn whole(coefficients: &[BigRational]) -> Line {
    let over = coefficients.iter().fold(BigInt::one(), |l, c| l.lcm(c.denom()));
    primitive(coefficients.iter().map(|c| c.numer() * (&over / c.denom())).collect())
}

/// Divided by a positive common divisor.
fn primitive(mut p: Line) -> Line {
    while p.last().is_some_and(Zero::is_zero) {
        p.pop();
    }
    let common = p.iter().fold(BigInt::zero(), |g, c| g.gcd(c));
    if !common.is_zero() && !common.is_one() {
        p.iter_mut().for_each(|c| *c = &*c / &common);
    }
    p
}

fn slope(p: &Line) -> Line {
    primitive(p.iter().enumerate().skip(1).map(|(i, c)| c * BigInt::from(i)).collect())
}

fn product(p: &Line, q: &Line) -> Line {
    let mut product = vec![BigInt::zero(); p.len() + q.len() - 1];
    for (i, a) in p.iter().enumerate() {
        for (j, b) in q.iter().enumerate() {
            product[i + j] += a * b;
        }
    }
    product
}

/// Quotient and remainder of a positive multiple of `p` by `q`, which is not 0.
fn divided(p: &Line, q: &Line) -> (Line, Line) {
    let (mut rest, mut quotient) = (p.clone(), vec![BigInt::zero(); p.len()]);
    let Some(lead) = q.last() else { return (quotient, rest) };
    let (size, sign) = (lead.abs(), lead.signum());
    while rest.len() >= q.len() {
        let (place, top) = (rest.len() - q.len(), &rest[rest.len() - 1] * &sign);
        rest.iter_mut().for_each(|c| *c *= &size);
        quotient.iter_mut().for_each(|c| *c *= &size);
        for (i, c) in q.iter().enumerate() {
            rest[place + i] -= &top * c;
        }
        quotient[place] += top;
        while rest.last().is_some_and(Zero::is_zero) {
            rest.pop();
        }
    }
    (quotient, rest)
}

/// `p / q` up to a positive factor, where the division leaves no rest.
fn quotient(p: &Line, q: &Line) -> Line {
    primitive(divided(p, q).0)
}

/// A greatest common divisor; its sign is arbitrary.
fn gcd(p: &Line, q: &Line) -> Line {
    let (mut a, mut b) = (p.clone(), q.clone());
    while !b.is_empty() {
        let rest = primitive(divided(&a, &b).1);
        (a, b) = (b, rest);
    }
    a
}

fn at(p: &Line, x: &BigRational) -> BigRational {
    p.iter().rev().fold(BigRational::zero(), |sum, c| sum * x + BigRational::from_integer(c.clone()))
}

/// Whether `p` is positive just above the end.
fn is_positive_after(p: &Line, low: Option<&BigRational>) -> bool {
    let Some(low) = low else { return sign_far(p, true) == Sign::Plus };
    // The first derivative that is not zero there has the sign.
    let mut p = p.clone();
    loop {
        let here = at(&p, low);
        if !here.is_zero() || p.len() <= 1 {
            return here.is_positive();
        }
        p = slope(&p);
    }
}

/// The sign far below or far above.
fn sign_far(p: &Line, below: bool) -> Sign {
    match p.last() {
        Some(lead) if below && p.len().is_even() => (-lead).sign(),
        Some(lead) => lead.sign(),
        None => Sign::NoSign,
    }
}

/// How many roots a polynomial without multiple roots has in an open interval.
fn count(p: &Line, low: Option<&BigRational>, high: Option<&BigRational>) -> usize {
    let mut p = p.clone();
    for end in [low, high].into_iter().flatten() {
        if at(&p, end).is_zero() {
            p = quotient(&p, &vec![-end.numer(), end.denom().clone()]);
        }
    }
    let mut chain = vec![p.clone(), slope(&p)];
    while let [.., a, b] = chain.as_slice()
        && !b.is_empty()
    {
        let rest = primitive(divided(a, b).1.into_iter().map(|c| -c).collect());
        chain.push(rest);
    }
    let changes = |end: Option<&BigRational>, below: bool| -> usize {
        let sign = |p: &Line| match end {
            Some(x) => at(p, x).numer().sign(),
            None => sign_far(p, below),
        };
        let signs: Vec<Sign> = chain.iter().map(sign).filter(|s| *s != Sign::NoSign).collect();
        signs.windows(2).filter(|pair| pair[0] != pair[1]).count()
    };
    changes(low, true).saturating_sub(changes(high, false))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn q(n: i64) -> BigRational {
        BigRational::from_integer(n.into())
    }

    /// The product of `x - r` over the roots.
    fn with_roots(roots: &[i64]) -> Vec<BigRational> {
        let factor = |r: i64| vec![BigInt::from(-r), BigInt::one()];
        let p = roots.iter().fold(vec![BigInt::one()], |p, r| product(&p, &factor(*r)));
        p.into_iter().map(BigRational::from_integer).collect()
    }

    #[test]
    fn agrees_with_the_roots_it_was_made_from() {
        let mut state = 1u64;
        let mut random = |below: u64| {
            state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
            (state >> 33) % below
        };
        for _ in 0..400 {
            let roots: Vec<i64> = (0..1 + random(7)).map(|_| random(9) as i64 - 4).collect();
            let (low, high) = (random(6) as i64 - 5, 1 + random(5) as i64);
            let ends = (random(4) > 0, random(4) > 0);
            let inside = |r: i64| (!ends.0 || r > low) && (!ends.1 || r < high);
            let mut distinct: Vec<i64> = roots.iter().copied().filter(|r| inside(*r)).collect();
            distinct.sort_unstable();
            distinct.dedup();
            let times = |r: i64| roots.iter().filter(|x| **x == r).count();
            let expected = Signs {
                starts_positive: roots.iter().filter(|r| !ends.0 || **r > low).count() % 2 == 0,
                changes: distinct.iter().filter(|r| times(**r) % 2 == 1).count(),
                has_zero: !distinct.is_empty(),
            };
            let (low, high) = (q(low), q(high));
            let found = signs(&with_roots(&roots), ends.0.then_some(&low), ends.1.then_some(&high));
            assert_eq!(found, expected, "{roots:?} on {low} {high} {ends:?}");
        }
    }

    #[test]
    fn irrational_double_roots_are_no_changes() {
        // (x^2 - 2)^2 (x^2 + 1)
        let p: Vec<BigRational> = [4, 0, 0, 0, -3, 0, 1].into_iter().map(q).collect();
        let found = signs(&p, None, None);
        assert_eq!(found, Signs { starts_positive: true, changes: 0, has_zero: true });
        let found = signs(&p, Some(&q(0)), Some(&q(1)));
        assert_eq!(found, Signs { starts_positive: true, changes: 0, has_zero: false });
        assert_eq!(value(&p, &q(1)), q(2));
    }
}
