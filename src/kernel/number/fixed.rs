//! Approximations on a fixed grid with a counted error: the engine of the series.

use super::dyadic::Dyadic;
use super::interval::Interval;
use num_bigint::BigInt;
use num_traits::{One, Signed, ToPrimitive};

/// Some real number `x` with `|x - mid * 2^-scale| <= err * 2^-scale`.
///
/// `err` saturates; [`UNKNOWN`] means that nothing is known, and turns into the whole line.
#[derive(Clone, Debug)]
pub struct Fixed {
    mid: BigInt,
    err: u64,
    scale: u32,
}

/// The error that says "any real number".
const UNKNOWN: u64 = u64::MAX;

/// Most terms a series may take; 4096 bits need far fewer.
const MAX_TERMS: u64 = 100_000;

impl Fixed {
    /// The number one.
    pub fn one(scale: u32) -> Fixed {
        Fixed { mid: BigInt::one() << scale, err: 0, scale }
    }

    /// A number known to lie in `[mid - err, mid + err] * 2^-scale`.
    pub fn new(mid: BigInt, err: u64, scale: u32) -> Fixed {
        Fixed { mid, err, scale }
    }

    /// Any number of a bounded interval. The caller bounds its size.
    pub fn from_interval(x: &Interval, scale: u32) -> Fixed {
        let (Some(a), Some(b)) = (x.lower(), x.upper()) else {
            return Fixed { mid: BigInt::ZERO, err: UNKNOWN, scale };
        };
        let mid = a.floor_scaled(scale.into());
        let err = match x.as_point() {
            Some(_) => 1,
            None => size(&(b.floor_scaled(scale.into()) - &mid)).saturating_add(1),
        };
        Fixed { mid, err, scale }
    }

    /// All numbers this one may be, with ends of at most `p` bits.
    pub fn to_interval(&self, p: u32) -> Interval {
        if self.err == UNKNOWN {
            return Interval::whole();
        }
        let end = |n: BigInt| Dyadic::new(n, -i64::from(self.scale));
        Interval::new(end(&self.mid - self.err), end(&self.mid + self.err))
            .unwrap_or_else(Interval::whole)
            .round(p)
    }

    /// The same number on a grid that has `k` bits less.
    pub fn coarser(&self, k: u32) -> Fixed {
        Fixed { scale: self.scale - k, ..self.halve(k) }
    }

    /// `k * x`.
    pub fn times_integer(&self, k: i128) -> Fixed {
        let err = grown(self.err, k.unsigned_abs(), 1);
        Fixed { mid: &self.mid * k, err, scale: self.scale }
    }

    /// `-x`.
    pub fn neg(&self) -> Fixed {
        Fixed { mid: -&self.mid, ..*self }
    }

    /// Whether `|x| <= 1/2` is known.
    pub fn is_at_most_half(&self) -> bool {
        self.size_bits() < 0
    }

    /// The `b` for which `|x| <= 2^b` is known.
    fn size_bits(&self) -> i64 {
        (self.mid.abs() + self.err).bits() as i64 - i64::from(self.scale)
    }

    /// `x + y`.
    pub fn add(&self, other: &Fixed) -> Fixed {
        Fixed { mid: &self.mid + &other.mid, err: self.err.saturating_add(other.err), scale: self.scale }
    }

    /// `x - y`.
    pub fn sub(&self, other: &Fixed) -> Fixed {
        Fixed { mid: &self.mid - &other.mid, err: self.err.saturating_add(other.err), scale: self.scale }
    }

    /// `x * y`: `|x y - m n| <= |m| f + |n| e + e f`, and one unit for the cut.
    pub fn mul(&self, other: &Fixed) -> Fixed {
        let part = |err: u64, factor: &BigInt| {
            // |factor| <= lead * 2^shift
            let (lead, shift) = leading(factor);
            let shift = shift - i64::from(self.scale);
            grown(err, u128::from(lead) << shift.clamp(0, 63), 1 << (-shift).clamp(0, 127))
        };
        let cross = u128::from(self.err) * u128::from(other.err) >> self.scale.min(127);
        let err = part(self.err, &other.mid)
            .saturating_add(part(other.err, &self.mid))
            .saturating_add(cross.to_u64().unwrap_or(UNKNOWN))
            .saturating_add(2);
        Fixed { mid: (&self.mid * &other.mid) >> self.scale, err, scale: self.scale }
    }

    /// `x / 2^k`.
    pub fn halve(&self, k: u32) -> Fixed {
        Fixed {
            mid: &self.mid >> k,
            err: grown(self.err, 1, 1 << k.min(64)).saturating_add(1),
            scale: self.scale,
        }
    }

    /// `x * numerator / denominator`.
    fn rescale(&self, numerator: i64, denominator: u64) -> Fixed {
        let mid = match numerator {
            1 => &self.mid / denominator,
            _ => &self.mid * numerator / denominator,
        };
        let err = grown(self.err, numerator.unsigned_abs().into(), denominator.into());
        Fixed { mid, err: err.saturating_add(1), scale: self.scale }
    }

    /// The sum over `n >= 0` of `t_n`, where `t_0 = 1` and `t_(n+1) = t_n * x * r(n)`.
    ///
    /// `ratio(n)` is `r(n)` as numerator and positive denominator. Hypothesis, to be met
    /// by the caller: `|r|` does not increase, or `|r| <= 1` and `|x| <= 1/2`. Then once
    /// `|x r(n)| <= 1/2` every later term is at most half the one before, so what follows
    /// a term is in size at most that term; the sum ends at a term of one unit.
    pub fn series(&self, ratio: impl Fn(u64) -> (i64, u64)) -> Fixed {
        let size_bits = self.size_bits();
        if self.err == UNKNOWN {
            return self.clone();
        }
        let mut term = Fixed::one(self.scale);
        let mut sum = term.clone();
        for n in 0..MAX_TERMS {
            let (numerator, denominator) = ratio(n);
            term = term.mul(self).rescale(numerator, denominator);
            sum = sum.add(&term);
            let tail = size(&term.mid).saturating_add(term.err);
            if size(&term.mid) <= 1 && halves(size_bits, numerator, denominator) {
                sum.err = sum.err.saturating_add(tail);
                return sum;
            }
        }
        Fixed { err: UNKNOWN, ..sum }
    }
}

/// A bound `|n| <= lead * 2^shift` from the leading bits of `n`.
fn leading(n: &BigInt) -> (u64, i64) {
    let surplus = n.bits().saturating_sub(63);
    let lead = match surplus {
        0 => size(n),
        _ => {
            // The two highest digits hold the 63 bits in question.
            let mut digits = n.iter_u64_digits().rev();
            let high = u128::from(digits.next().unwrap_or(0)) << 64;
            let pair = high | u128::from(digits.next().unwrap_or(0));
            ((pair << pair.leading_zeros()) >> 65) as u64 + 1
        }
    };
    (lead, surplus as i64)
}

/// `err * numerator / denominator` rounded up; what is unknown or too large is unknown.
fn grown(err: u64, numerator: u128, denominator: u128) -> u64 {
    match (err, u128::from(err).checked_mul(numerator)) {
        (UNKNOWN, _) | (_, None) => UNKNOWN,
        (_, Some(product)) => product.div_ceil(denominator).to_u64().unwrap_or(UNKNOWN),
    }
}

/// Whether `2^size_bits * |numerator| / denominator <= 1/2`.
fn halves(size_bits: i64, numerator: i64, denominator: u64) -> bool {
    let twice = u128::from(numerator.unsigned_abs()) << 1;
    if size_bits > 60 {
        false
    } else if size_bits >= 0 {
        twice << size_bits <= u128::from(denominator)
    } else {
        twice <= u128::from(denominator) << (-size_bits).min(60)
    }
}

/// `|n|`, saturating.
fn size(n: &BigInt) -> u64 {
    n.magnitude().to_u64().unwrap_or(UNKNOWN)
}
