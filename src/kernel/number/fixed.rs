//! Approximations on a fixed grid with a counted error: the engine of the series.

use super::dyadic::{Dyadic, Toward, long_product};
use super::interval::Interval;
use num_bigint::BigInt;
use num_traits::{One, Signed, ToPrimitive};

/// Some real number `x` with `|x - mid * 2^-scale| <= err * 2^-scale`.
///
/// `err` saturates; [`UNKNOWN`] means that nothing is known, and turns into the whole line.
#[derive(Clone, Debug)]
pub struct Fixed {
    mid: Mid,
    err: u64,
    scale: u32,
}

/// A grid number. What fits is `Narrow`: at 64 bits nearly everything does, and a product
/// is then a few machine instructions.
#[derive(Clone, Debug)]
enum Mid {
    Narrow(i128),
    Wide(BigInt),
}
use Mid::{Narrow, Wide};

/// The error that says "any real number".
const UNKNOWN: u64 = u64::MAX;

/// Most terms a series may take; 4096 bits need far fewer.
const MAX_TERMS: u64 = 100_000;

impl Fixed {
    /// The number one.
    pub fn one(scale: u32) -> Fixed {
        Fixed::new(BigInt::one() << scale, 0, scale)
    }

    /// A number known to lie in `[mid - err, mid + err] * 2^-scale`.
    pub fn new(mid: BigInt, err: u64, scale: u32) -> Fixed {
        Fixed { mid: mid.into(), err, scale }
    }

    /// Any number of a bounded interval. The caller bounds its size.
    pub fn from_interval(x: &Interval, scale: u32) -> Fixed {
        let (Some(a), Some(b)) = (x.lower(), x.upper()) else {
            return Fixed::new(BigInt::ZERO, UNKNOWN, scale);
        };
        let shift = i64::from(scale);
        let floor = |x: &Dyadic| match x.small_floor_scaled(shift) {
            Some(m) => Mid::from_i128(m),
            None => x.floor_scaled(shift).into(),
        };
        let mid = floor(a);
        let err = match x.as_point() {
            Some(_) => 1,
            None => floor(b).add(&mid.neg()).size().saturating_add(1),
        };
        Fixed { mid, err, scale }
    }

    /// All numbers this one may be, with ends of at most `p` bits.
    pub fn to_interval(&self, p: u32) -> Interval {
        let end = |err: i128, toward| match self.mid.add(&Narrow(err)) {
            Narrow(m) => Dyadic::from_small(m, -i64::from(self.scale), p, toward),
            Wide(m) => Dyadic::new(m, -i64::from(self.scale))?.round(p, toward),
        };
        let err = i128::from(self.err);
        let ends = Interval::new(end(-err, Toward::Down), end(err, Toward::Up));
        ends.filter(|_| self.err != UNKNOWN).unwrap_or_else(Interval::whole)
    }

    /// The same number on a grid that has `k` bits less.
    pub fn coarser(&self, k: u32) -> Fixed {
        Fixed { scale: self.scale - k, ..self.halve(k) }
    }

    /// `k * x`.
    pub fn times_integer(&self, k: i128) -> Fixed {
        let err = match self.err {
            UNKNOWN => UNKNOWN,
            err => k.unsigned_abs().saturating_mul(err.into()).to_u64().unwrap_or(UNKNOWN),
        };
        Fixed { mid: (self.mid.to_big() * k).into(), err, scale: self.scale }
    }

    /// `-x`.
    pub fn neg(&self) -> Fixed {
        Fixed { mid: self.mid.neg(), ..*self }
    }

    /// Whether `|x| <= 1/2` is known.
    pub fn is_at_most_half(&self) -> bool {
        self.size_bits() < 0
    }

    /// Some `b` with `|x| <= 2^b`.
    fn size_bits(&self) -> i64 {
        (self.mid.to_big().abs() + self.err).bits() as i64 - i64::from(self.scale)
    }

    /// `x + y`.
    pub fn add(&self, other: &Fixed) -> Fixed {
        let err = self.err.saturating_add(other.err);
        Fixed { mid: self.mid.add(&other.mid), err, scale: self.scale }
    }

    /// `x - y`.
    pub fn sub(&self, other: &Fixed) -> Fixed {
        self.add(&other.neg())
    }

    /// `x * y`: `|x y - m n| <= |m| f + |n| e + e f`, and one unit for the cut.
    pub fn mul(&self, other: &Fixed) -> Fixed {
        let cross = (u128::from(self.err) * u128::from(other.err)) >> self.scale.min(127);
        let err = self
            .mid
            .times_error(other.err, self.scale)
            .saturating_add(other.mid.times_error(self.err, self.scale))
            .saturating_add(cross.to_u64().unwrap_or(UNKNOWN))
            .saturating_add(2);
        let narrow = match (&self.mid, &other.mid) {
            (Narrow(a), Narrow(b)) => shifted_product(*a, *b, self.scale),
            _ => None,
        };
        let mid = narrow.unwrap_or_else(|| match (&self.mid, &other.mid) {
            (Wide(a), Wide(b)) => Mid::from((a * b) >> self.scale),
            (Wide(a), Narrow(b)) | (Narrow(b), Wide(a)) => Mid::from((a * b) >> self.scale),
            (Narrow(a), Narrow(b)) => Mid::from((BigInt::from(*a) * b) >> self.scale),
        });
        Fixed { mid, err, scale: self.scale }
    }

    /// `x / 2^k`.
    pub fn halve(&self, k: u32) -> Fixed {
        let mid = match &self.mid {
            Narrow(m) => Narrow(m >> k.min(127)),
            Wide(m) => Mid::from(m >> k),
        };
        let err = match self.err {
            UNKNOWN => UNKNOWN,
            err => (err >> k.min(63)) + 2,
        };
        Fixed { mid, err, scale: self.scale }
    }

    /// `x * numerator / denominator`.
    fn rescale(&self, numerator: i64, denominator: u64) -> Fixed {
        let narrow = match &self.mid {
            Narrow(m) => m.checked_mul(numerator.into()),
            Wide(_) => None,
        };
        let mid = match narrow {
            Some(m) => Mid::from_i128(m / i128::from(denominator)),
            None => (self.mid.to_big() * numerator / denominator).into(),
        };
        let err = match self.err {
            UNKNOWN => UNKNOWN,
            err => (u128::from(err) * u128::from(numerator.unsigned_abs()) / u128::from(denominator))
                .to_u64()
                .unwrap_or(UNKNOWN)
                .saturating_add(2),
        };
        Fixed { mid, err, scale: self.scale }
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
            let tail = term.mid.size().saturating_add(term.err);
            if term.mid.size() <= 1 && halves(size_bits, numerator, denominator) {
                sum.err = sum.err.saturating_add(tail);
                return sum;
            }
        }
        Fixed { err: UNKNOWN, ..sum }
    }
}

impl Mid {
    fn neg(&self) -> Mid {
        match self {
            Narrow(m) => Narrow(-m),
            Wide(m) => Wide(-m),
        }
    }

    fn add(&self, other: &Mid) -> Mid {
        match (self, other) {
            // Narrow numbers have at most 126 bits, so this cannot overflow.
            (Narrow(a), Narrow(b)) => Mid::from_i128(a + b),
            (a, b) => (a.to_big() + b.to_big()).into(),
        }
    }

    fn from_i128(m: i128) -> Mid {
        if m.unsigned_abs() >> 126 == 0 { Narrow(m) } else { Wide(m.into()) }
    }

    fn to_big(&self) -> BigInt {
        match self {
            Narrow(m) => BigInt::from(*m),
            Wide(m) => m.clone(),
        }
    }

    /// The absolute value, saturating.
    fn size(&self) -> u64 {
        match self {
            Narrow(m) => m.unsigned_abs().to_u64().unwrap_or(UNKNOWN),
            Wide(_) => UNKNOWN,
        }
    }

    /// An upper bound of `err * |mid| / 2^scale`, from the 63 leading bits.
    fn times_error(&self, err: u64, scale: u32) -> u64 {
        let (lead, surplus) = match self {
            Narrow(m) => {
                let size = m.unsigned_abs();
                let surplus = (128 - size.leading_zeros()).saturating_sub(63);
                ((size >> surplus) as u64 + 1, i64::from(surplus))
            }
            Wide(m) => {
                // The two highest digits, of which the first is not 0, hold the bits.
                let mut digits = m.iter_u64_digits().rev();
                let high = u128::from(digits.next().unwrap_or(0)) << 64;
                let pair = high | u128::from(digits.next().unwrap_or(0));
                ((pair << pair.leading_zeros() >> 65) as u64 + 1, m.bits() as i64 - 63)
            }
        };
        let product = u128::from(err) * u128::from(lead);
        match (err, surplus - i64::from(scale)) {
            (0, _) => 0,
            (UNKNOWN, _) | (_, 1..) => UNKNOWN,
            (_, shift) => ((product >> (-shift).min(127)) + 1).to_u64().unwrap_or(UNKNOWN),
        }
    }
}

impl From<BigInt> for Mid {
    fn from(n: BigInt) -> Mid {
        match n.to_i128() {
            Some(m) if m.unsigned_abs() >> 126 == 0 => Narrow(m),
            _ => Wide(n),
        }
    }
}

/// `a * b / 2^shift`, cut towards 0, if it is narrow.
fn shifted_product(a: i128, b: i128, shift: u32) -> Option<Mid> {
    let (high, low) = long_product(a.unsigned_abs(), b.unsigned_abs());
    let product = match shift {
        0 => (high == 0).then_some(low)?,
        1..128 => (high >> shift == 0).then(|| high << (128 - shift) | low >> shift)?,
        128..256 => high >> (shift - 128),
        _ => 0,
    };
    let product = i128::try_from(product).ok()?;
    Some(Mid::from_i128(if (a < 0) == (b < 0) { product } else { -product }))
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

#[cfg(test)]
mod tests {
    use super::*;
    use num_rational::BigRational;

    #[test]
    fn products_on_narrow_and_wide_grids_agree() {
        let values = [0, 1, -1, 7, -(1 << 40), (1i128 << 90) + 12345, -(1i128 << 125) + 99];
        for a in values {
            for b in values {
                for shift in [0, 1, 64, 80, 127, 128, 130, 250] {
                    let exact = BigInt::from(a) * b;
                    let cut: BigInt = exact.abs() >> shift;
                    let expected = if exact.is_negative() { -cut } else { cut };
                    match shifted_product(a, b, shift) {
                        Some(mid) => assert_eq!(mid.to_big(), expected, "{a} * {b} >> {shift}"),
                        None => assert!(expected.bits() > 126, "{a} * {b} >> {shift}"),
                    }
                }
            }
        }
    }

    #[test]
    fn errors_are_counted_and_saturate() {
        let x = Fixed::new(BigInt::from(3) << 40, 5, 40);
        let y = Fixed::new(BigInt::from(-2) << 40, 7, 40);
        // 3 * 7 + 2 * 5 units, and a few for the cuts.
        let product = x.mul(&y);
        assert!((31..=40).contains(&product.err), "{product:?}");
        let unknown = Fixed::new(BigInt::ZERO, UNKNOWN, 40);
        for value in [
            x.mul(&unknown),
            unknown.mul(&y),
            x.add(&unknown),
            unknown.halve(9),
            unknown.rescale(1, 7),
            unknown.series(|n| (1, n + 1)),
        ] {
            assert_eq!(value.to_interval(64), Interval::whole());
        }
        let huge = Fixed::new(BigInt::from(1) << 300, 1, 40);
        assert_eq!(huge.mul(&x).err, UNKNOWN);
    }

    #[test]
    fn a_series_contains_its_sum() {
        // The geometric series just below 1/2: terms halve from the first on, the hardest
        // case for the tail.
        for scale in [40, 100, 300] {
            let x: BigInt = (BigInt::from(1) << (scale - 1)) - 2;
            let one: BigInt = BigInt::from(1) << scale;
            let value = BigRational::new(one.clone(), one - &x);
            let sum = Fixed::new(x, 0, scale).series(|_| (1, 1)).to_interval(64);
            assert!(sum.contains(&Interval::from_rational(&value, 64)), "{sum:?}");
            assert!(sum.is_tight(scale.min(64) - 12), "{sum:?}");
        }
        // For a number known only to lie in [-1/4, 1/4] the sum ends at once, and the tail
        // is what carries it from 1 + 1/4 to 4/3.
        let wide = Fixed::new(BigInt::ZERO, 1 << 38, 40).series(|_| (1, 1)).to_interval(64);
        let values = ["4/5", "4/3"].map(|q| q.parse::<BigRational>().expect("a number"));
        assert!(
            wide.contains(&Interval::from_ends(Some(&values[0]), Some(&values[1]), 64).expect("ordered"))
        );
        // A series that does not fall fast enough ends with nothing known.
        let one = Fixed::one(40);
        assert_eq!(one.series(|_| (1, 1)).to_interval(64), Interval::whole());
    }
}
