//! The general power `b^p`.
//!
//! It is defined for `b > 0`; for `b = 0` and `p > 0`; and for `b < 0` and an
//! integer `p`. The exponential form `exp(p * log(b))` shows that for `b > 0`
//! it is monotone in each of its arguments, the direction depending on the
//! sign of `p` and of `b - 1`, so its extrema on a box are at corners.

use crate::enclosure::domain::Definedness;
use crate::enclosure::interval::{Enclosure, greater, lesser};
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};

impl<E: End> Enclosure<E> {
    /// Powers of members with exponents from another enclosure.
    #[must_use]
    pub fn to_power(&self, exponent: &Self, defined: &mut Definedness) -> Self {
        if self.is_empty() || exponent.is_empty() {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(self.precision());
        }
        if exponent.is_point()
            && let Some(n) = exponent.lo().as_integer()
        {
            return self.to_integer_power(n, defined);
        }
        if self.lo().sign().is_gt() {
            return self.positive_to_power(exponent);
        }
        if self.lo().sign().is_eq() && exponent.lo().sign().is_gt() {
            return self.positive_to_power(exponent);
        }
        let negative = self.negative_to_integer_power(exponent);
        let not_negative = self.non_negative_part_to_power(exponent);
        let result = negative.hull(&not_negative);
        defined.lower_to(if result.is_empty() { Definedness::Nowhere } else { Definedness::Partly });
        result
    }

    /// Powers with exponents that are known to be integers, of which the
    /// enclosure `exponent` is the hull. Negative bases are then admitted.
    #[must_use]
    pub fn to_power_at_integers(&self, exponent: &Self, defined: &mut Definedness) -> Self {
        let exponent = exponent.integer_hull();
        if self.is_empty() || exponent.is_empty() {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(self.precision());
        }
        if exponent.is_point() || self.lo().sign().is_gt() {
            return self.to_power(&exponent, defined);
        }
        if self.lo().sign().is_lt() {
            // Between the integers there is nothing to be continuous along.
            defined.lower_to(Definedness::Everywhere);
        }
        let all_positive = exponent.lo().sign().is_gt();
        if self.is_zero() && !exponent.hi().sign().is_gt() {
            defined.lower_to(Definedness::Nowhere);
        } else if self.contains_zero() && !all_positive {
            defined.lower_to(Definedness::Partly);
        }
        self.negative_to_integer_power(&exponent).hull(&self.non_negative_part_to_power(&exponent))
    }

    /// The least interval around the integers among the members.
    pub(super) fn integer_hull(&self) -> Self {
        if self.is_empty() {
            return self.clone();
        }
        Self::new(self.lo().ceil(), self.hi().floor()).unwrap_or_else(|| Self::empty(self.precision()))
    }

    /// Powers of the members `>= 0`, where defined.
    fn non_negative_part_to_power(&self, exponent: &Self) -> Self {
        let precision = self.precision();
        if self.hi().sign().is_lt() {
            return Self::empty(precision);
        }
        if self.hi().sign().is_eq() {
            // Only the base 0 is left.
            return if exponent.hi().sign().is_gt() { self.alike(0.0) } else { Self::empty(precision) };
        }
        Self::between(greater(self.lo(), &E::small(0.0, precision)).clone(), self.hi().clone())
            .positive_to_power(exponent)
    }

    /// Powers of the members `< 0` with the integers among the exponents.
    fn negative_to_integer_power(&self, exponent: &Self) -> Self {
        let precision = self.precision();
        let exponent = exponent.integer_hull();
        if self.lo().sign().is_ge() || exponent.is_empty() {
            return Self::empty(precision);
        }
        let base = Self::between(self.lo().clone(), lesser(self.hi(), &E::small(0.0, precision)).clone());
        if exponent.is_point()
            && let Some(n) = exponent.lo().as_integer()
        {
            let mut ignored = Definedness::Continuous;
            return base.to_integer_power(n, &mut ignored);
        }
        let size = base.negated().positive_to_power(&exponent);
        size.hull(&size.negated())
    }

    /// The closure of the powers of the positive members of an enclosure
    /// without negative members and not only 0.
    fn positive_to_power(&self, exponent: &Self) -> Self {
        let (b, c, p, q) = (self.lo(), self.hi(), exponent.lo(), exponent.hi());
        let one = E::small(1.0, self.precision());
        let (b_from_one, c_from_one) = (b.order(&one).is_ge(), c.order(&one).is_ge());
        let (lo, hi);
        if p.sign().is_ge() {
            lo = b.to_power(if b_from_one { p } else { q }, Down);
            hi = c.to_power(if c_from_one { q } else { p }, Up);
        } else if q.sign().is_le() {
            lo = c.to_power(if c_from_one { p } else { q }, Down);
            hi = b.to_power(if b_from_one { q } else { p }, Up);
        } else {
            lo = lesser(&b.to_power(q, Down), &c.to_power(p, Down)).clone();
            hi = greater(&b.to_power(p, Up), &c.to_power(q, Up)).clone();
        }
        Self::between(lo, hi)
    }
}
