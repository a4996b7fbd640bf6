//! The circular functions and their inverses.

use super::super::dyadic::Dyadic;
use super::super::fixed::Fixed;
use super::super::interval::Interval;
use super::super::{MAX_PRECISION, Refusal};
use super::constants::Constant;
use super::exponential::odd;
use super::{decreasing, guarded, increasing};
use num_bigint::BigInt;
use num_integer::Integer;
use num_traits::ToPrimitive;

/// Arguments of `2^LARGEST` and beyond are not reduced: sin and cos answer `[-1, 1]`.
const LARGEST: i64 = 8192;

/// `x = k pi/2 + r` with `|r|` about `pi/4` at most: `k` modulo 4 and an enclosure of `r`
/// with small relative width, for a point `x` below `2^LARGEST`.
fn reduce(x: &Interval, p: u32) -> (u32, Interval) {
    let size = x.lower().filter(|a| !a.is_zero()).map_or(0, Dyadic::top);
    if size < 0 {
        return (0, x.clone());
    }
    let mut work = p + size as u32 + 8;
    loop {
        let half_pi = Constant::Pi.enclose(work).scale(-1);
        let quotient = x.div(&half_pi, work).unwrap_or_else(|_| Interval::zero());
        // Any integer may be taken for k; the nearest makes r small.
        let k = quotient.lower().map_or(BigInt::ZERO, |q| (q.floor_scaled(1) + 1u32) >> 1);
        let turns = Interval::point(k.clone().into());
        let r = x.sub(&half_pi.mul(&turns, work + size as u32 + 8), work);
        // No dyadic but 0 is a multiple of pi/2, so this ends; but not later than here.
        if r.is_tight(p) || work > 4 * p + 2 * size as u32 + 256 {
            return (k.mod_floor(&4.into()).to_u32().unwrap_or(0), r);
        }
        work += p;
    }
}

/// `sin(x + quarter * pi/2)` at a point.
fn circular(x: &Interval, quarter: u32, p: u32) -> Interval {
    let (k, r) = reduce(x, p);
    let square = Fixed::from_interval(&r.mul(&r, p), p + 8).neg();
    let value = if (k + quarter).is_even() {
        // sin r / r = sum of (-r^2)^n / (2n+1)!
        r.mul(&square.series(|n| (1, (2 * n + 2) * (2 * n + 3))).to_interval(p), p)
    } else {
        // cos r = sum of (-r^2)^n / (2n)!
        square.series(|n| (1, (2 * n + 1) * (2 * n + 2))).to_interval(p)
    };
    if (k + quarter) % 4 >= 2 { value.neg() } else { value }
}

/// The range of `sin(x + quarter * pi/2)`: the values at the ends, and `(-1)^j` wherever
/// `x = (j + 1/2 - quarter/2) pi` is, or cannot be excluded to be, in the box.
fn circular_range(x: &Interval, quarter: u32, p: u32) -> Result<Interval, Refusal> {
    let full = Interval::new(Some(Dyadic::from(-1)), Some(Dyadic::from(1)));
    let full = full.unwrap_or_else(Interval::whole);
    let (Some(a), Some(b)) = (x.lower(), x.upper()) else {
        return Ok(full);
    };
    if a.top().max(b.top()) > LARGEST && !(a.is_zero() && b.is_zero()) {
        return Ok(full);
    }
    guarded(p, |p| {
        let at_end = |x: &Dyadic| circular(&Interval::point(x.clone()), quarter, p);
        let mut range = at_end(a);
        if x.as_point().is_none() {
            range = range.hull(&at_end(b));
            let (first, last) = extrema(x, quarter, p)?;
            if first <= last {
                range = range.hull(&Interval::from(if first.is_even() { 1 } else { -1 }));
            }
            if first < last {
                range = full.clone();
            }
        }
        Ok(range.intersection(&full).unwrap_or_else(|| full.clone()))
    })
}

/// All integers `j` for which `(j + 1/2 - quarter/2) pi` may lie in a bounded box, as first
/// and last; the last is below the first if there is none.
fn extrema(x: &Interval, quarter: u32, p: u32) -> Result<(BigInt, BigInt), Refusal> {
    let size = [x.lower(), x.upper()].map(|e| e.map_or(0, |e| e.top().clamp(0, LARGEST)) as u32);
    let work = p + size[0].max(size[1]);
    let half_turns = x.div(&Constant::Pi.enclose(work), work)?;
    let j = half_turns.add(&Interval::from(i64::from(quarter) - 1).scale(-1), work);
    match (j.lower(), j.upper()) {
        (Some(a), Some(b)) => Ok((-a.neg().floor_scaled(0), b.floor_scaled(0))),
        _ => Err(Refusal::TooLarge("argument of a circular function")),
    }
}

/// sin: everywhere.
pub(super) fn sin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    circular_range(x, 0, p)
}

/// cos: everywhere; `cos x = sin(x + pi/2)`.
pub(super) fn cos(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    circular_range(x, 1, p)
}

/// tan: where no odd multiple of pi/2 is in the box; increasing between two of them.
pub(super) fn tan(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let (Some(a), Some(b)) = (x.lower(), x.upper()) else {
        return Err(Refusal::OutsideDomain("tan"));
    };
    if a.top().max(b.top()) > LARGEST && !(a.is_zero() && b.is_zero()) {
        return Err(Refusal::TooLarge("argument of tan"));
    }
    // The poles are the extrema of sin. An end comes about as near to one as its length allows.
    let work = p + 2 * a.length().max(b.length()).min(MAX_PRECISION) + 16;
    let (first, last) = extrema(x, 0, work)?;
    if first <= last {
        return Err(Refusal::OutsideDomain("tan"));
    }
    guarded(p, |p| increasing(x, None, None, |x| circular(x, 0, p).div(&circular(x, 1, p), p)))
}

/// atan of a bounded interval, best for a narrow one.
///
/// `atan x = pi/2 - atan(1/x)` for `x > 1`; `atan x = 2 atan(x / (1 + sqrt(1 + x^2)))`;
/// `atan z / z` is the sum of `(-z^2)^n / (2n+1)`.
fn atan_thin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    odd(x, |x| {
        let one = Interval::from(1);
        if x.sub(&one, 32).is_certainly_positive() {
            let half_pi = Constant::Pi.enclose(p).scale(-1);
            return Ok(half_pi.sub(&atan_thin(&one.div(x, p)?, p)?, p));
        }
        let mut z = x.clone();
        let halvings = 2 + p.isqrt() / 12;
        for _ in 0..halvings {
            z = z.div(&z.mul(&z, p).add(&one, p).sqrt(p)?.add(&one, p), p)?;
        }
        let square = Fixed::from_interval(&z.mul(&z, p), p + 8);
        if !square.is_at_most_half() {
            return Err(Refusal::TooLarge("width of an argument of atan"));
        }
        let quotient = square.neg().series(|n| (2 * n as i64 + 1, 2 * n + 3));
        Ok(z.mul(&quotient.to_interval(p), p).scale(halvings.into()))
    })
}

/// atan: everywhere, increasing from -pi/2 to pi/2.
pub(super) fn atan(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    guarded(p, |p| {
        let half_pi = Constant::Pi.enclose(p).scale(-1);
        increasing(x, Some(half_pi.neg()), Some(half_pi), |x| atan_thin(x, p))
    })
}

/// Refuses unless `-1 <= x <= 1`.
fn within_one(x: &Interval, name: &'static str) -> Result<(), Refusal> {
    if Interval::from(1).sub(&x.abs(), 32).is_certainly_nonnegative() {
        Ok(())
    } else {
        Err(Refusal::OutsideDomain(name))
    }
}

/// asin: on `[-1, 1]`, increasing; `asin x = atan(x / sqrt((1-x)(1+x)))`.
pub(super) fn asin(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    within_one(x, "asin")?;
    let one = Interval::from(1);
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            odd(x, |x| {
                let rest = one.sub(x, p).mul(&one.add(x, p), p);
                if !rest.is_certainly_positive() {
                    return Ok(Constant::Pi.enclose(p).scale(-1));
                }
                atan_thin(&x.div(&rest.sqrt(p)?, p)?, p)
            })
        })
    })
}

/// acos: on `[-1, 1]`, decreasing; `acos x = 2 atan(sqrt((1-x)/(1+x)))`.
pub(super) fn acos(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    within_one(x, "acos")?;
    let one = Interval::from(1);
    guarded(p, |p| {
        decreasing(x, None, None, |x| {
            let below = one.add(x, p);
            if !below.is_certainly_positive() {
                return Ok(Constant::Pi.enclose(p));
            }
            let ratio = one.sub(x, p).div(&below, p)?;
            Ok(atan_thin(&ratio.sqrt(p)?, p)?.scale(1))
        })
    })
}
