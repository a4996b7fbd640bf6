//! Numbers `m * 2^e` with integers `m` and `e`, and their rounding in a stated direction.
//!
//! An operation computes the exact result, or its floor together with the knowledge
//! that something was cut off, and then keeps `p` leading bits. What leaves the range
//! of exponents is rounded in the same direction: `None` is the infinity on that side.

use num_bigint::{BigInt, BigUint, Sign};
use num_integer::Integer;
use num_rational::BigRational;
use num_traits::{Signed, ToPrimitive, Zero};
use std::cmp::Ordering;

/// The side to which an inexact result is moved.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Toward {
    /// To the largest representable number not above the exact result.
    Down,
    /// To the smallest representable number not below the exact result.
    Up,
}

/// Non-zero results `x` satisfy `2^-REACH <= |x| < 2^REACH`.
pub const REACH: i64 = 1 << 40;

/// Largest size of the exponent of a dyadic that is written out as a rational.
const MAX_RATIONAL_EXPONENT: i64 = 1 << 20;

/// The number `mantissa * 2^exponent`. Ordered and compared by value.
#[derive(Clone, Debug)]
pub struct Dyadic {
    mantissa: Mantissa,
    exponent: i64,
}

/// A mantissa of at most [`SMALL`] bits is always `Small`: sums fit into a machine integer
/// and products into two, which makes boxes at 64 bits several times cheaper.
#[derive(Clone, Debug)]
enum Mantissa {
    Small(i128),
    Big(BigInt),
}
use Mantissa::{Big, Small};

const SMALL: u32 = 126;

/// A magnitude `m * 2^exponent`, to which something positive below one unit of `m`
/// has to be added if `cut` is set. Whoever sets `cut` provides more bits than are kept.
struct Exact<M> {
    negative: bool,
    magnitude: M,
    cut: bool,
    exponent: i64,
}

impl Toward {
    /// Whether a number of that sign moves away from zero.
    fn is_away(self, negative: bool) -> bool {
        (self == Toward::Up) != negative
    }
}

impl Exact<u128> {
    fn round(mut self, p: u32, toward: Toward) -> Option<Dyadic> {
        let surplus = (128 - self.magnitude.leading_zeros()).saturating_sub(p);
        if surplus > 0 {
            self.cut |= self.magnitude.trailing_zeros() < surplus;
            self.magnitude >>= surplus;
            self.exponent += i64::from(surplus);
        }
        if self.cut && toward.is_away(self.negative) {
            // Kept bits are fewer than 128 whenever something was cut.
            self.magnitude += 1;
        }
        if self.magnitude >> SMALL != 0 {
            let zeros = self.magnitude.trailing_zeros();
            if (self.magnitude >> zeros) >> SMALL != 0 {
                // Rounding is done; this only changes the form.
                let Exact { negative, magnitude, exponent, .. } = self;
                let magnitude = BigUint::from(magnitude);
                return Exact { negative, magnitude, cut: false, exponent }.round(128, toward);
            }
            self.magnitude >>= zeros;
            self.exponent += i64::from(zeros);
        }
        let m = self.magnitude as i128;
        let mantissa = Small(if self.negative { -m } else { m });
        Dyadic { mantissa, exponent: self.exponent }.within_reach(p, toward)
    }
}

impl Exact<BigUint> {
    fn round(mut self, p: u32, toward: Toward) -> Option<Dyadic> {
        let surplus = self.magnitude.bits().saturating_sub(u64::from(p));
        if surplus > 0 {
            self.cut |= self.magnitude.trailing_zeros().is_some_and(|zeros| zeros < surplus);
            self.magnitude >>= surplus;
            self.exponent += surplus as i64;
        }
        if self.cut && toward.is_away(self.negative) {
            self.magnitude += 1u32;
        }
        let sign = if self.negative { Sign::Minus } else { Sign::Plus };
        let mantissa = BigInt::from_biguint(sign, self.magnitude);
        Dyadic::from_parts(mantissa, self.exponent).within_reach(p, toward)
    }
}

impl Dyadic {
    /// Zero.
    pub fn zero() -> Dyadic {
        Dyadic { mantissa: Small(0), exponent: 0 }
    }

    /// `mantissa * 2^exponent`, or `None` outside the range of exponents.
    pub fn new(mantissa: BigInt, exponent: i64) -> Option<Dyadic> {
        let in_range = exponent.unsigned_abs() <= 2 * REACH as u64;
        let number = Dyadic::from_parts(mantissa, if in_range { exponent } else { 0 });
        let top = number.top();
        (number.is_zero() || in_range && top <= REACH && top > -REACH).then_some(number)
    }

    /// `2^k`; the caller keeps `k` inside the range of exponents.
    pub(super) fn power_of_two(k: i64) -> Dyadic {
        Dyadic { mantissa: Small(1), exponent: k }
    }

    /// Brings a mantissa into the form the fast paths expect.
    fn from_parts(mantissa: BigInt, exponent: i64) -> Dyadic {
        let bits = mantissa.bits();
        let small = u64::from(SMALL);
        if bits <= small {
            return match mantissa.to_i128() {
                Some(0) | None => Dyadic::zero(),
                Some(small) => Dyadic { mantissa: Small(small), exponent },
            };
        }
        let zeros = mantissa.trailing_zeros().unwrap_or(0);
        if bits - zeros <= small {
            return Dyadic::from_parts(mantissa >> zeros, exponent + zeros as i64);
        }
        Dyadic { mantissa: Big(mantissa), exponent }
    }

    fn big(&self) -> BigInt {
        match &self.mantissa {
            Small(m) => BigInt::from(*m),
            Big(m) => m.clone(),
        }
    }

    fn bits(&self) -> i64 {
        match &self.mantissa {
            Small(m) => i64::from(128 - m.unsigned_abs().leading_zeros()),
            Big(m) => m.bits() as i64,
        }
    }

    /// The `t` with `2^(t-1) <= |x| < 2^t`; meaningless for zero.
    pub fn top(&self) -> i64 {
        self.exponent + self.bits()
    }

    /// How many bits the mantissa has.
    pub(super) fn length(&self) -> u32 {
        self.bits().clamp(0, i64::from(u32::MAX)) as u32
    }

    /// -1, 0 or 1.
    pub fn signum(&self) -> i32 {
        match &self.mantissa {
            Small(m) => m.signum() as i32,
            Big(m) if m.is_negative() => -1,
            Big(_) => 1,
        }
    }

    /// Whether this is zero.
    pub fn is_zero(&self) -> bool {
        matches!(self.mantissa, Small(0))
    }

    /// Rounds a number whose exponent has left the range, in the given direction.
    fn within_reach(self, p: u32, toward: Toward) -> Option<Dyadic> {
        if self.is_zero() {
            return Some(Dyadic::zero());
        }
        let top = self.top();
        if top <= REACH && top > -REACH {
            return Some(self);
        }
        let negative = self.signum() < 0;
        let away = toward.is_away(negative);
        let magnitude = match (top > REACH, away) {
            (true, true) => return None,
            (true, false) => {
                let p = p.clamp(1, 64);
                let ones = u64::MAX >> (64 - p);
                Dyadic { mantissa: Small(ones.into()), exponent: REACH - i64::from(p) }
            }
            (false, true) => Dyadic::power_of_two(-REACH),
            (false, false) => Dyadic::zero(),
        };
        Some(if negative { magnitude.neg() } else { magnitude })
    }

    /// The number with the other sign.
    pub fn neg(&self) -> Dyadic {
        let mantissa = match &self.mantissa {
            Small(m) => Small(-m),
            Big(m) => Big(-m),
        };
        Dyadic { mantissa, exponent: self.exponent }
    }

    /// The number without its sign.
    pub fn abs(&self) -> Dyadic {
        if self.signum() < 0 { self.neg() } else { self.clone() }
    }

    /// `x * 2^k`, rounded only if the range of exponents is left.
    pub(super) fn scale(&self, k: i64, toward: Toward) -> Option<Dyadic> {
        let exponent = self.exponent.saturating_add(k).clamp(-4 * REACH, 4 * REACH);
        Dyadic { mantissa: self.mantissa.clone(), exponent }.within_reach(64, toward)
    }

    /// Keeps `p` leading bits.
    pub fn round(&self, p: u32, toward: Toward) -> Option<Dyadic> {
        if self.bits() <= i64::from(p) {
            return Some(self.clone());
        }
        match &self.mantissa {
            Small(m) => small(*m, false, self.exponent).round(p, toward),
            Big(m) => big(m.clone(), false, self.exponent).round(p, toward),
        }
    }

    /// `x + y`.
    pub fn add(&self, other: &Dyadic, p: u32, toward: Toward) -> Option<Dyadic> {
        if self.is_zero() {
            return other.round(p, toward);
        }
        if other.is_zero() {
            return self.round(p, toward);
        }
        let (high, low) = if self.top() >= other.top() { (self, other) } else { (other, self) };
        let lift = high.exponent - low.exponent;
        if let (Small(a), Small(b)) = (&high.mantissa, &low.mantissa)
            && p <= 100
        {
            let room = i64::from(SMALL) - high.bits();
            if lift < 0 {
                // The lower number is a multiple of a larger power of two; lifted, it
                // still has no more bits than the higher one.
                return small(a + (b << -lift), false, high.exponent).round(p, toward);
            } else if lift <= room {
                return small((a << lift) + b, false, low.exponent).round(p, toward);
            } else if high.top() - low.top() >= 2 {
                // The sum keeps at least 124 bits; of the lower number some may be cut off.
                let drop = (lift - room).min(127) as u32;
                let cut = b.trailing_zeros() < drop;
                let floor = (a << room) + (b >> drop);
                return small(floor, cut, high.exponent - room).round(p, toward);
            }
        }
        // With `p + 4` bits or more of the higher number, is the lower one below its unit?
        let padding = (i64::from(p) + 4 - high.bits()).max(0);
        if low.top() <= high.exponent - padding {
            let floor = (high.big() << padding) - i32::from(low.signum() < 0);
            return big(floor, true, high.exponent - padding).round(p, toward);
        }
        let (sum, exponent) = if lift < 0 {
            (high.big() + (low.big() << -lift), high.exponent)
        } else {
            ((high.big() << lift) + low.big(), low.exponent)
        };
        big(sum, false, exponent).round(p, toward)
    }

    /// `x * y`.
    pub fn mul(&self, other: &Dyadic, p: u32, toward: Toward) -> Option<Dyadic> {
        let exponent = self.exponent + other.exponent;
        match (&self.mantissa, &other.mantissa) {
            (Small(a), Small(b)) => {
                let negative = (*a < 0) != (*b < 0);
                let (high, low) = long_product(a.unsigned_abs(), b.unsigned_abs());
                if high == 0 {
                    return Exact { negative, magnitude: low, cut: false, exponent }.round(p, toward);
                } else if p > SMALL {
                    return big(BigInt::from(*a) * b, false, exponent).round(p, toward);
                }
                let drop = 128 - high.leading_zeros();
                let magnitude = high << (128 - drop) | low >> drop;
                let cut = low.trailing_zeros() < drop;
                let exponent = exponent + i64::from(drop);
                Exact { negative, magnitude, cut, exponent }.round(p, toward)
            }
            (Big(a), Big(b)) => big(a * b, false, exponent).round(p, toward),
            (Big(a), Small(b)) | (Small(b), Big(a)) => big(a * b, false, exponent).round(p, toward),
        }
    }

    /// `x / y`; the caller has excluded `y = 0`.
    pub(super) fn div(&self, other: &Dyadic, p: u32, toward: Toward) -> Option<Dyadic> {
        let negative = (self.signum() < 0) != (other.signum() < 0);
        if let (Small(a), Small(b)) = (&self.mantissa, &other.mantissa)
            && p <= 64
            && *a != 0
            && self.bits().max(other.bits()) <= 64
        {
            // Both are brought to 64 bits; the shift makes the quotient have 64 bits too.
            let (lift_a, lift_b) = (64 - self.bits(), 64 - other.bits());
            let (a, b) = (a.unsigned_abs() << lift_a, b.unsigned_abs() << lift_b);
            let shift = if a < b { 64 } else { 63 };
            let numerator = a << shift;
            let exponent = self.exponent - lift_a - (other.exponent - lift_b) - shift;
            let (magnitude, cut) = (numerator / b, numerator % b != 0);
            return Exact { negative, magnitude, cut, exponent }.round(p, toward);
        }
        let shift = (i64::from(p) + 2 + other.bits() - self.bits()).max(0);
        let (quotient, rest) = (self.big().abs() << shift).div_rem(&other.big().abs());
        let exponent = self.exponent - other.exponent - shift;
        let magnitude = quotient.into_parts().1;
        Exact { negative, magnitude, cut: !rest.is_zero(), exponent }.round(p, toward)
    }

    /// The square root of `x >= 0`.
    pub(super) fn sqrt(&self, p: u32, toward: Toward) -> Option<Dyadic> {
        let Small(m) = self.mantissa else {
            return self.sqrt_big(p, toward);
        };
        if m == 0 || p > 64 || m >> 64 != 0 {
            return self.sqrt_big(p, toward);
        }
        // 127 or 128 bits under the root give 64 bits; the exponent must become even.
        let lift = 128 - self.bits() - (self.exponent - (128 - self.bits())).rem_euclid(2);
        let radicand = m.unsigned_abs() << lift;
        let magnitude = radicand.isqrt();
        let cut = magnitude * magnitude != radicand;
        Exact { negative: false, magnitude, cut, exponent: (self.exponent - lift) / 2 }.round(p, toward)
    }

    fn sqrt_big(&self, p: u32, toward: Toward) -> Option<Dyadic> {
        let lift = (2 * i64::from(p) + 4 - self.bits()).max(0);
        let lift = lift + (self.exponent - lift).rem_euclid(2);
        let radicand = self.big() << lift;
        let root = radicand.sqrt();
        let cut = &root * &root != radicand;
        let magnitude = root.into_parts().1;
        Exact { negative: false, magnitude, cut, exponent: (self.exponent - lift) / 2 }.round(p, toward)
    }

    /// `n / d` with `d > 0`, rounded.
    pub fn from_rational(x: &BigRational, p: u32, toward: Toward) -> Option<Dyadic> {
        let numerator = Dyadic::from_parts(x.numer().clone(), 0);
        numerator.div(&Dyadic::from_parts(x.denom().clone(), 0), p, toward)
    }

    /// The floor of `x * 2^shift`, if that fits.
    pub(super) fn small_floor_scaled(&self, shift: i64) -> Option<i128> {
        let shift = shift + self.exponent;
        match self.mantissa {
            Small(m) if shift <= 0 => Some(m >> (-shift).min(127)),
            Small(m) if shift + self.bits() <= i64::from(SMALL) => Some(m << shift),
            _ => None,
        }
    }

    /// `m * 2^exponent`, with an exponent far inside the range.
    pub(super) fn from_small(m: i128, exponent: i64, p: u32, toward: Toward) -> Option<Dyadic> {
        small(m, false, exponent).round(p, toward)
    }

    /// The floor of `x * 2^shift`. The caller bounds `top() + shift`.
    pub(super) fn floor_scaled(&self, shift: i64) -> BigInt {
        let shift = shift + self.exponent;
        if shift >= 0 { self.big() << shift } else { self.big() >> -shift }
    }

    /// The largest integer not above `x`, exactly.
    pub fn floor(&self) -> Dyadic {
        if self.exponent >= 0 {
            return self.clone();
        }
        Dyadic::from_parts(self.floor_scaled(0), 0)
    }

    /// Whether `x` is an integer.
    pub fn is_integer(&self) -> bool {
        self.floor() == *self
    }

    /// The integer `x` is, if it is one of at most 64 bits and a sign.
    pub fn to_i128(&self) -> Option<i128> {
        (self.is_zero() || self.top() <= 64 && self.is_integer())
            .then(|| self.floor_scaled(0).to_i128())
            .flatten()
    }

    /// The same number as a rational; `None` if it would be too long to write out.
    pub fn to_rational(&self) -> Option<BigRational> {
        if self.exponent.abs() > MAX_RATIONAL_EXPONENT {
            return None;
        }
        let shift = self.exponent.unsigned_abs();
        Some(if self.exponent >= 0 {
            BigRational::from_integer(self.big() << shift)
        } else {
            BigRational::new(self.big(), BigInt::from(1) << shift)
        })
    }
}

/// The two halves of `x * y` for factors below `2^127`: long multiplication in base `2^64`,
/// where such factors leave room for the carries.
pub(super) fn long_product(x: u128, y: u128) -> (u128, u128) {
    let half = |x: u128| (x >> 64, x & u128::from(u64::MAX));
    let ((x1, x0), (y1, y0)) = (half(x), half(y));
    let middle = x1 * y0 + x0 * y1;
    let (low, carry) = (x0 * y0).overflowing_add(middle << 64);
    (x1 * y1 + (middle >> 64) + u128::from(carry), low)
}

/// The number in `[floor, floor + 1) * 2^exponent`, equal to the left end unless `cut`.
fn small(floor: i128, cut: bool, exponent: i64) -> Exact<u128> {
    let negative = floor < 0;
    let magnitude = floor.unsigned_abs() - u128::from(negative && cut);
    Exact { negative, magnitude, cut, exponent }
}

/// As [`small`], for integers of any length.
fn big(floor: BigInt, cut: bool, exponent: i64) -> Exact<BigUint> {
    let negative = floor.is_negative();
    let magnitude = floor.into_parts().1 - u32::from(negative && cut);
    Exact { negative, magnitude, cut, exponent }
}

impl From<i64> for Dyadic {
    fn from(n: i64) -> Dyadic {
        Dyadic { mantissa: Small(n.into()), exponent: 0 }
    }
}

impl From<BigInt> for Dyadic {
    fn from(n: BigInt) -> Dyadic {
        Dyadic::from_parts(n, 0)
    }
}

impl Ord for Dyadic {
    fn cmp(&self, other: &Dyadic) -> Ordering {
        let sign = self.signum();
        if sign != other.signum() || sign == 0 {
            return sign.cmp(&other.signum());
        }
        let by_size = self.top().cmp(&other.top()).then_with(|| {
            // Equal leading positions: aligning costs no more than the longer mantissa.
            let shift = self.exponent - other.exponent;
            match (&self.mantissa, &other.mantissa) {
                (Small(a), Small(b)) => {
                    let (a, b) = (a.unsigned_abs(), b.unsigned_abs());
                    (a << shift.max(0)).cmp(&(b << (-shift).max(0)))
                }
                _ => (self.big().abs() << shift.max(0)).cmp(&(other.big().abs() << (-shift).max(0))),
            }
        });
        if sign < 0 { by_size.reverse() } else { by_size }
    }
}

impl PartialOrd for Dyadic {
    fn partial_cmp(&self, other: &Dyadic) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl PartialEq for Dyadic {
    fn eq(&self, other: &Dyadic) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for Dyadic {}

#[cfg(test)]
mod tests {
    use super::Toward::{Down, Up};
    use super::*;

    /// Mantissas around the limits of the fast paths, with exponents near and far.
    fn samples() -> Vec<Dyadic> {
        let one = BigInt::from(1);
        let mut mantissas = vec![one.clone(), BigInt::from(3), BigInt::from(0x1234_5678_9abc_def1u64)];
        for bits in [31, 63, 64, 65, 125, 126, 127, 128, 200] {
            mantissas.push((&one << bits) - 1);
            mantissas.push((&one << bits) + 1);
        }
        let mut samples = vec![Dyadic::zero()];
        for (i, m) in mantissas.iter().enumerate() {
            for exponent in [-200, -127, -64, -1, 0, 1, 63, 130] {
                let m = if (i as i64 + exponent) % 2 == 0 { m.clone() } else { -m };
                samples.push(Dyadic::new(m, exponent).expect("in range"));
            }
        }
        samples
    }

    fn exact(x: &Dyadic) -> BigRational {
        x.to_rational().expect("short")
    }

    /// `down` and `up` are the neighbours with `p` bits around `value`, or both equal it.
    fn check(what: &str, value: &BigRational, down: Option<Dyadic>, up: Option<Dyadic>, p: u32) {
        let (down, up) = (down.expect("finite"), up.expect("finite"));
        let (a, b) = (exact(&down), exact(&up));
        assert!(a <= *value && *value <= b, "{what}: {value} not in [{a}, {b}]");
        for end in [&down, &up] {
            let bits = end.big().abs() >> end.big().trailing_zeros().unwrap_or(0);
            assert!(bits.bits() <= u64::from(p), "{what}: more than {p} bits");
        }
        // One unit in the last place, taken at the end farther from 0, bounds the width.
        let unit = BigRational::from_integer(2.into()).pow((down.top().max(up.top()) - i64::from(p)) as i32);
        assert!(a == b || &b - &a <= unit, "{what}: [{a}, {b}] is wider than one unit");
        assert!(a != b || a == *value, "{what}: not exact");
    }

    #[test]
    fn operations_round_to_the_neighbours() {
        let samples = samples();
        for (i, x) in samples.iter().enumerate() {
            for y in samples.iter().skip(i % 7).step_by(7) {
                for p in [1, 24, 64, 65, 100, 101, 126, 127, 128, 300] {
                    let what = format!("{x:?} and {y:?} at {p}");
                    let (a, b) = (exact(x), exact(y));
                    check(&what, &(&a + &b), x.add(y, p, Down), x.add(y, p, Up), p);
                    check(&what, &(&a * &b), x.mul(y, p, Down), x.mul(y, p, Up), p);
                    if !y.is_zero() {
                        check(&what, &(&a / &b), x.div(y, p, Down), x.div(y, p, Up), p);
                    }
                    assert_eq!(x.cmp(y), a.cmp(&b), "{what}");
                }
            }
        }
    }

    #[test]
    fn roots_round_to_the_neighbours() {
        for x in samples().iter().map(Dyadic::abs) {
            for p in [1, 24, 63, 64, 65, 126, 200] {
                let (down, up) = (x.sqrt(p, Down).expect("finite"), x.sqrt(p, Up).expect("finite"));
                let (a, b, value) = (exact(&down), exact(&up), exact(&x));
                assert!(&a * &a <= value && value <= &b * &b, "sqrt of {x:?} at {p}");
                let unit = BigRational::from_integer(2.into()).pow((up.top() - i64::from(p)) as i32);
                assert!(a == b && &a * &a == value || &b - &a <= unit, "sqrt of {x:?} at {p}");
            }
        }
        let nine = Dyadic::from(9).scale(1000, Down).expect("in range");
        assert_eq!(nine.sqrt(64, Up), Dyadic::from(3).scale(500, Up));
    }

    #[test]
    fn rounding_to_integers() {
        for x in samples() {
            let floor = BigRational::from_integer(exact(&x).floor().to_integer());
            assert_eq!(exact(&x.floor()), floor, "{x:?}");
            assert_eq!(x.is_integer(), exact(&x) == floor, "{x:?}");
        }
        assert_eq!(Dyadic::new((-5).into(), -1).and_then(|x| x.to_i128()), None);
        assert_eq!(Dyadic::from(-5).to_i128(), Some(-5));
        // An exponent of -2^40 costs nothing.
        let tiny = Dyadic::power_of_two(-REACH);
        assert_eq!(tiny.floor(), Dyadic::zero());
        assert_eq!(tiny.neg().floor(), Dyadic::from(-1));
        assert_eq!(tiny.to_rational(), None);
    }

    #[test]
    fn the_range_of_exponents_is_left_outward() {
        let huge = Dyadic::power_of_two(REACH - 1);
        let tiny = Dyadic::power_of_two(-REACH);
        for p in [24, 64, 200] {
            assert_eq!(huge.mul(&huge, p, Up), None);
            assert_eq!(huge.neg().mul(&huge, p, Down), None);
            let largest = huge.mul(&huge, p, Down).expect("finite");
            assert!(largest >= huge && largest.top() == REACH);
            assert_eq!(tiny.mul(&tiny, p, Down), Some(Dyadic::zero()));
            assert_eq!(tiny.mul(&tiny, p, Up), Some(tiny.clone()));
            assert_eq!(tiny.neg().mul(&tiny, p, Down), Some(tiny.neg()));
            assert_eq!(tiny.div(&huge, p, Up), Some(tiny.clone()));
            // Summands 2^41 binary places apart.
            let sum = huge.add(&tiny.neg(), p, Down).expect("finite");
            assert!(sum < huge && huge.add(&tiny.neg(), p, Up) == Some(huge.clone()));
        }
        assert_eq!(Dyadic::new(1.into(), i64::MAX), None);
        assert_eq!(Dyadic::new(1.into(), i64::MIN), None);
        assert_eq!(Dyadic::new(0.into(), i64::MIN), Some(Dyadic::zero()));
    }

    #[test]
    fn rationals() {
        for (n, d) in [(1, 3), (-1, 3), (2, 7), (0, 1), (-5, 8), (i64::MAX, 1_000_003)] {
            let q = BigRational::new(n.into(), d.into());
            for p in [1, 32, 64, 65, 200] {
                let down = Dyadic::from_rational(&q, p, Down);
                check("rational", &q, down, Dyadic::from_rational(&q, p, Up), p);
            }
        }
    }
}
