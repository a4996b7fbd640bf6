//! Closed intervals of real numbers with dyadic or infinite ends.
//!
//! An interval is a set of real numbers: it is never empty, infinity is never a member
//! of it, and an end `None` says that it is unbounded on that side. Every operation
//! returns a superset of `{ f(x, y) : x in X, y in Y }` and refuses unless `f` is defined
//! on all of `X` times `Y`; no argument is ever cut down to a domain.
//!
//! Table of the infinite ends. As sets of reals `0 * [1, inf)` is `{0}` and a lower end
//! is never `+inf`, so the two doubtful cases have one right answer each:
//!
//! | ends | result | why |
//! | --- | --- | --- |
//! | `0 * inf` | 0 | the factor 0 is attained, infinity is not |
//! | `x / inf` | 0 | the quotient tends to 0 and keeps its sign |
//! | `inf - inf` | the infinity of the end computed | `[a, inf) - [b, inf)` is the whole line |
//! | `inf / inf` | does not occur | an infinite numerator end pairs with the divisor end nearest 0 |

use super::Refusal;
use super::dyadic::{Dyadic, Toward, Toward::Down, Toward::Up};
use num_rational::BigRational;

/// A non-empty closed interval; see the head of the file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Interval {
    lower: Option<Dyadic>,
    upper: Option<Dyadic>,
}

impl Interval {
    /// The interval between two ends, `None` meaning unbounded; `None` if it were empty.
    pub fn new(lower: Option<Dyadic>, upper: Option<Dyadic>) -> Option<Interval> {
        match (&lower, &upper) {
            (Some(a), Some(b)) if a > b => None,
            _ => Some(Interval { lower, upper }),
        }
    }

    /// All real numbers.
    pub fn whole() -> Interval {
        Interval { lower: None, upper: None }
    }

    /// The set `{x}`.
    pub fn point(x: Dyadic) -> Interval {
        Interval { lower: Some(x.clone()), upper: Some(x) }
    }

    /// The set `{0}`.
    pub fn zero() -> Interval {
        Interval::point(Dyadic::zero())
    }

    /// The smallest interval with ends of `p` bits that contains `x`.
    pub fn from_rational(x: &BigRational, p: u32) -> Interval {
        Interval { lower: Dyadic::from_rational(x, p, Down), upper: Dyadic::from_rational(x, p, Up) }
    }

    /// An enclosure of `[lower, upper]`, `None` meaning unbounded; `None` if it were empty.
    pub fn from_ends(lower: Option<&BigRational>, upper: Option<&BigRational>, p: u32) -> Option<Interval> {
        if let (Some(a), Some(b)) = (lower, upper)
            && a > b
        {
            return None;
        }
        Some(Interval {
            lower: lower.and_then(|x| Dyadic::from_rational(x, p, Down)),
            upper: upper.and_then(|x| Dyadic::from_rational(x, p, Up)),
        })
    }

    /// The lower end; `None` is minus infinity.
    pub fn lower(&self) -> Option<&Dyadic> {
        self.lower.as_ref()
    }

    /// The upper end; `None` is plus infinity.
    pub fn upper(&self) -> Option<&Dyadic> {
        self.upper.as_ref()
    }

    /// The only member, if there is only one.
    pub fn as_point(&self) -> Option<&Dyadic> {
        self.lower().filter(|_| self.lower == self.upper)
    }

    /// A member in the middle, exact up to 8192 bits; `None` if an end is infinite.
    pub fn midpoint(&self) -> Option<Dyadic> {
        let (a, b) = (self.lower()?, self.upper()?);
        let middle = a.add(b, 8192, Down)?.scale(-1, Down)?;
        Some(middle.clamp(a.clone(), b.clone()))
    }

    /// Whether `x > 0` for all members.
    pub fn is_certainly_positive(&self) -> bool {
        self.lower().is_some_and(|x| x.signum() > 0)
    }

    /// Whether `x >= 0` for all members.
    pub fn is_certainly_nonnegative(&self) -> bool {
        self.lower().is_some_and(|x| x.signum() >= 0)
    }

    /// Whether `x < 0` for all members.
    pub fn is_certainly_negative(&self) -> bool {
        self.upper().is_some_and(|x| x.signum() < 0)
    }

    /// Whether `x <= 0` for all members.
    pub fn is_certainly_nonpositive(&self) -> bool {
        self.upper().is_some_and(|x| x.signum() <= 0)
    }

    /// Whether `x != 0` for all members.
    pub fn is_certainly_nonzero(&self) -> bool {
        self.is_certainly_positive() || self.is_certainly_negative()
    }

    /// Whether all members of `other` are members.
    pub fn contains(&self, other: &Interval) -> bool {
        let (a, b) = (self.lower(), self.upper());
        a.is_none_or(|a| other.lower().is_some_and(|x| x >= a))
            && b.is_none_or(|b| other.upper().is_some_and(|x| x <= b))
    }

    /// Whether the width is at most `2^-p` times the distance from 0, or there is none.
    pub(super) fn is_tight(&self, p: u32) -> bool {
        let (Some(a), Some(b)) = (self.lower(), self.upper()) else {
            return false;
        };
        if a == b {
            return true;
        }
        let nearest = a.top().min(b.top()) - 1;
        self.is_certainly_nonzero()
            && b.add(&a.neg(), 8, Up).is_some_and(|width| width.top() + i64::from(p) <= nearest)
    }

    /// An enclosure with ends of at most `p` bits.
    pub fn round(&self, p: u32) -> Interval {
        Interval {
            lower: self.lower().and_then(|x| x.round(p, Down)),
            upper: self.upper().and_then(|x| x.round(p, Up)),
        }
    }

    /// `2^k * x`.
    pub(super) fn scale(&self, k: i64) -> Interval {
        Interval {
            lower: self.lower().and_then(|x| x.scale(k, Down)),
            upper: self.upper().and_then(|x| x.scale(k, Up)),
        }
    }

    /// `-x`.
    pub fn neg(&self) -> Interval {
        Interval { lower: self.upper().map(Dyadic::neg), upper: self.lower().map(Dyadic::neg) }
    }

    /// `x + y`.
    pub fn add(&self, other: &Interval, p: u32) -> Interval {
        let end = |a: Option<&Dyadic>, b: Option<&Dyadic>, toward| a?.add(b?, p, toward);
        Interval {
            lower: end(self.lower(), other.lower(), Down),
            upper: end(self.upper(), other.upper(), Up),
        }
    }

    /// `x - y`.
    pub fn sub(&self, other: &Interval, p: u32) -> Interval {
        self.add(&other.neg(), p)
    }

    /// `x * y`.
    pub fn mul(&self, other: &Interval, p: u32) -> Interval {
        if self.is_certainly_nonpositive() {
            return self.neg().mul_by_case(other, p).neg();
        }
        self.mul_by_case(other, p)
    }

    /// `x * y` for an `x` that is non-negative or has both signs.
    fn mul_by_case(&self, other: &Interval, p: u32) -> Interval {
        let (a, b) = (self.lower(), self.upper());
        let (c, d) = (other.lower(), other.upper());
        let end = |x, y, toward| product_of_ends(x, y, p, toward);
        let (lower, upper) = if self.is_certainly_nonnegative() {
            let for_lower = if other.is_certainly_nonnegative() { a } else { b };
            let for_upper = if other.is_certainly_nonpositive() { a } else { b };
            (end(for_lower, c, Down), end(for_upper, d, Up))
        } else if other.is_certainly_nonnegative() {
            (end(a, d, Down), end(b, d, Up))
        } else if other.is_certainly_nonpositive() {
            (end(b, c, Down), end(a, c, Up))
        } else {
            // Both have both signs: two candidates for each end, infinite if either is.
            (
                end(a, d, Down).zip(end(b, c, Down)).map(|(x, y)| x.min(y)),
                end(a, c, Up).zip(end(b, d, Up)).map(|(x, y)| x.max(y)),
            )
        };
        Interval { lower, upper }
    }

    /// `x / y`; refused if 0 is a member of `y`.
    pub fn div(&self, other: &Interval, p: u32) -> Result<Interval, Refusal> {
        if other.is_certainly_negative() {
            return self.neg().div(&other.neg(), p);
        }
        if !other.is_certainly_positive() {
            return Err(Refusal::OutsideDomain("division"));
        }
        let (near, far) = (other.lower(), other.upper());
        let lower_by = if self.is_certainly_nonnegative() { far } else { near };
        let upper_by = if self.is_certainly_nonpositive() { far } else { near };
        let end = |x: Option<&Dyadic>, y: Option<&Dyadic>, toward| match (x, y) {
            (Some(_), None) => Some(Dyadic::zero()),
            (None, _) => None,
            (Some(x), Some(y)) => x.div(y, p, toward),
        };
        Ok(Interval { lower: end(self.lower(), lower_by, Down), upper: end(self.upper(), upper_by, Up) })
    }

    /// `x^n`. If 0 is a member of `x`, `n` must be positive: `0^0` is undefined.
    pub fn powi(&self, n: i64, p: u32) -> Result<Interval, Refusal> {
        if n <= 0 {
            if !self.is_certainly_nonzero() {
                return Err(Refusal::OutsideDomain("power"));
            }
            let one = Interval::from(1);
            return if n == 0 {
                Ok(one)
            } else {
                one.div(&self.positive_power(n.unsigned_abs(), p.saturating_add(2)), p)
            };
        }
        Ok(self.positive_power(n.unsigned_abs(), p))
    }

    /// `x^n` for `n >= 1`, monotone on each side of 0.
    fn positive_power(&self, n: u64, p: u32) -> Interval {
        let even = n.is_multiple_of(2);
        let base = if even { self.abs() } else { self.clone() };
        let end = |x: Option<&Dyadic>, toward: Toward| x.and_then(|x| power_of_end(x, n, p, toward));
        Interval { lower: end(base.lower(), Down), upper: end(base.upper(), Up) }
    }

    /// The square root; refused unless all members are non-negative.
    pub fn sqrt(&self, p: u32) -> Result<Interval, Refusal> {
        match self.lower() {
            Some(a) if a.signum() >= 0 => {
                Ok(Interval { lower: a.sqrt(p, Down), upper: self.upper().and_then(|b| b.sqrt(p, Up)) })
            }
            _ => Err(Refusal::OutsideDomain("sqrt")),
        }
    }

    /// `|x|`.
    pub fn abs(&self) -> Interval {
        if self.is_certainly_nonnegative() {
            self.clone()
        } else if self.is_certainly_nonpositive() {
            self.neg()
        } else {
            let upper = self.lower().zip(self.upper()).map(|(a, b)| a.abs().max(b.clone()));
            Interval { lower: Some(Dyadic::zero()), upper }
        }
    }

    /// `min(x, y)`.
    pub fn min(&self, other: &Interval) -> Interval {
        self.neg().max(&other.neg()).neg()
    }

    /// `max(x, y)`.
    pub fn max(&self, other: &Interval) -> Interval {
        let lower = match (self.lower(), other.lower()) {
            (Some(a), Some(b)) => Some(a.max(b)),
            (a, b) => a.or(b),
        };
        let upper = self.upper().zip(other.upper()).map(|(a, b)| a.max(b));
        Interval { lower: lower.cloned(), upper: upper.cloned() }
    }

    /// The largest integer not above `x`.
    pub fn floor(&self) -> Interval {
        Interval { lower: self.lower().map(Dyadic::floor), upper: self.upper().map(Dyadic::floor) }
    }

    /// The smallest integer not below `x`.
    pub fn ceil(&self) -> Interval {
        self.neg().floor().neg()
    }

    /// The smallest interval that contains both.
    pub fn hull(&self, other: &Interval) -> Interval {
        Interval {
            lower: self.lower().zip(other.lower()).map(|(a, b)| a.min(b).clone()),
            upper: self.upper().zip(other.upper()).map(|(a, b)| a.max(b).clone()),
        }
    }

    /// The common members, if there are any.
    pub fn intersection(&self, other: &Interval) -> Option<Interval> {
        let lower = match (self.lower(), other.lower()) {
            (Some(a), Some(b)) => Some(a.max(b)),
            (a, b) => a.or(b),
        };
        let upper = match (self.upper(), other.upper()) {
            (Some(a), Some(b)) => Some(a.min(b)),
            (a, b) => a.or(b),
        };
        Interval::new(lower.cloned(), upper.cloned())
    }
}

/// The product of two ends by the table at the head of the file.
fn product_of_ends(x: Option<&Dyadic>, y: Option<&Dyadic>, p: u32, toward: Toward) -> Option<Dyadic> {
    if x.is_some_and(Dyadic::is_zero) || y.is_some_and(Dyadic::is_zero) {
        return Some(Dyadic::zero());
    }
    x?.mul(y?, p, toward)
}

/// `x^n` for `n >= 1` by squaring, each step rounded to the same side.
///
/// The result has relative error below `2^(1-p)`: about `2n` roundings are compounded and
/// as many bits as `n` has, and three, are kept beyond `p`.
fn power_of_end(x: &Dyadic, n: u64, p: u32, toward: Toward) -> Option<Dyadic> {
    if x.signum() < 0 {
        // Here n is odd: even powers are taken of |x|.
        let mirrored = if toward == Up { Down } else { Up };
        return power_of_end(&x.neg(), n, p, mirrored).map(|y| y.neg());
    }
    let bits = 64 - n.leading_zeros();
    let work = if n <= 2 { p } else { p.saturating_add(bits + 3) };
    let mut power = x.clone();
    for i in (0..bits - 1).rev() {
        power = power.mul(&power, work, toward)?;
        if n >> i & 1 == 1 {
            power = power.mul(x, work, toward)?;
        }
    }
    power.round(p, toward)
}

impl From<i64> for Interval {
    fn from(n: i64) -> Interval {
        Interval::point(n.into())
    }
}
