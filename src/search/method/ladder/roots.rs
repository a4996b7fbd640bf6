//! The sign changes of a polynomial in one variable between two numbers, exactly.
//!
//! Source: Sturm's theorem; Basu, Pollack, Roy, Algorithms in Real Algebraic
//! Geometry, 2.2.2.

use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// Coefficients of 1, x, x^2, .., the last one not 0.
type List = Vec<BigRational>;

/// Highest degree looked at.
const MAX_DEGREE: usize = 60;

/// The signs of a polynomial in turn between the ends, of which a missing one is
/// infinite; nothing for the zero polynomial or too high a degree.
#[must_use]
pub fn pattern(
    list: &[BigRational],
    low: Option<&BigRational>,
    high: Option<&BigRational>,
) -> Option<Vec<bool>> {
    let p = trimmed(list.to_vec());
    if p.is_empty() || p.len() > MAX_DEGREE + 1 {
        return None;
    }
    let mut odd = odd_part(&p);
    for end in [low, high].into_iter().flatten() {
        if value(&odd, end).is_zero() {
            odd = divided(&odd, &[-end, BigRational::one()]).0;
        }
    }
    let chain = sturm(&odd);
    let changes = variations(&chain, low, false).checked_sub(variations(&chain, high, true))?;
    let first = starts_positive(&p, low);
    Some((0..=changes).map(|i| first == (i % 2 == 0)).collect())
}

fn trimmed(mut p: List) -> List {
    while p.last().is_some_and(Zero::is_zero) {
        p.pop();
    }
    p
}

fn value(p: &[BigRational], x: &BigRational) -> BigRational {
    p.iter().rev().fold(BigRational::zero(), |sum, c| sum * x + c)
}

fn derivative(p: &[BigRational]) -> List {
    let place = |(i, c): (usize, &BigRational)| c * BigRational::from_integer(i.into());
    p.iter().enumerate().skip(1).map(place).collect()
}

/// Quotient and remainder.
fn divided(p: &[BigRational], by: &[BigRational]) -> (List, List) {
    let mut rest = p.to_vec();
    let mut quotient = vec![BigRational::zero(); (p.len() + 1).saturating_sub(by.len())];
    let Some(leading) = by.last() else { return (Vec::new(), rest) };
    while rest.len() >= by.len() {
        let shift = rest.len() - by.len();
        let factor = rest.last().map_or_else(BigRational::zero, |c| c / leading);
        for (i, c) in by.iter().enumerate() {
            rest[shift + i] -= &factor * c;
        }
        rest.pop();
        quotient[shift] = factor;
    }
    (trimmed(quotient), trimmed(rest))
}

/// Divided by the size of its leading coefficient, so that chains stay short.
fn scaled(mut p: List) -> List {
    if let Some(size) = p.last().map(Signed::abs) {
        p.iter_mut().for_each(|c| *c /= &size);
    }
    p
}

fn common(p: &[BigRational], q: &[BigRational]) -> List {
    let (mut p, mut q) = (scaled(p.to_vec()), scaled(q.to_vec()));
    while !q.is_empty() {
        let rest = scaled(divided(&p, &q).1);
        p = std::mem::replace(&mut q, rest);
    }
    p
}

/// The product of the square-free factors of odd multiplicity (Yun's algorithm).
fn odd_part(p: &[BigRational]) -> List {
    let slope = derivative(p);
    let shared = common(p, &slope);
    let (mut b, c) = (divided(p, &shared).0, divided(&slope, &shared).0);
    let mut d = less(&c, &derivative(&b));
    let mut odd = vec![BigRational::one()];
    for multiplicity in 1..=p.len() {
        if b.len() <= 1 {
            break;
        }
        let factor = common(&b, &d);
        if multiplicity % 2 == 1 {
            odd = times(&odd, &factor);
        }
        b = divided(&b, &factor).0;
        let c = divided(&d, &factor).0;
        d = less(&c, &derivative(&b));
    }
    odd
}

fn less(p: &[BigRational], q: &[BigRational]) -> List {
    let at = |list: &[BigRational], i: usize| list.get(i).cloned().unwrap_or_else(BigRational::zero);
    trimmed((0..p.len().max(q.len())).map(|i| at(p, i) - at(q, i)).collect())
}

fn times(p: &[BigRational], q: &[BigRational]) -> List {
    let mut product = vec![BigRational::zero(); (p.len() + q.len()).saturating_sub(1)];
    for (i, a) in p.iter().enumerate() {
        for (j, b) in q.iter().enumerate() {
            product[i + j] += a * b;
        }
    }
    product
}

fn sturm(p: &[BigRational]) -> Vec<List> {
    let mut chain = vec![p.to_vec(), scaled(derivative(p))];
    while let [.., a, b] = chain.as_slice()
        && !b.is_empty()
    {
        let next = scaled(divided(a, b).1.iter().map(|c| -c).collect());
        chain.push(next);
    }
    chain.retain(|p| !p.is_empty());
    chain
}

/// The sign changes of the chain at a number, or at plus (`up`) or minus infinity.
fn variations(chain: &[List], at: Option<&BigRational>, up: bool) -> usize {
    let sign = |p: &List| match at {
        Some(x) => value(p, x).signum(),
        None => {
            let leading = p.last().map_or_else(BigRational::zero, Signed::signum);
            if up || p.len() % 2 == 1 { leading } else { -leading }
        }
    };
    let signs: Vec<BigRational> = chain.iter().map(sign).filter(|s| !s.is_zero()).collect();
    signs.windows(2).filter(|w| w[0] != w[1]).count()
}

/// Whether the polynomial is positive just above its lower end.
fn starts_positive(p: &[BigRational], low: Option<&BigRational>) -> bool {
    let Some(low) = low else {
        return p.last().is_some_and(|c| c.is_positive() == (p.len() % 2 == 1));
    };
    let mut p = p.to_vec();
    while !p.is_empty() {
        let here = value(&p, low);
        if !here.is_zero() {
            return here.is_positive();
        }
        p = derivative(&p);
    }
    true
}

#[cfg(test)]
mod tests {
    use super::*;

    fn signs(list: &[i64], low: Option<i64>, high: Option<i64>) -> Vec<bool> {
        let number = |n: i64| BigRational::from_integer(n.into());
        let list: List = list.iter().map(|n| number(*n)).collect();
        pattern(&list, low.map(number).as_ref(), high.map(number).as_ref()).unwrap()
    }

    #[test]
    fn changes_between_the_ends() {
        // x^2 - 2
        assert_eq!(signs(&[-2, 0, 1], None, None), [true, false, true]);
        assert_eq!(signs(&[-2, 0, 1], Some(0), Some(2)), [false, true]);
        assert_eq!(signs(&[-2, 0, 1], Some(-1), Some(1)), [false]);
        // Zeros at the ends are no changes between them.
        assert_eq!(signs(&[0, 1, -1], Some(0), Some(1)), [true]);
        assert_eq!(signs(&[0, 1], Some(0), None), [true]);
        assert_eq!(signs(&[0, 1], None, Some(0)), [false]);
    }

    #[test]
    fn multiplicities() {
        // (x^2 - 2)^2, (x - 1)^3, (x - 1)^2 (x + 1)
        assert_eq!(signs(&[4, 0, -4, 0, 1], None, None), [true]);
        assert_eq!(signs(&[-1, 3, -3, 1], None, None), [false, true]);
        assert_eq!(signs(&[1, -1, -1, 1], Some(-3), Some(3)), [false, true]);
        assert_eq!(signs(&[-7], Some(0), Some(1)), [false]);
        assert!(pattern(&[BigRational::zero()], None, None).is_none());
    }
}
