//! The type of an enclosure: a closed interval of reals, its set operations,
//! and its relations by name.
//!
//! There is no order operator on enclosures, on purpose: "less" would hide
//! whether every pair of points or some pair is meant. The relations below
//! say it. Each of them is *false* on an empty enclosure, also those about
//! every point, so that an enclosure that became empty can never count as the
//! success of a test.

use super::rounding::{End, Toward};
use num_rational::BigRational;
use std::cmp::Ordering;

/// A closed interval of real numbers with ends of type `E`.
///
/// An infinite end means that the interval is unbounded on that side; the
/// infinity itself is not a member. The empty set is a value of its own.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Enclosure<E> {
    /// At most every member. `+infinity` in the empty set.
    lo: E,
    /// At least every member. `-infinity` in the empty set.
    hi: E,
}

impl<E: End> Enclosure<E> {
    /// The interval between two ends, or nothing if they are out of order, no
    /// real number lies between them, or one is not a number.
    #[inline]
    #[must_use]
    pub fn new(lo: E, hi: E) -> Option<Self> {
        let no_member = lo.order(&hi).is_gt() || (lo.is_infinite() && lo == hi);
        (!no_member && !lo.is_no_number() && !hi.is_no_number()).then_some(Enclosure { lo, hi })
    }

    /// The interval between two ends that are in order by construction.
    #[inline]
    pub(super) fn between(lo: E, hi: E) -> Self {
        debug_assert!(lo.order(&hi).is_le(), "ends out of order: {lo:?} {hi:?}");
        Enclosure { lo, hi }
    }

    /// The two bounds of one number, computed by the same code in both directions.
    #[inline]
    pub(super) fn both(bound: impl Fn(Toward) -> E) -> Self {
        Self::between(bound(Toward::Down), bound(Toward::Up))
    }

    /// The set of one finite number; empty for anything else.
    #[inline]
    #[must_use]
    pub fn point(value: E) -> Self {
        if value.is_infinite() || value.is_no_number() {
            return Self::empty(value.precision());
        }
        Enclosure { lo: value.clone(), hi: value }
    }

    /// The empty set.
    #[inline]
    #[must_use]
    pub fn empty(precision: E::Precision) -> Self {
        Enclosure { lo: E::small(f64::INFINITY, precision), hi: E::small(f64::NEG_INFINITY, precision) }
    }

    /// All reals.
    #[inline]
    #[must_use]
    pub fn whole(precision: E::Precision) -> Self {
        Enclosure { lo: E::small(f64::NEG_INFINITY, precision), hi: E::small(f64::INFINITY, precision) }
    }

    /// The interval between two of the numbers that [`End::small`] knows.
    #[inline]
    pub(super) fn small(lo: f64, hi: f64, precision: E::Precision) -> Self {
        Self::between(E::small(lo, precision), E::small(hi, precision))
    }

    /// The lower end; `+infinity` if empty.
    #[inline]
    #[must_use]
    pub fn lo(&self) -> &E {
        &self.lo
    }

    /// The upper end; `-infinity` if empty.
    #[inline]
    #[must_use]
    pub fn hi(&self) -> &E {
        &self.hi
    }

    /// The precision of the ends.
    #[inline]
    #[must_use]
    pub fn precision(&self) -> E::Precision {
        self.lo.precision()
    }

    /// Whether there is no member.
    #[inline]
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.lo.order(&self.hi).is_gt()
    }

    /// Whether there is exactly one member.
    #[inline]
    #[must_use]
    pub fn is_point(&self) -> bool {
        self.lo == self.hi
    }

    /// Whether both ends are finite; false if empty.
    #[inline]
    #[must_use]
    pub fn is_bounded(&self) -> bool {
        !self.lo.is_infinite() && !self.hi.is_infinite()
    }

    /// Whether the number is a member.
    #[inline]
    #[must_use]
    pub fn contains(&self, value: &E) -> bool {
        !value.is_infinite()
            && !value.is_no_number()
            && self.lo.order(value).is_le()
            && value.order(&self.hi).is_le()
    }

    /// Whether 0 is a member.
    #[inline]
    #[must_use]
    pub fn contains_zero(&self) -> bool {
        self.lo.sign().is_le() && self.hi.sign().is_ge()
    }

    /// Whether the rational number is a member; exact.
    #[must_use]
    pub fn contains_rational(&self, value: &BigRational) -> bool {
        !self.is_empty() && self.lo.order_rational(value).is_le() && self.hi.order_rational(value).is_ge()
    }

    /// Whether every member is a member of `other`; the empty set is a subset of all.
    #[inline]
    #[must_use]
    pub fn is_subset_of(&self, other: &Self) -> bool {
        self.is_empty() || (other.lo.order(&self.lo).is_le() && self.hi.order(&other.hi).is_le())
    }

    /// Whether the two have no member in common.
    #[inline]
    #[must_use]
    pub fn is_disjoint_from(&self, other: &Self) -> bool {
        self.is_empty()
            || other.is_empty()
            || self.hi.order(&other.lo).is_lt()
            || other.hi.order(&self.lo).is_lt()
    }

    /// The common members.
    #[inline]
    #[must_use]
    pub fn intersection(&self, other: &Self) -> Self {
        if self.is_disjoint_from(other) {
            return Self::empty(self.precision());
        }
        Enclosure { lo: greater(&self.lo, &other.lo).clone(), hi: lesser(&self.hi, &other.hi).clone() }
    }

    /// The least interval that contains both.
    #[inline]
    #[must_use]
    pub fn hull(&self, other: &Self) -> Self {
        // The ends of the empty set are chosen so that this needs no case.
        Enclosure { lo: lesser(&self.lo, &other.lo).clone(), hi: greater(&self.hi, &other.hi).clone() }
    }

    /// Whether there are members and all are `> 0`.
    #[inline]
    #[must_use]
    pub fn is_certainly_positive(&self) -> bool {
        self.lo.sign().is_gt() && !self.is_empty()
    }

    /// Whether there are members and all are `>= 0`.
    #[inline]
    #[must_use]
    pub fn is_certainly_non_negative(&self) -> bool {
        self.lo.sign().is_ge() && !self.is_empty()
    }

    /// Whether there are members and all are `< 0`.
    #[inline]
    #[must_use]
    pub fn is_certainly_negative(&self) -> bool {
        self.hi.sign().is_lt() && !self.is_empty()
    }

    /// Whether there are members and all are `<= 0`.
    #[inline]
    #[must_use]
    pub fn is_certainly_non_positive(&self) -> bool {
        self.hi.sign().is_le() && !self.is_empty()
    }

    /// Whether neither is empty and *every* member is less than *every* member of `other`.
    #[inline]
    #[must_use]
    pub fn is_certainly_less_than(&self, other: &Self) -> bool {
        self.hi.order(&other.lo).is_lt() && !self.is_empty() && !other.is_empty()
    }

    /// Whether neither is empty and *every* member is at most *every* member of `other`.
    #[inline]
    #[must_use]
    pub fn is_certainly_at_most(&self, other: &Self) -> bool {
        self.hi.order(&other.lo).is_le() && !self.is_empty() && !other.is_empty()
    }

    /// Whether *some* member is less than *some* member of `other`.
    #[inline]
    #[must_use]
    pub fn is_possibly_less_than(&self, other: &Self) -> bool {
        self.lo.order(&other.hi).is_lt() && !self.is_empty() && !other.is_empty()
    }

    /// Whether *some* member is at most *some* member of `other`.
    #[inline]
    #[must_use]
    pub fn is_possibly_at_most(&self, other: &Self) -> bool {
        self.lo.order(&other.hi).is_le() && !self.is_empty() && !other.is_empty()
    }

    /// A finite member (about the middle if bounded), or nothing if empty.
    #[inline]
    #[must_use]
    pub fn midpoint(&self) -> Option<E> {
        (!self.is_empty()).then(|| E::between(&self.lo, &self.hi))
    }

    /// An upper bound of the distance of the ends; 0 if empty.
    #[inline]
    #[must_use]
    pub fn width_upper(&self) -> E {
        if self.is_empty() {
            return E::small(0.0, self.precision());
        }
        self.hi.minus(&self.lo, Toward::Up)
    }

    /// The greatest absolute value of a member, or its supremum; 0 if empty.
    #[inline]
    #[must_use]
    pub fn magnitude(&self) -> E {
        if self.is_empty() {
            return E::small(0.0, self.precision());
        }
        greater(&self.lo.negated(), &self.hi).clone()
    }

    /// The least absolute value of a member; 0 if empty.
    #[inline]
    #[must_use]
    pub fn mignitude(&self) -> E {
        if self.is_certainly_positive() {
            self.lo.clone()
        } else if self.is_certainly_negative() {
            self.hi.negated()
        } else {
            E::small(0.0, self.precision())
        }
    }

    /// The two halves at the midpoint, or nothing if no number lies strictly between the ends.
    #[must_use]
    pub fn halves(&self) -> Option<(Self, Self)> {
        let middle = self.midpoint()?;
        let inside = self.lo.order(&middle).is_lt() && middle.order(&self.hi).is_lt();
        inside.then(|| {
            (
                Enclosure { lo: self.lo.clone(), hi: middle.clone() },
                Enclosure { lo: middle, hi: self.hi.clone() },
            )
        })
    }

    /// The negatives of the members.
    #[inline]
    #[must_use]
    pub fn negated(&self) -> Self {
        Enclosure { lo: self.hi.negated(), hi: self.lo.negated() }
    }

    /// The least interval around this one with ends of the given precision.
    #[must_use]
    pub fn rounded_to(&self, precision: E::Precision) -> Self {
        Enclosure {
            lo: self.lo.rounded_to(precision, Toward::Down),
            hi: self.hi.rounded_to(precision, Toward::Up),
        }
    }
}

/// The lesser of two ends.
#[inline]
pub(super) fn lesser<'a, E: End>(a: &'a E, b: &'a E) -> &'a E {
    if a.order(b) == Ordering::Greater { b } else { a }
}

/// The greater of two ends.
#[inline]
pub(super) fn greater<'a, E: End>(a: &'a E, b: &'a E) -> &'a E {
    if a.order(b) == Ordering::Less { b } else { a }
}
