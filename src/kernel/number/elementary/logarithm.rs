//! log, log2, the inverse hyperbolic functions and general powers.

use super::super::dyadic::Dyadic;
use super::super::fixed::Fixed;
use super::super::interval::Interval;
use super::super::{MAX_PRECISION, MIN_PRECISION, Refusal};
use super::constants::Constant;
use super::exponential::{exp_thin, odd};
use super::{guarded, increasing};

/// log of a bounded positive interval, best for a narrow one: `log x = k log 2 + log y`
/// with `y = x / 2^k` near 1.
pub(super) fn log_thin(x: &Interval, p: u32) -> Interval {
    let (Some(a), Some(_)) = (x.lower(), x.upper()) else {
        return Interval::whole();
    };
    // y in [1/sqrt 2, sqrt 2), roughly; 181/256 is just below the first.
    let mut k = a.top();
    if a.floor_scaled(8 - k) < 181.into() {
        k -= 1;
    }
    let y = x.scale(-k);
    let log_y = log1p_near_zero(&y.sub(&Interval::from(1), p), p);
    if k == 0 {
        return log_y;
    }
    let whole_part = Constant::Log2.enclose(p + 4).mul(&Interval::from(k), p);
    whole_part.add(&log_y, p)
}

/// `log(1 + t)` for `|t| <= 1/2`: with `z = t/(2+t)` it is `2 atanh z`, and
/// `atanh z / z` is the sum of `z^(2n) / (2n+1)`.
fn log1p_near_zero(t: &Interval, p: u32) -> Interval {
    let Ok(z) = t.div(&t.add(&Interval::from(2), p), p) else {
        return Interval::whole();
    };
    let square = Fixed::from_interval(&z.mul(&z, p), p + 8);
    if !square.is_at_most_half() {
        return Interval::whole();
    }
    let quotient = square.series(|n| (2 * n as i64 + 1, 2 * n + 3));
    z.scale(1).mul(&quotient.to_interval(p), p)
}

/// `log(1 + t)` with full relative accuracy near 0, for a narrow bounded interval `t > -1`.
fn log1p_thin(t: &Interval, p: u32) -> Interval {
    let quarter = |x: Option<&Dyadic>| x.is_some_and(|x| x.is_zero() || x.top() <= -1);
    if quarter(t.lower()) && quarter(t.upper()) {
        log1p_near_zero(t, p)
    } else {
        log_thin(&t.add(&Interval::from(1), p), p)
    }
}

/// log: on `x > 0`, increasing.
pub(super) fn log(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    if !x.is_certainly_positive() {
        return Err(Refusal::OutsideDomain("log"));
    }
    guarded(p, |p| increasing(x, None, None, |x| Ok(log_thin(x, p))))
}

/// The logarithm to base 2: on `x > 0`, increasing, exact at powers of 2.
pub(super) fn log2(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    if !x.is_certainly_positive() {
        return Err(Refusal::OutsideDomain("log2"));
    }
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            if let Some(point) = x.as_point()
                && *point == Dyadic::power_of_two(point.top() - 1)
            {
                return Ok(Interval::from(point.top() - 1));
            }
            log_thin(x, p).div(&Constant::Log2.enclose(p), p)
        })
    })
}

/// asinh: everywhere, increasing. For `x >= 0` it is `log(1 + x + x^2/(1 + sqrt(1 + x^2)))`.
pub(super) fn asinh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            odd(x, |x| {
                let square = x.mul(x, p);
                let root = square.add(&one, p).sqrt(p)?;
                let t = x.add(&square.div(&root.add(&one, p), p)?, p);
                Ok(log1p_thin(&t, p))
            })
        })
    })
}

/// acosh: on `x >= 1`, increasing. With `t = x - 1` it is `log(1 + t + sqrt(t (t + 2)))`.
pub(super) fn acosh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    if !x.sub(&one, 64).is_certainly_nonnegative() {
        return Err(Refusal::OutsideDomain("acosh"));
    }
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            let t = x.sub(&one, p);
            let root = t.mul(&t.add(&Interval::from(2), p), p).sqrt(p)?;
            Ok(log1p_thin(&t.add(&root, p), p))
        })
    })
}

/// atanh: on `-1 < x < 1`, increasing. For `x >= 0` it is `log(1 + 2x/(1-x))/2`.
pub(super) fn atanh(x: &Interval, p: u32) -> Result<Interval, Refusal> {
    let one = Interval::from(1);
    if !one.sub(&x.abs(), 64).is_certainly_positive() {
        return Err(Refusal::OutsideDomain("atanh"));
    }
    guarded(p, |p| {
        increasing(x, None, None, |x| {
            odd(x, |x| {
                let t = x.scale(1).div(&one.sub(x, p), p)?;
                Ok(log1p_thin(&t, p).scale(-1))
            })
        })
    })
}

/// `b^e`, defined where `b > 0`, or `e` is an integer and (`b != 0` or `e > 0`), or
/// `b >= 0` and `e > 0`. A negative base needs an exponent known exactly.
///
/// `p` is moved into the range of precisions as in [`super::apply`].
pub fn pow(base: &Interval, exponent: &Interval, p: u32) -> Result<Interval, Refusal> {
    let p = p.clamp(MIN_PRECISION, MAX_PRECISION);
    let integer = exponent.as_point().and_then(|e| e.to_i128());
    if let Some(n) = integer.and_then(|n| i64::try_from(n).ok()) {
        return base.powi(n, p);
    }
    if base.is_certainly_positive() {
        return positive_pow(base, exponent, p);
    }
    if !base.is_certainly_nonnegative() || !exponent.is_certainly_positive() {
        return Err(Refusal::OutsideDomain("power"));
    }
    // 0^e = 0 is the least value; the largest is at the upper end of the base.
    let upper = match base.upper() {
        None => None,
        Some(b) if b.is_zero() => return Ok(Interval::zero()),
        Some(b) => positive_pow(&Interval::point(b.clone()), exponent, p)?.upper().cloned(),
    };
    Interval::new(Some(Dyadic::zero()), upper).ok_or(Refusal::OutsideDomain("power"))
}

/// `b^e = exp(e log b)` for `b > 0`. Each of the two variables occurs once, so the range
/// is not overestimated; the size of `e log b` decides how many more bits the logarithm needs.
fn positive_pow(base: &Interval, exponent: &Interval, p: u32) -> Result<Interval, Refusal> {
    let size = |x: &Interval| {
        let top = |end: Option<&Dyadic>| end.map_or(0, |e| e.top().clamp(-64, 64));
        top(x.lower()).max(top(x.upper()))
    };
    let rough = log(base, 32)?;
    let more = (size(&rough) + size(exponent)).clamp(0, 48) as u32;
    guarded(p + more, |work| {
        let product = log(base, work)?.mul(exponent, work);
        increasing(&product, Some(Interval::zero()), None, |x| Ok(exp_thin(x, p + 8)))
    })
    .map(|y| y.round(p))
}
