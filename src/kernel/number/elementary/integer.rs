//! Functions with an integer argument: factorial, binomial coefficient, Chebyshev polynomial.

use super::super::Refusal;
use super::super::dyadic::Dyadic;
use super::super::dyadic::Toward;
use super::super::interval::Interval;
use super::constants::Constant;
use super::{circular, exponential, gamma, guarded, increasing, refined};
use num_bigint::BigInt;
use num_integer::Integer;

/// Factorials up to here, and binomial products up to this length, are computed exactly.
const EXACT: i128 = 1000;

/// Largest degree of a Chebyshev polynomial.
const MAX_DEGREE: i128 = 1 << 32;

/// The integer `n >= 0` that a box consists of.
fn natural(n: &Interval, name: &'static str) -> Result<i128, Refusal> {
    match n.as_point().map(|n| (n.to_i128(), n.signum() > 0 && n.top() > 64)) {
        Some((Some(n), _)) if n >= 0 => Ok(n),
        Some((None, true)) => Err(Refusal::TooLarge("integer argument")),
        _ => Err(Refusal::OutsideDomain(name)),
    }
}

/// `n!` of one integer `n >= 0`.
pub(super) fn factorial(n: &Interval, p: u32) -> Result<Interval, Refusal> {
    natural(n, "factorial")?;
    factorial_over_integers(n, p)
}

/// The range of `n!` over the integers of a box of non-negative numbers, for a caller who
/// has proved that the argument is an integer. Increasing from `n = 0` on.
pub fn factorial_over_integers(n: &Interval, p: u32) -> Result<Interval, Refusal> {
    let n = integers(n, "factorial")?;
    increasing(&n, None, None, |n| match natural(n, "factorial") {
        Ok(n) if n <= EXACT => {
            let product: BigInt = (1..=n).product();
            Ok(Interval::point(product.into()).round(p))
        }
        _ => gamma::gamma(&n.add(&Interval::from(1), 256), p),
    })
}

/// The integers of a box of non-negative numbers, as an interval with integer ends.
fn integers(n: &Interval, name: &'static str) -> Result<Interval, Refusal> {
    if !n.is_certainly_nonnegative() {
        return Err(Refusal::OutsideDomain(name));
    }
    let (first, last) = (n.ceil(), n.floor());
    Interval::new(first.lower().cloned(), last.upper().cloned()).ok_or(Refusal::OutsideDomain(name))
}

/// `binomial(n, k)` of one integer each, `n >= 0` and `k >= 0`; 0 if `k > n`.
pub(super) fn binomial(n: &Interval, k: &Interval, p: u32) -> Result<Interval, Refusal> {
    natural(n, "binomial")?;
    natural(k, "binomial")?;
    binomial_over_integers(n, k, p)
}

/// The range of `binomial(n, k)` over the integers of two boxes of non-negative numbers,
/// for a caller who has proved that the arguments are integers.
///
/// It does not decrease in `n`; in `k` it rises up to `n/2` and falls from there.
pub fn binomial_over_integers(n: &Interval, k: &Interval, p: u32) -> Result<Interval, Refusal> {
    let (n, k) = (integers(n, "binomial")?, integers(k, "binomial")?);
    let least_n = n.lower().cloned().unwrap_or_else(Dyadic::zero);
    let least_k = k.lower().cloned().unwrap_or_else(Dyadic::zero);
    let lower = match k.upper() {
        Some(last) => binomial_at(&least_n, &least_k, p)?.min(&binomial_at(&least_n, last, p)?),
        None => Interval::zero(),
    };
    let upper = match n.upper() {
        Some(n) => {
            let middle = n.scale(-1, Toward::Down).map_or_else(Dyadic::zero, |m| m.floor());
            let last = k.upper().unwrap_or(&middle);
            let best = if middle < least_k { &least_k } else { (&middle).min(last) };
            binomial_at(n, best, p)?
        }
        // k = 0 gives 1 for every n; any other k gives values without bound.
        None if k == Interval::zero() => Interval::from(1),
        None => Interval::whole(),
    };
    Interval::new(lower.lower().cloned(), upper.upper().cloned()).ok_or(Refusal::TooLarge("precision"))
}

/// `binomial(n, k)` for integers given as dyadics.
fn binomial_at(n: &Dyadic, k: &Dyadic, p: u32) -> Result<Interval, Refusal> {
    let rest = Interval::point(n.clone()).sub(&Interval::point(k.clone()), 256);
    if rest.is_certainly_negative() {
        return Ok(Interval::zero());
    }
    let k = Interval::point(k.clone());
    let fewer = k.min(&rest);
    let n = Interval::point(n.clone());
    if let (Ok(count), Ok(n)) = (natural(&fewer, "binomial"), natural(&n, "binomial"))
        && count <= EXACT
    {
        // After step i the product is binomial(n, i), so every division is exact.
        let product = (1..=count).fold(BigInt::from(1), |b, i| b * (n - count + i) / i);
        return Ok(Interval::point(product.into()).round(p));
    }
    guarded(p, |p| {
        // n!/(k! (n-k)!) by logarithms, with the bits that they have before the point.
        let work = p + 2 * n.upper().map_or(0, |n| n.top().clamp(0, 64) as u32) + 8;
        let log_factorial = |n: &Interval| gamma::lgamma(&n.add(&Interval::from(1), work + 256), work);
        let log = log_factorial(&n)?.sub(&log_factorial(&k)?, work).sub(&log_factorial(&rest)?, work);
        exponential::exp(&log, p)
    })
}

/// The Chebyshev polynomial `T_n(x)` for one integer `n >= 0`.
///
/// With `x = cos t` it is `cos(n t)`, so inside `[-1, 1]` its extrema are `(-1)^j` at
/// `t = j pi / n`; outside it is monotone on each side.
pub(super) fn chebyshev(n: &Interval, x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let n = natural(n, "chebyshev")?;
    if n > MAX_DEGREE {
        return Err(Refusal::TooLarge("degree of a Chebyshev polynomial"));
    }
    if n == 0 {
        return Ok(Interval::from(1));
    }
    let one = Dyadic::from(1);
    let part = |lower: Option<Dyadic>, upper: Option<Dyadic>| {
        Interval::new(lower, upper).and_then(|piece| x.intersection(&piece))
    };
    let mut pieces = Vec::new();
    if let Some(right) = part(Some(one.clone()), None) {
        pieces.push(chebyshev_right(n, &right, p)?);
    }
    if let Some(left) = part(None, Some(one.neg())) {
        let mirrored = chebyshev_right(n, &left.neg(), p)?;
        pieces.push(if n % 2 == 0 { mirrored } else { mirrored.neg() });
    }
    if let Some(inner) = part(Some(one.neg()), Some(one.clone())) {
        pieces.push(chebyshev_inside(n, &inner, p)?);
    }
    let range = pieces.into_iter().reduce(|range, piece| range.hull(&piece));
    Ok(range.unwrap_or_else(Interval::whole).round(p))
}

/// `T_n` on a part of `[1, inf)`, where it increases.
fn chebyshev_right(n: i128, x: &Interval, p: u32) -> Result<Interval, Refusal> {
    increasing(x, None, None, |x| Ok(chebyshev_at(n, x, p)))
}

/// `T_n` on a part of `[-1, 1]`.
fn chebyshev_inside(n: i128, x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let at_end = |end: Option<&Dyadic>| match end {
        Some(end) => refined(p, |p| Ok(chebyshev_at(n, &Interval::point(end.clone()), p))),
        None => Ok(Interval::whole()),
    };
    if x.as_point().is_some() {
        return at_end(x.lower());
    }
    let range = at_end(x.lower())?.hull(&at_end(x.upper())?);
    // n t / pi runs over an interval; every integer that it may contain is an extremum.
    let work = p + 40;
    let turns = circular::acos(x, work)?
        .mul(&Interval::from(n as i64), work)
        .div(&Constant::Pi.enclose(work), work)?;
    let Ok(inside) = integers(&turns.max(&Interval::zero()), "chebyshev") else {
        return Ok(range);
    };
    let sign = |j: &Dyadic| Interval::from(if j.floor_scaled(0).is_even() { 1 } else { -1 });
    Ok(match (inside.lower(), inside.upper()) {
        (Some(first), Some(last)) if first == last => range.hull(&sign(first)),
        _ => range.hull(&Interval::from(1)).hull(&Interval::from(-1)),
    })
}

/// `T_n` at a point, by `T_2m = 2 T_m^2 - 1` and `T_(2m+1) = 2 T_m T_(m+1) - x`. A doubling
/// multiplies errors inside `[-1, 1]` by about 4, which costs twice the bits of `n`.
fn chebyshev_at(n: i128, x: &Interval, p: u32) -> Interval {
    let bits = 128 - n.leading_zeros();
    let work = p + 2 * bits + 8;
    let one = Interval::from(1);
    let double = |a: &Interval, b: &Interval, c: &Interval| a.mul(b, work).scale(1).sub(c, work);
    // T_m and T_(m+1), from m = 0 on along the binary digits of n.
    let (mut here, mut next) = (one.clone(), x.clone());
    for i in (0..bits).rev() {
        let odd = double(&here, &next, x);
        (here, next) = if n >> i & 1 == 1 {
            (odd, double(&next, &next, &one))
        } else {
            (double(&here, &here, &one), odd)
        };
    }
    here
}
