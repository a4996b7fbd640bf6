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
    #[cfg(test)]
    pub(super) fn from_ends(
        lower: Option<&BigRational>,
        upper: Option<&BigRational>,
        p: u32,
    ) -> Option<Interval> {
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

#[cfg(test)]
mod tests {
    use super::*;

    fn finite(a: i64, b: i64) -> Interval {
        Interval::new(Some(a.into()), Some(b.into())).expect("ordered")
    }

    /// Intervals with every combination of signs, zeros and infinite ends.
    fn samples() -> Vec<Interval> {
        let ends = [None, Some(-3), Some(-1), Some(0), Some(2), Some(5), None];
        let mut samples = Vec::new();
        for (i, a) in ends.iter().enumerate().take(6) {
            for b in &ends[i.max(1)..] {
                samples.extend(Interval::new(a.map(Dyadic::from), b.map(Dyadic::from)));
            }
        }
        samples
    }

    /// Members of an interval: its finite ends, some between, and some far out.
    fn members(x: &Interval) -> Vec<Dyadic> {
        let mut members: Vec<Dyadic> = [-1000, -3, -2, -1, 0, 1, 2, 3, 5, 1000].map(Dyadic::from).into();
        members.push(Dyadic::from(1).scale(-1, Down).expect("in range"));
        members.retain(|m| x.contains(&Interval::point(m.clone())));
        members
    }

    #[test]
    fn results_contain_all_values_and_are_hulls() {
        for x in samples() {
            for y in samples() {
                let (sum, product) = (x.add(&y, 64), x.mul(&y, 64));
                let (least, most) = (x.min(&y), x.max(&y));
                let quotient = x.div(&y, 64);
                assert_eq!(quotient.is_ok(), y.is_certainly_nonzero(), "{x:?} / {y:?}");
                let mut hull: Option<Interval> = None;
                for a in members(&x) {
                    for b in members(&y) {
                        let (a, b) = (Interval::point(a.clone()), Interval::point(b));
                        let value = a.mul(&b, 64);
                        assert!(sum.contains(&a.add(&b, 64)), "{x:?} + {y:?}");
                        assert!(product.contains(&value), "{x:?} * {y:?}");
                        assert!(least.contains(&a.min(&b)) && most.contains(&a.max(&b)));
                        if let Ok(quotient) = &quotient {
                            assert!(quotient.contains(&a.div(&b, 64).expect("y excludes 0")));
                        }
                        hull = Some(hull.map_or(value.clone(), |h| h.hull(&value)));
                    }
                }
                // The members include the ends, so finite products are attained.
                if let (Some(_), Some(_), Some(_), Some(_)) = (x.lower(), x.upper(), y.lower(), y.upper()) {
                    assert_eq!(Some(product), hull, "{x:?} * {y:?}");
                }
            }
        }
    }

    #[test]
    fn infinite_ends() {
        let ray = Interval::new(Some(1.into()), None).expect("ordered");
        let half_line = Interval::new(Some(0.into()), None).expect("ordered");
        assert_eq!(Interval::zero().mul(&Interval::whole(), 64), Interval::zero());
        assert_eq!(ray.mul(&finite(0, 1), 64), half_line);
        assert_eq!(ray.sub(&ray, 64), Interval::whole());
        assert_eq!(finite(1, 1).div(&ray, 64), Ok(finite(0, 1)));
        assert_eq!(ray.div(&ray, 64), Ok(half_line.clone()));
        assert_eq!(half_line.sqrt(64), Ok(half_line.clone()));
        assert_eq!(Interval::whole().abs(), half_line);
        assert_eq!(Interval::whole().powi(2, 64), Ok(half_line));
        assert_eq!(Interval::whole().powi(3, 64), Ok(Interval::whole()));
        assert_eq!(ray.powi(-1, 64), Ok(finite(0, 1)));
    }

    #[test]
    fn domains_are_never_cut_down() {
        let across = finite(-1, 4);
        assert_eq!(across.sqrt(64), Err(Refusal::OutsideDomain("sqrt")));
        assert_eq!(finite(1, 2).div(&across, 64), Err(Refusal::OutsideDomain("division")));
        assert_eq!(finite(1, 2).div(&finite(0, 1), 64), Err(Refusal::OutsideDomain("division")));
        assert_eq!(finite(0, 0).div(&finite(0, 0), 64), Err(Refusal::OutsideDomain("division")));
        assert_eq!(finite(0, 1).powi(0, 64), Err(Refusal::OutsideDomain("power")));
        assert_eq!(across.powi(-1, 64), Err(Refusal::OutsideDomain("power")));
        assert_eq!(finite(0, 4).sqrt(64), Ok(finite(0, 2)));
    }

    #[test]
    fn powers() {
        assert_eq!(finite(-2, 3).powi(2, 64), Ok(finite(0, 9)));
        assert_eq!(finite(-3, -2).powi(2, 64), Ok(finite(4, 9)));
        assert_eq!(finite(-2, 3).powi(3, 64), Ok(finite(-8, 27)));
        assert_eq!(finite(2, 4).powi(-2, 64).map(|x| x.scale(4)), Ok(finite(1, 4)));
        assert_eq!(finite(-2, -2).powi(0, 64), Ok(finite(1, 1)));
        // Hostile exponents: 63 squarings, whatever the result.
        for n in [i64::MAX, i64::MIN, i64::MIN + 1] {
            assert!(finite(2, 3).powi(n, 64).is_ok() && finite(-3, -2).powi(n, 64).is_ok());
            assert_eq!(finite(1, 1).powi(n, 64), Ok(finite(1, 1)));
        }
        // (1 + 2^-40)^(2^40) is e (1 - 2^-41 + ..), and keeps its bits.
        let near_one = Interval::point(Dyadic::new((1i64 << 40 | 1).into(), -40).expect("in range"));
        let power = near_one.powi(1 << 40, 64).expect("positive");
        assert!(power.is_tight(61), "{power:?}");
    }

    #[test]
    fn set_operations_and_signs() {
        assert_eq!(Interval::new(Some(2.into()), Some(1.into())), None);
        assert_eq!(finite(0, 2).intersection(&finite(1, 3)), Some(finite(1, 2)));
        assert_eq!(finite(0, 1).intersection(&finite(2, 3)), None);
        assert_eq!(finite(0, 1).hull(&finite(3, 4)), finite(0, 4));
        assert!(finite(0, 1).is_certainly_nonnegative() && !finite(0, 1).is_certainly_positive());
        assert!(finite(-1, 0).is_certainly_nonpositive() && !finite(-1, 0).is_certainly_negative());
        assert!(!Interval::whole().is_certainly_nonzero() && !finite(-1, 1).is_certainly_nonnegative());
        let halves = Interval::new(Dyadic::new((-3).into(), -1), Dyadic::new(5.into(), -1)).expect("ordered");
        assert_eq!((halves.floor(), halves.ceil()), (finite(-2, 2), finite(-1, 3)));
        assert_eq!(finite(1, 4).midpoint(), Dyadic::new(5.into(), -1));
        assert_eq!(Interval::whole().midpoint(), None);
        let third = BigRational::new(1.into(), 3.into());
        let one = BigRational::from_integer(1.into());
        assert_eq!(Interval::from_ends(Some(&one), Some(&third), 64), None);
        let part = Interval::from_ends(Some(&third), None, 64).expect("ordered");
        assert!(
            part.contains(&Interval::from_rational(&third, 63).max(&Interval::from_rational(&third, 64)))
                && part.upper().is_none()
        );
    }
}
