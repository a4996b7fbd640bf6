//! exp and the hyperbolic functions.

use super::super::Refusal;
use super::super::dyadic::{Dyadic, REACH};
use super::super::fixed::Fixed;
use super::super::interval::Interval;
use super::constants::Constant;
use super::{guarded, increasing};
use num_traits::ToPrimitive;

/// `log2(e) * 2^62`, to the nearest integer; only used to choose a multiple of log 2.
const LOG2_E: i128 = 6_653_256_548_920_620_560;

/// exp of a bounded interval, best for a narrow one.
///
/// With an integer `k` near `x / log 2` and `r = x - k log 2` (any `k` is allowed):
/// `exp x = 2^k (exp(r / 2^s))^(2^s)`, the inner exponential by its power series.
pub(super) fn exp_thin(x: &Interval, p: u32) -> Interval {
    let (Some(a), Some(b)) = (x.lower(), x.upper()) else {
        return Interval::whole();
    };
    if a.is_zero() && b.is_zero() {
        return Interval::from(1);
    }
    // Beyond 2^41 in size, exp x > 2^x leaves the range of exponents.
    if a.top().max(b.top()) > 41 {
        let lower = (a.signum() > 0 && a.top() > 41).then(|| Dyadic::power_of_two(REACH - 1));
        let upper = (b.signum() < 0 && b.top() > 41).then(|| Dyadic::power_of_two(-REACH));
        return Interval::new(lower.or(Some(Dyadic::zero())), upper).unwrap_or_else(Interval::whole);
    }
    let k = (a.floor_scaled(20).to_i128().unwrap_or(0) * LOG2_E + (1 << 81)) >> 82;
    let squarings = p.isqrt() * 5 / 8 + 1;
    let scale = p + squarings + 10;
    // k log 2 with as many more bits as k has.
    let more = 128 - k.unsigned_abs().leading_zeros();
    let whole_part = Constant::Log2.fixed(scale + more).times_integer(k).coarser(more);
    let r = Fixed::from_interval(x, scale).sub(&whole_part);
    let mut y = r.halve(squarings).series(|n| (1, n + 1));
    for _ in 0..squarings {
        y = y.mul(&y);
    }
    y.to_interval(p).scale(k as i64)
}

/// `exp x - 1`, with full relative accuracy near 0, for a narrow bounded interval.
fn expm1_thin(x: &Interval, p: u32) -> Interval {
    if is_below(x, 0) {
        // (exp x - 1)/x = sum of x^n/(n+1)!.
        let quotient = Fixed::from_interval(x, p + 8).series(|n| (1, n + 2));
        return x.mul(&quotient.to_interval(p), p);
    }
    exp_thin(x, p + 4).sub(&Interval::from(1), p)
}

/// Whether `|x| < 2^k` for all members.
fn is_below(x: &Interval, k: i64) -> bool {
    [x.lower(), x.upper()].iter().all(|end| end.is_some_and(|e| e.is_zero() || e.top() <= k))
}

/// exp: everywhere, increasing, 0 at minus infinity.
pub(super) fn exp(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    guarded(p, |p| increasing(x, Some(Interval::zero()), None, |x| Ok(exp_thin(x, p))))
}

/// sinh: everywhere, increasing. `sinh x = (E + E/(E+1))/2` with `E = exp x - 1`.
pub(super) fn sinh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            odd(x, |x| {
                let e = expm1_thin(x, p);
                Ok(e.add(&e.div(&e.add(&one, p), p)?, p).scale(-1))
            })
        })
    })
}

/// cosh: everywhere, even, increasing for `x >= 0`.
pub(super) fn cosh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    guarded(p, |p| {
        increasing(&x.abs(), None, None, |x| {
            let e = exp_thin(x, p);
            Ok(e.add(&Interval::from(1).div(&e, p)?, p).scale(-1))
        })
    })
}

/// tanh: everywhere, increasing from -1 to 1. `tanh x = E/(E+2) = 1 - 2/(E+2)` with
/// `E = exp 2x - 1`.
pub(super) fn tanh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let (one, two) = (Interval::from(1), Interval::from(2));
    guarded(p, |p| {
        increasing(x, Some(one.neg()), Some(one.clone()), |x| {
            odd(x, |x| {
                let small = is_below(x, 0);
                let e = expm1_thin(&x.scale(1), p);
                let f = e.add(&two, p);
                if small { e.div(&f, p) } else { Ok(one.sub(&two.div(&f, p)?, p)) }
            })
        })
    })
}

/// An odd function at a point, from its values at `x >= 0`.
pub(super) fn odd(
    x: &Interval,
    f: impl Fn(&Interval) -> Result<Interval, Refusal>,
) -> Result<Interval, Refusal> {
    if x.is_certainly_negative() { Ok(f(&x.neg())?.neg()) } else { f(x) }
}
