//! Sum, difference, product, quotient, integer powers, and constants.
//!
//! Each result is the least interval that contains the exact set of results
//! (IEEE 1788-2015, clause 9.1 and table 9.1), apart from the rounding of its
//! two ends.

use super::domain::Definedness;
use super::interval::{Enclosure, greater, lesser};
use super::rounding::{End, Toward};
use Toward::{Down, Up};
use num_rational::BigRational;

/// Where an interval lies relative to 0.
enum Side {
    NonNegative,
    NonPositive,
    Both,
}

impl<E: End> Enclosure<E> {
    /// The least interval around a rational number.
    #[must_use]
    pub fn from_rational(value: &BigRational, precision: E::Precision) -> Self {
        Self::both(|toward| E::from_rational(value, precision, toward))
    }

    /// The least interval around an integer.
    #[must_use]
    pub fn from_integer(value: i64, precision: E::Precision) -> Self {
        if value.unsigned_abs() <= 1 << 53 {
            return Self::both(|toward| E::from_f64(value as f64, precision, toward));
        }
        Self::from_rational(&BigRational::from_integer(value.into()), precision)
    }

    /// An enclosure of pi.
    #[must_use]
    pub fn pi(precision: E::Precision) -> Self {
        Self::both(|toward| E::pi(precision, toward))
    }

    /// An enclosure of e = exp(1).
    #[must_use]
    pub fn e(precision: E::Precision) -> Self {
        let one = E::small(1.0, precision);
        Self::both(|toward| one.at(super::Function::Exp, toward))
    }

    /// An enclosure of Euler's constant 0.577...
    #[must_use]
    pub fn euler(precision: E::Precision) -> Self {
        Self::both(|toward| E::euler(precision, toward))
    }

    /// The interval of one small number in the precision of this one.
    #[inline]
    pub(super) fn alike(&self, value: f64) -> Self {
        Self::small(value, value, self.precision())
    }

    /// Whether 0 is the only member.
    #[inline]
    pub(super) fn is_zero(&self) -> bool {
        self.lo().sign().is_eq() && self.hi().sign().is_eq()
    }

    #[inline]
    fn side(&self) -> Side {
        if self.lo().sign().is_ge() {
            Side::NonNegative
        } else if self.hi().sign().is_le() {
            Side::NonPositive
        } else {
            Side::Both
        }
    }

    /// The sums of members.
    #[inline]
    #[must_use]
    pub fn plus(&self, other: &Self) -> Self {
        if self.is_empty() || other.is_empty() {
            return Self::empty(self.precision());
        }
        Self::between(self.lo().plus(other.lo(), Down), self.hi().plus(other.hi(), Up))
    }

    /// The differences of members.
    #[inline]
    #[must_use]
    pub fn minus(&self, other: &Self) -> Self {
        if self.is_empty() || other.is_empty() {
            return Self::empty(self.precision());
        }
        Self::between(self.lo().minus(other.hi(), Down), self.hi().minus(other.lo(), Up))
    }

    /// The products of members.
    #[inline]
    #[must_use]
    pub fn times(&self, other: &Self) -> Self {
        use Side::{Both, NonNegative, NonPositive};
        if self.is_empty() || other.is_empty() {
            return Self::empty(self.precision());
        }
        let (a, b, c, d) = (self.lo(), self.hi(), other.lo(), other.hi());
        let (lo_left, lo_right, hi_left, hi_right) = match (self.side(), other.side()) {
            (NonNegative, NonNegative) => (a, c, b, d),
            (NonNegative, NonPositive) => (b, c, a, d),
            (NonNegative, Both) => (b, c, b, d),
            (NonPositive, NonNegative) => (a, d, b, c),
            (NonPositive, NonPositive) => (b, d, a, c),
            (NonPositive, Both) => (a, d, a, c),
            (Both, NonNegative) => (a, d, b, d),
            (Both, NonPositive) => (b, c, a, c),
            (Both, Both) => {
                return Self::between(
                    lesser(&a.times(d, Down), &b.times(c, Down)).clone(),
                    greater(&a.times(c, Up), &b.times(d, Up)).clone(),
                );
            }
        };
        Self::between(lo_left.times(lo_right, Down), hi_left.times(hi_right, Up))
    }

    /// The quotients of members, where the divisor is not 0.
    #[inline]
    #[must_use]
    pub fn over(&self, divisor: &Self, defined: &mut Definedness) -> Self {
        if self.is_empty() || divisor.is_empty() || divisor.is_zero() {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(self.precision());
        }
        if divisor.contains_zero() {
            defined.lower_to(Definedness::Partly);
            return self.over_with_zero(divisor);
        }
        if divisor.is_certainly_negative() {
            return self.negated().over_positive(&divisor.negated());
        }
        self.over_positive(divisor)
    }

    #[inline]
    fn over_positive(&self, divisor: &Self) -> Self {
        let (a, b, c, d) = (self.lo(), self.hi(), divisor.lo(), divisor.hi());
        match self.side() {
            Side::NonNegative => Self::between(a.over(d, Down), b.over(c, Up)),
            Side::NonPositive => Self::between(a.over(c, Down), b.over(d, Up)),
            Side::Both => Self::between(a.over(c, Down), b.over(c, Up)),
        }
    }

    /// The hull of the quotients by the non-zero members of a divisor that
    /// contains 0 and something else.
    fn over_with_zero(&self, divisor: &Self) -> Self {
        if self.is_zero() {
            return self.clone();
        }
        if divisor.lo().sign().is_lt() {
            if divisor.hi().sign().is_gt() {
                return Self::whole(self.precision());
            }
            return self.negated().over_with_zero(&divisor.negated());
        }
        let infinity = |value| E::small(value, self.precision());
        match self.side() {
            Side::NonNegative => Self::between(self.lo().over(divisor.hi(), Down), infinity(f64::INFINITY)),
            Side::NonPositive => Self::between(infinity(f64::NEG_INFINITY), self.hi().over(divisor.hi(), Up)),
            Side::Both => Self::whole(self.precision()),
        }
    }

    /// The squares of members.
    #[inline]
    #[must_use]
    pub fn square(&self) -> Self {
        self.even_power(2)
    }

    /// Integer powers of members; `0^n` is defined for `n > 0` only.
    #[must_use]
    pub fn to_integer_power(&self, exponent: i64, defined: &mut Definedness) -> Self {
        if self.is_empty() {
            defined.lower_to(Definedness::Nowhere);
            return self.clone();
        }
        if exponent > 0 {
            return if exponent % 2 == 0 {
                self.even_power(exponent)
            } else {
                Self::between(
                    self.lo().to_integer_power(exponent, Down),
                    self.hi().to_integer_power(exponent, Up),
                )
            };
        }
        if self.is_zero() {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(self.precision());
        }
        if self.contains_zero() {
            defined.lower_to(Definedness::Partly);
        }
        if exponent == 0 {
            return self.alike(1.0);
        }
        // The function is decreasing on each side of 0 apart from a sign.
        let odd = exponent % 2 != 0;
        match self.side() {
            Side::NonNegative => Self::between(
                self.hi().to_integer_power(exponent, Down),
                self.lo().to_integer_power(exponent, Up),
            ),
            Side::NonPositive => {
                let mirrored = self.negated();
                let size = Self::between(
                    mirrored.hi().to_integer_power(exponent, Down),
                    mirrored.lo().to_integer_power(exponent, Up),
                );
                if odd { size.negated() } else { size }
            }
            Side::Both if odd => Self::whole(self.precision()),
            Side::Both => Self::between(
                self.magnitude().to_integer_power(exponent, Down),
                E::small(f64::INFINITY, self.precision()),
            ),
        }
    }

    #[inline]
    fn even_power(&self, exponent: i64) -> Self {
        if self.is_empty() {
            return self.clone();
        }
        Self::between(
            self.mignitude().to_integer_power(exponent, Down),
            self.magnitude().to_integer_power(exponent, Up),
        )
    }
}
