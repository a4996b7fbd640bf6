//! Ranges of values with rational ends, as the kernel's quick sign analysis finds
//! them: what is plain here must be plain there, so nothing is cleverer.

use num_rational::BigRational;
use num_traits::{One, Zero};

/// Ends of more bits than this are given up.
const MAX_BITS: u64 = 400;

/// A finite end; open if the value itself is not taken.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bound {
    /// The value.
    pub value: BigRational,
    /// Whether it is known not to be taken.
    pub open: bool,
}

/// A set that contains all values of a term; an end is missing where nothing is known.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Range {
    /// The lower end.
    pub lower: Option<Bound>,
    /// The upper end.
    pub upper: Option<Bound>,
}

fn integer(n: i64) -> BigRational {
    BigRational::from_integer(n.into())
}

fn bound(value: BigRational, open: bool) -> Option<Bound> {
    let fits = value.numer().bits().max(value.denom().bits()) <= MAX_BITS;
    fits.then_some(Bound { value, open })
}

/// The end of a product; none where it is infinite. A zero that is taken makes the
/// product zero, whatever the other factor.
fn corner(a: Option<&Bound>, b: Option<&Bound>) -> Option<Bound> {
    match (a, b) {
        (Some(x), Some(y)) => {
            let zero = |e: &Bound| e.value.is_zero() && !e.open;
            bound(&x.value * &y.value, (x.open || y.open) && !zero(x) && !zero(y))
        }
        (Some(x), None) | (None, Some(x)) if x.value.is_zero() => Some(x.clone()),
        _ => None,
    }
}

impl Range {
    /// One value.
    #[must_use]
    pub fn exactly(value: BigRational) -> Range {
        let end = bound(value, false);
        Range { lower: end.clone(), upper: end }
    }

    /// From `low` to `high`, closed.
    #[must_use]
    pub fn between(low: BigRational, high: BigRational) -> Range {
        Range { lower: bound(low, false), upper: bound(high, false) }
    }

    /// At least `n`, more if `open`.
    #[must_use]
    pub fn above(n: i64, open: bool) -> Range {
        Range { lower: bound(integer(n), open), upper: None }
    }

    /// At most `n`, less if `open`.
    #[must_use]
    pub fn below(n: i64, open: bool) -> Range {
        Range::above(-n, open).negated()
    }

    /// Whether every value is `> 0`.
    #[must_use]
    pub fn is_positive(&self) -> bool {
        self.is_above(&BigRational::zero(), true)
    }

    /// Whether every value is `>= 0`.
    #[must_use]
    pub fn is_non_negative(&self) -> bool {
        self.is_above(&BigRational::zero(), false)
    }

    /// Whether every value is at least `n`, or more if `strictly`.
    #[must_use]
    pub fn is_above(&self, n: &BigRational, strictly: bool) -> bool {
        self.lower.as_ref().is_some_and(|b| b.value > *n || (b.value == *n && (b.open || !strictly)))
    }

    /// What lies in both.
    #[must_use]
    pub fn meet(self, other: Range) -> Range {
        let narrower = |a: Option<Bound>, b: Option<Bound>, greatest: bool| match (a, b) {
            (None, end) | (end, None) => end,
            (Some(a), Some(b)) if a.value == b.value => Some(Bound { open: a.open || b.open, ..a }),
            (Some(a), Some(b)) => Some(if (a.value > b.value) == greatest { a } else { b }),
        };
        Range {
            lower: narrower(self.lower, other.lower, true),
            upper: narrower(self.upper, other.upper, false),
        }
    }

    /// What lies in either.
    #[must_use]
    pub fn hull(self, other: Range) -> Range {
        let wider = |a: Option<Bound>, b: Option<Bound>, least: bool| {
            let (a, b) = (a?, b?);
            if a.value == b.value {
                return Some(Bound { open: a.open && b.open, ..a });
            }
            Some(if (a.value < b.value) == least { a } else { b })
        };
        Range { lower: wider(self.lower, other.lower, true), upper: wider(self.upper, other.upper, false) }
    }

    /// `-x`.
    #[must_use]
    pub fn negated(&self) -> Range {
        let minus = |b: &Option<Bound>| b.as_ref().map(|b| Bound { value: -&b.value, open: b.open });
        Range { lower: minus(&self.upper), upper: minus(&self.lower) }
    }

    /// `x + y`.
    #[must_use]
    pub fn plus(&self, other: &Range) -> Range {
        let sum = |a: &Option<Bound>, b: &Option<Bound>| {
            let (a, b) = (a.as_ref()?, b.as_ref()?);
            bound(&a.value + &b.value, a.open || b.open)
        };
        Range { lower: sum(&self.lower, &other.lower), upper: sum(&self.upper, &other.upper) }
    }

    /// `x y`.
    #[must_use]
    pub fn times(&self, other: &Range) -> Range {
        let non_positive = |r: &Range| r.negated().is_non_negative() && !r.is_non_negative();
        if non_positive(self) {
            return self.negated().times(other).negated();
        }
        if non_positive(other) {
            return self.times(&other.negated()).negated();
        }
        let (a, b) = (self.lower.as_ref(), self.upper.as_ref());
        let (c, d) = (other.lower.as_ref(), other.upper.as_ref());
        let (lower, upper) = match (self.is_non_negative(), other.is_non_negative()) {
            (true, true) => (corner(a, c), corner(b, d)),
            (true, false) => (corner(b, c), corner(b, d)),
            (false, true) => (corner(a, d), corner(b, d)),
            (false, false) => {
                let one = |end: Option<Bound>| Range { lower: end.clone(), upper: end };
                let low = one(corner(a, d)).hull(one(corner(b, c))).lower;
                (low, one(corner(a, c)).hull(one(corner(b, d))).upper)
            }
        };
        Range { lower, upper }
    }

    /// `1/x` for x of one strict sign; otherwise nothing is known.
    #[must_use]
    pub fn reciprocal(&self) -> Range {
        if self.negated().is_positive() {
            return self.negated().reciprocal().negated();
        }
        if !self.is_positive() {
            return Range::default();
        }
        let over = |b: &Option<Bound>| {
            let b = b.as_ref().filter(|b| !b.value.is_zero())?;
            bound(b.value.recip(), b.open)
        };
        Range { lower: over(&self.upper), upper: over(&self.lower) }.meet(Range::above(0, true))
    }

    /// `x^n`.
    #[must_use]
    pub fn natural_power(&self, n: u32) -> Range {
        if n == 0 {
            return Range::exactly(BigRational::one());
        }
        let power = |b: &Option<Bound>| {
            let b = b.as_ref()?;
            let bits = b.value.numer().bits().max(b.value.denom().bits());
            if bits.saturating_mul(u64::from(n)) > MAX_BITS {
                return None;
            }
            bound(num_traits::pow(b.value.clone(), n as usize), b.open)
        };
        if self.is_non_negative() {
            let sign = Range::above(0, self.is_positive());
            return Range { lower: power(&self.lower), upper: power(&self.upper) }.meet(sign);
        }
        if self.negated().is_non_negative() {
            let size = self.negated().natural_power(n);
            return if n.is_multiple_of(2) { size } else { size.negated() };
        }
        if n % 2 == 1 {
            return Range { lower: power(&self.lower), upper: power(&self.upper) };
        }
        let high = Range { lower: None, upper: power(&self.lower) };
        let other = Range { lower: None, upper: power(&self.upper) };
        high.hull(other).meet(Range::above(0, false))
    }

    /// The part of what is known that is about the sign alone.
    #[must_use]
    pub fn sign_only(&self) -> Range {
        if self.is_non_negative() {
            Range::above(0, self.is_positive())
        } else if self.negated().is_non_negative() {
            Range::below(0, self.negated().is_positive())
        } else {
            Range::default()
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn range(low: i64, low_open: bool, high: i64, high_open: bool) -> Range {
        Range { lower: bound(integer(low), low_open), upper: bound(integer(high), high_open) }
    }

    #[test]
    fn arithmetic() {
        let x = range(0, true, 1, false);
        assert_eq!(x.plus(&x), range(0, true, 2, false));
        assert_eq!(x.negated(), range(-1, false, 0, true));
        assert_eq!(x.times(&range(-2, false, 3, true)), range(-2, false, 3, true));
        assert_eq!(range(-2, false, 1, true).natural_power(2), range(0, false, 4, false));
        assert_eq!(range(-2, true, 1, true).natural_power(3), range(-8, true, 1, true));
        assert_eq!(range(-1, false, 1, false).times(&range(-3, true, 2, false)), range(-3, true, 3, true));
        assert_eq!(x.reciprocal(), Range::above(1, false));
        // A factor that may be 0 says nothing about 1/x; 0 times anything is 0.
        assert_eq!(range(0, false, 1, false).reciprocal(), Range::default());
        assert_eq!(range(0, false, 1, false).times(&Range::above(0, true)), Range::above(0, false));
    }

    #[test]
    fn what_is_open_stays_open() {
        assert!(range(0, true, 1, false).plus(&range(0, false, 1, false)).is_positive());
        assert!(!range(0, false, 1, false).plus(&range(0, false, 1, false)).is_positive());
        assert!(range(-1, true, 1, true).plus(&Range::exactly(integer(1))).is_positive());
        assert!(!range(-1, false, 1, true).plus(&Range::exactly(integer(1))).is_positive());
    }
}
