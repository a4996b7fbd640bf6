//! Ranges of real values with exact rational ends, for the quick sign analysis.
//!
//! A range is a superset of the values a term takes; ends that are open are
//! known not to be taken. Ends of many digits are rounded outwards.

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// Literals longer than this are rounded to [`KEPT_BITS`].
const MAX_BITS: u64 = 600;
const KEPT_BITS: u64 = 128;

/// A finite end.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bound {
    /// The value.
    pub value: BigRational,
    /// Whether the value itself is known not to be taken.
    pub open: bool,
}

/// A set of real numbers that contains all values of a term.
#[derive(Clone, Debug, PartialEq, Eq, Default)]
pub struct Range {
    /// No value is below; `None` if nothing is known.
    pub lower: Option<Bound>,
    /// No value is above; `None` if nothing is known.
    pub upper: Option<Bound>,
    /// Whether zero is known not to be taken.
    pub nonzero: bool,
}

fn bound(value: BigRational, open: bool) -> Option<Bound> {
    Some(Bound { value, open })
}

/// Rounds to the given side if the literal is long.
fn rounded(b: Option<Bound>, down: bool) -> Option<Bound> {
    let b = b?;
    let bits = b.value.numer().bits().max(b.value.denom().bits());
    if bits <= MAX_BITS {
        return Some(b);
    }
    let size = b.value.numer().bits() as i64 - b.value.denom().bits() as i64;
    // Of an end that is astronomically large or small hardly the sign is kept.
    if size.unsigned_abs() > 100_000 {
        let sign = if size < 0 { BigRational::zero() } else { b.value.signum() };
        return if b.value.is_positive() == down { bound(sign, true) } else { None };
    }
    let shift = KEPT_BITS as i64 - size;
    let scale = BigRational::from_integer(BigInt::one() << shift.unsigned_abs());
    let scale = if shift < 0 { scale.recip() } else { scale };
    let scaled = &b.value * &scale;
    let whole = if down { scaled.floor() } else { scaled.ceil() };
    // A truly rounded end is not taken.
    let open = b.open || whole != scaled;
    Some(Bound { value: whole / scale, open })
}

/// The wider of two ends (`least`: the smaller).
fn wider(a: Option<Bound>, b: Option<Bound>, least: bool) -> Option<Bound> {
    let (a, b) = (a?, b?);
    if a.value == b.value {
        return Some(Bound { open: a.open && b.open, ..a });
    }
    if (a.value < b.value) == least { Some(a) } else { Some(b) }
}

/// The narrower of two ends (`greatest`: the larger).
fn narrower(a: Option<Bound>, b: Option<Bound>, greatest: bool) -> Option<Bound> {
    match (a, b) {
        (None, other) | (other, None) => other,
        (Some(a), Some(b)) if a.value == b.value => Some(Bound { open: a.open || b.open, ..a }),
        (Some(a), Some(b)) => Some(if (a.value > b.value) == greatest { a } else { b }),
    }
}

/// One candidate for an end of a product; `None` on either side is infinite, of
/// the sign in `signs`.
fn corner(a: &Option<Bound>, b: &Option<Bound>) -> Corner {
    match (a, b) {
        (Some(x), Some(y)) => {
            // A zero that is taken is taken by the product too.
            let taken_zero = (x.value.is_zero() && !x.open) || (y.value.is_zero() && !y.open);
            Corner::Finite(Bound { value: &x.value * &y.value, open: (x.open || y.open) && !taken_zero })
        }
        (Some(x), None) | (None, Some(x)) if x.value.is_zero() => Corner::Finite(x.clone()),
        _ => Corner::Infinite,
    }
}

enum Corner {
    Finite(Bound),
    Infinite,
}

impl Range {
    /// One value.
    pub fn exactly(value: BigRational) -> Range {
        Range { nonzero: !value.is_zero(), lower: bound(value.clone(), false), upper: bound(value, false) }
    }

    /// From `lower` to `upper`, closed.
    pub fn between(lower: BigRational, upper: BigRational) -> Range {
        Range { lower: bound(lower, false), upper: bound(upper, false), nonzero: false }.tidy()
    }

    /// At least `value`, or more than it.
    pub fn above(value: i64, open: bool) -> Range {
        let value = BigRational::from_integer(value.into());
        Range { lower: bound(value, open), upper: None, nonzero: false }.tidy()
    }

    /// At most `value`, or less than it.
    pub fn below(value: i64, open: bool) -> Range {
        Range::above(-value, open).negated()
    }

    fn tidy(mut self) -> Range {
        self.lower = rounded(self.lower, true);
        self.upper = rounded(self.upper, false);
        self.nonzero |= self.is_positive() || self.is_negative();
        if self.nonzero {
            for end in [&mut self.lower, &mut self.upper].into_iter().flatten() {
                end.open |= end.value.is_zero();
            }
        }
        self
    }

    /// Whether every value is > 0.
    pub fn is_positive(&self) -> bool {
        self.lower
            .as_ref()
            .is_some_and(|b| b.value.is_positive() || (b.value.is_zero() && (b.open || self.nonzero)))
    }

    /// Whether every value is >= 0.
    pub fn is_non_negative(&self) -> bool {
        self.lower.as_ref().is_some_and(|b| !b.value.is_negative())
    }

    /// Whether every value is < 0.
    pub fn is_negative(&self) -> bool {
        self.upper
            .as_ref()
            .is_some_and(|b| b.value.is_negative() || (b.value.is_zero() && (b.open || self.nonzero)))
    }

    /// Whether every value is <= 0.
    pub fn is_non_positive(&self) -> bool {
        self.upper.as_ref().is_some_and(|b| !b.value.is_positive())
    }

    /// Whether every value is at least that number (more, if `strictly`).
    pub fn is_at_least(&self, number: &BigRational, strictly: bool) -> bool {
        self.lower
            .as_ref()
            .is_some_and(|b| b.value > *number || (b.value == *number && (b.open || !strictly)))
    }

    /// Whether every value is at most that number (less, if `strictly`).
    pub fn is_at_most(&self, number: &BigRational, strictly: bool) -> bool {
        self.upper
            .as_ref()
            .is_some_and(|b| b.value < *number || (b.value == *number && (b.open || !strictly)))
    }

    /// The only value, if there is one.
    pub fn single(&self) -> Option<&BigRational> {
        match (&self.lower, &self.upper) {
            (Some(a), Some(b)) if a.value == b.value => Some(&a.value),
            _ => None,
        }
    }

    /// What lies in both.
    pub fn meet(self, other: Range) -> Range {
        Range {
            lower: narrower(self.lower, other.lower, true),
            upper: narrower(self.upper, other.upper, false),
            nonzero: self.nonzero || other.nonzero,
        }
        .tidy()
    }

    /// What lies in either.
    pub fn hull(self, other: Range) -> Range {
        Range {
            lower: wider(self.lower, other.lower, true),
            upper: wider(self.upper, other.upper, false),
            nonzero: self.nonzero && other.nonzero,
        }
        .tidy()
    }

    /// `-x`.
    pub fn negated(&self) -> Range {
        let minus = |b: &Option<Bound>| b.as_ref().map(|b| Bound { value: -b.value.clone(), open: b.open });
        Range { lower: minus(&self.upper), upper: minus(&self.lower), nonzero: self.nonzero }
    }

    /// `x + y`.
    pub fn plus(&self, other: &Range) -> Range {
        let sum = |a: &Option<Bound>, b: &Option<Bound>| {
            let (a, b) = (a.as_ref()?, b.as_ref()?);
            bound(&a.value + &b.value, a.open || b.open)
        };
        Range { lower: sum(&self.lower, &other.lower), upper: sum(&self.upper, &other.upper), nonzero: false }
            .tidy()
    }

    /// `x * y`.
    pub fn times(&self, other: &Range) -> Range {
        if self.is_non_positive() && !self.is_non_negative() {
            return self.negated().times(other).negated();
        }
        if other.is_non_positive() && !other.is_non_negative() {
            return self.times(&other.negated()).negated();
        }
        let nonzero = self.nonzero && other.nonzero;
        let candidates = |pairs: &[(&Option<Bound>, &Option<Bound>)], least: bool| {
            let mut end: Option<Bound> = None;
            for (a, b) in pairs {
                let Corner::Finite(c) = corner(a, b) else { return None };
                end = if end.is_none() { Some(c) } else { wider(end, Some(c), least) };
            }
            end
        };
        let (a, b, c, d) = (&self.lower, &self.upper, &other.lower, &other.upper);
        let range = match (self.is_non_negative(), other.is_non_negative()) {
            (true, true) => {
                Range { lower: candidates(&[(a, c)], true), upper: candidates(&[(b, d)], false), nonzero }
            }
            (true, false) => {
                Range { lower: candidates(&[(b, c)], true), upper: candidates(&[(b, d)], false), nonzero }
            }
            (false, true) => {
                Range { lower: candidates(&[(a, d)], true), upper: candidates(&[(b, d)], false), nonzero }
            }
            (false, false) => Range {
                lower: candidates(&[(a, d), (b, c)], true),
                upper: candidates(&[(a, c), (b, d)], false),
                nonzero,
            },
        };
        range.tidy()
    }

    /// `1/x`, where it is defined.
    pub fn reciprocal(&self) -> Range {
        if self.is_non_positive() && !self.is_non_negative() {
            return self.negated().reciprocal().negated();
        }
        if !self.is_non_negative() {
            return Range { nonzero: true, ..Range::default() };
        }
        let over = |b: &Option<Bound>| {
            b.as_ref().filter(|b| !b.value.is_zero()).map(|b| Bound { value: b.value.recip(), open: b.open })
        };
        let lower = over(&self.upper).or_else(|| bound(BigRational::zero(), true));
        Range { lower, upper: over(&self.lower), nonzero: true }.tidy()
    }

    /// Applies a function that is strictly increasing on the whole range; `at`
    /// gives a lower and an upper bound of its value at a number.
    pub fn increasing(
        &self,
        mut at: impl FnMut(&BigRational) -> Option<(BigRational, BigRational)>,
    ) -> Range {
        let mut end = |b: &Option<Bound>, least: bool| {
            let b = b.as_ref()?;
            let (low, high) = at(&b.value)?;
            bound(if least { low } else { high }, b.open)
        };
        let (lower, upper) = (end(&self.lower, true), end(&self.upper, false));
        Range { lower, upper, nonzero: false }.tidy()
    }

    /// `x^n` for n >= 1.
    pub fn natural_power(&self, n: u32) -> Range {
        let size =
            |b: &Option<Bound>| b.as_ref().map_or(0, |b| b.value.numer().bits().max(b.value.denom().bits()));
        if size(&self.lower).max(size(&self.upper)).saturating_mul(n.into()) > 100_000 {
            let sign = if self.is_positive() {
                Range::above(0, true)
            } else if self.is_non_negative() || n.is_multiple_of(2) {
                Range { nonzero: self.nonzero, ..Range::above(0, false) }.tidy()
            } else {
                Range { nonzero: self.nonzero, ..Range::default() }
            };
            return sign;
        }
        let power = |q: &BigRational| {
            Some((num_traits::pow(q.clone(), n as usize), num_traits::pow(q.clone(), n as usize)))
        };
        if n % 2 == 1 || self.is_non_negative() {
            let mut range = self.increasing(power);
            range.nonzero |= self.nonzero;
            return range.tidy();
        }
        if self.is_non_positive() {
            return self.negated().natural_power(n);
        }
        let magnitude = wider(self.negated().upper, self.upper.clone(), false);
        let top = Range { lower: None, upper: magnitude, nonzero: false }.increasing(power);
        Range { lower: bound(BigRational::zero(), self.nonzero), upper: top.upper, nonzero: self.nonzero }
            .tidy()
    }
}

impl Range {
    /// The same for values known to be integers: ends move inwards to integers.
    pub fn of_integers(self) -> Range {
        let step = |b: Option<Bound>, up: bool| {
            let b = b?;
            let moved = if up { b.value.ceil() } else { b.value.floor() };
            let one = BigRational::one();
            let value = match (b.open && moved == b.value, up) {
                (true, true) => moved + one,
                (true, false) => moved - one,
                _ => moved,
            };
            bound(value, false)
        };
        Range { lower: step(self.lower, true), upper: step(self.upper, false), nonzero: self.nonzero }.tidy()
    }
}
