//! The error function and its complement.

use super::super::Refusal;
use super::super::dyadic::Dyadic;
use super::super::fixed::Fixed;
use super::super::interval::Interval;
use super::constants::Constant;
use super::exponential::{exp_thin, odd};
use super::{decreasing, guarded, increasing};

/// Whether `x^2` is so large that the asymptotic series of erfc has `p` bits: its smallest
/// term is about `exp(-x^2)`.
fn is_far(x: &Interval, p: u32) -> bool {
    let square = x.mul(x, 32);
    square.sub(&Interval::from(i64::from(p) * 3 / 4 + 2), 32).is_certainly_positive()
}

/// `exp(-x^2)` at a point. `x^2` gets as many more bits as stand before its point.
fn gauss(x: &Interval, p: u32) -> Interval {
    let more = x.upper().map_or(0, |b| b.top().clamp(0, 32) as u32) * 2 + 8;
    let square = x.mul(x, p + more);
    let y = increasing(&square.neg(), None, None, |y| Ok(exp_thin(y, p)));
    y.unwrap_or_else(|_| Interval::whole())
}

/// erf at a point that is not far: `erf x = (2/sqrt pi) x exp(-x^2) S` where `S` is the
/// sum of `2^n x^2n / (1 3 5 .. (2n+1))`, all terms positive (NIST DLMF 7.6.2).
fn erf_near(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let square = x.mul(x, p + 16);
    let sum = if square.sub(&Interval::from(32), 32).is_certainly_negative() {
        Fixed::from_interval(&square, p + 12).series(|n| (2, 2 * n + 3)).to_interval(p)
    } else {
        growing_sum(&square.round(p), p)?
    };
    let factor = x.scale(1).div(&Constant::Pi.enclose(p).sqrt(p)?, p)?;
    Ok(factor.mul(&gauss(x, p), p).mul(&sum, p))
}

/// The sum `S` of [`erf_near`] for a large `x^2`, where it is about `exp(x^2)`: only
/// relative errors matter then. Once `n > 2 x^2` each term is at most half the one before,
/// so what follows a term is at most that term.
fn growing_sum(square: &Interval, p: u32) -> Result<Interval, Refusal> {
    let (mut term, mut sum) = (Interval::from(1), Interval::from(1));
    for n in 1.. {
        term = term.mul(&square.scale(1), p).div(&Interval::from(2 * n + 1), p)?;
        sum = sum.add(&term, p);
        let top = |x: &Interval| x.upper().map_or(i64::MAX, Dyadic::top);
        let halves = square.scale(1).sub(&Interval::from(n), p).is_certainly_nonpositive();
        if halves && top(&term) < top(&sum) - i64::from(p) {
            sum = sum.add(&term.hull(&Interval::zero()), p);
            break;
        }
    }
    Ok(sum)
}

/// erfc at a far point: `erfc x = exp(-x^2) / (x sqrt pi) * T`, where `T` lies between any
/// two consecutive partial sums of `sum of (-1)^n 1 3 5 .. (2n-1) / (2x^2)^n`
/// (NIST DLMF 7.12.1 and section 7.12(i), real x).
fn erfc_far(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    let step = one.div(&x.mul(x, p).scale(1), p)?.neg();
    let (mut term, mut sum) = (one.clone(), one);
    for n in 1.. {
        let next = term.mul(&step, p).mul(&Interval::from(2 * n - 1), p);
        let top = next.abs().upper().map_or(i64::MAX, Dyadic::top);
        let last = term.abs().upper().map_or(i64::MAX, Dyadic::top);
        if top < -i64::from(p) || top > last {
            sum = sum.add(&next.hull(&Interval::zero()), p);
            break;
        }
        sum = sum.add(&next, p);
        term = next;
    }
    let below = x.mul(&Constant::Pi.enclose(p).sqrt(p)?, p);
    gauss(x, p).mul(&sum, p).div(&below, p)
}

/// erf: everywhere, increasing from -1 to 1, odd.
pub(super) fn erf(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    guarded(p, |p| {
        increasing(x, Some(one.neg()), Some(one.clone()), |x| {
            odd(x, |x| match is_far(x, p) {
                true => Ok(one.sub(&erfc_far(x, p)?, p)),
                false => erf_near(x, p),
            })
        })
    })
}

/// erfc: everywhere, decreasing from 2 to 0, with full relative accuracy for large `x`.
pub(super) fn erfc(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let (one, two) = (Interval::from(1), Interval::from(2));
    guarded(p, |p| {
        decreasing(x, Some(two.clone()), Some(Interval::zero()), |x| {
            if x.is_certainly_negative() {
                return Ok(one.add(&erf(&x.neg(), p)?, p));
            }
            if is_far(x, p) {
                return erfc_far(x, p);
            }
            // 1 - erf x loses the bits by which erfc x > exp(-x^2 - x - 1) is below 1; there
            // are fewer than 3/2 (x^2 + x + 1) of them, and x^2 <= 3p/4 + 3 here.
            let square =
                x.upper().map_or(0, |b| (b.floor_scaled(0) + 1u32).pow(2).try_into().unwrap_or(0u32));
            let work = p + 2 * square.min(p + 4) + 8;
            Ok(one.sub(&erf(x, work)?, work))
        })
    })
}
