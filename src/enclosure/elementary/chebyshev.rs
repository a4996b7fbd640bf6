//! Chebyshev polynomials of the first kind, `chebyshev(n, x) = T_n(x)`.
//!
//! `T_n(cos u) = cos(n u)` gives the extrema `cos(k pi / n)` with the values
//! 1 and -1 in turn; beyond 1 the polynomial increases, and `T_n(-x)` is
//! `T_n(x)` up to the sign `(-1)^n`. Single values come from the doubling
//! rules `T_2m = 2 T_m^2 - 1` and `T_(2m+1) = 2 T_m T_(m+1) - x`, which are
//! exact identities of polynomials and so hold for every real `x`
//! (NIST Digital Library of Mathematical Functions, 18.5.1 and 18.18.21).

use crate::enclosure::domain::Definedness;
use crate::enclosure::function::Function;
use crate::enclosure::interval::Enclosure;
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};

/// Up to this many degrees are treated one by one.
const SEPARATE_DEGREES: i64 = 8;

/// Precision is raised at most so often near a zero of the polynomial.
const ATTEMPTS: u32 = 4;

impl<E: End> Enclosure<E> {
    /// The values at members of `argument` for the degrees that are members.
    pub(super) fn chebyshev(&self, argument: &Self, defined: &mut Definedness) -> Self {
        let degrees = self.natural_hull(defined);
        if degrees.is_empty() {
            return degrees;
        }
        let ends = (degrees.lo().as_integer(), degrees.hi().as_integer());
        if let (Some(first), Some(last)) = ends
            && last - first < SEPARATE_DEGREES
        {
            return (first..=last)
                .map(|n| argument.chebyshev_of_degree(n))
                .fold(Self::empty(self.precision()), |all, one| all.hull(&one));
        }
        argument.chebyshev_of_many(ends.0, ends.1)
    }

    /// The three parts of the line on which the polynomials behave differently,
    /// the outer ones mirrored to the right: below -1, between, above 1.
    fn parts(&self) -> (Self, Self, Self) {
        let precision = self.precision();
        let above = Self::small(1.0, f64::INFINITY, precision);
        let inner = Self::small(-1.0, 1.0, precision);
        (self.negated().intersection(&above), self.intersection(&inner), self.intersection(&above))
    }

    /// All degrees from `first` to `last`; nothing for an end beyond machine integers.
    fn chebyshev_of_many(&self, first: Option<i64>, last: Option<i64>) -> Self {
        let precision = self.precision();
        let (below, inner, above) = self.parts();
        let upper = |x: &E| match last {
            Some(n) => value_at(n, x, Up),
            None if *x == E::small(1.0, precision) => x.clone(),
            None => E::small(f64::INFINITY, precision),
        };
        let mut range = Self::empty(precision);
        if !inner.is_empty() {
            range = Self::small(-1.0, 1.0, precision);
        }
        if !above.is_empty() {
            let lo = match first {
                Some(n) => value_at(n, above.lo(), Down),
                None => E::small(1.0, precision),
            };
            range = range.hull(&Self::between(lo, upper(above.hi())));
        }
        if !below.is_empty() {
            let hi = upper(below.hi());
            range = range.hull(&Self::between(hi.negated(), hi));
        }
        range
    }

    fn chebyshev_of_degree(&self, n: i64) -> Self {
        let (below, inner, above) = self.parts();
        let mut range = Self::empty(self.precision());
        let outer = |x: &Self| Self::between(value_at(n, x.lo(), Down), value_at(n, x.hi(), Up));
        if !above.is_empty() {
            range = range.hull(&outer(&above));
        }
        if !below.is_empty() {
            let mirrored = outer(&below);
            range = range.hull(&if n % 2 == 0 { mirrored } else { mirrored.negated() });
        }
        if !inner.is_empty() {
            range = range.hull(&inner.inner_chebyshev(n));
        }
        range
    }

    /// `T_n` on a box within `[-1, 1]`.
    fn inner_chebyshev(&self, n: i64) -> Self {
        let at = |x: &E| Self::both(|toward| value_at(n, x, toward));
        if self.is_point() {
            return at(self.lo());
        }
        let mut range = at(self.lo()).hull(&at(self.hi()));
        if n == 0 {
            return range;
        }
        // The extrema inside are those with k in this enclosure. An integer
        // that only rounding brought in belongs to an end so close to an
        // extremum that its value is 1 or -1 within rounding as well.
        let degree = Self::from_integer(n, self.precision());
        let turns = self
            .decreasing(Function::Acos)
            .times(&degree)
            .over(&Self::pi(self.precision()), &mut Definedness::Continuous.clone())
            .integer_hull();
        if turns.is_empty() {
            return range;
        }
        match (turns.lo().as_integer(), turns.hi().as_integer()) {
            (Some(k), Some(l)) if k == l => {
                range = range.hull(&self.alike(if k % 2 == 0 { 1.0 } else { -1.0 }));
            }
            _ => range = Self::small(-1.0, 1.0, self.precision()),
        }
        range
    }
}

/// A bound of `T_n` at a number, or its limit at an infinity.
fn value_at<E: End>(n: i64, x: &E, toward: Toward) -> E {
    let precision = x.precision();
    if n == 0 {
        return E::small(1.0, precision);
    }
    if x.sign().is_lt() {
        return if n % 2 == 0 {
            value_at(n, &x.negated(), toward)
        } else {
            value_at(n, &x.negated(), toward.reversed()).negated()
        };
    }
    if n == 1 || x.is_infinite() {
        return x.clone();
    }
    // Each doubling of the degree may quadruple the error.
    let mut extra = 2 * n.ilog2() + 16;
    for attempt in 1.. {
        let exact = Enclosure::point(x.with_more_bits(extra));
        let value = by_doubling(n, &exact).rounded_to(precision);
        let unit = value.magnitude().times(&E::spacing(precision), Up);
        let is_tight = value.width_upper().order(&unit).is_le();
        let cannot_raise = exact.precision() == precision;
        if is_tight || cannot_raise || attempt == ATTEMPTS {
            return match toward {
                Down => value.lo().clone(),
                Up => value.hi().clone(),
            };
        }
        extra *= 4;
    }
    unreachable!("the loop ends at its last attempt")
}

/// `T_n(x)` for `n >= 1` and one number `x >= 0`.
fn by_doubling<E: End>(n: i64, x: &Enclosure<E>) -> Enclosure<E> {
    let one = x.alike(1.0);
    let two = x.alike(2.0);
    let range = if x.is_certainly_at_most(&one) {
        Enclosure::small(-1.0, 1.0, x.precision())
    } else {
        Enclosure::small(1.0, f64::INFINITY, x.precision())
    };
    let double = |a: &Enclosure<E>| two.times(&a.square()).minus(&one).intersection(&range);
    // (a, b) = (T_m, T_(m+1)), where m runs over the leading bits of n.
    let (mut a, mut b) = (x.clone(), double(x));
    for bit in (0..n.ilog2()).rev() {
        let between = two.times(&a).times(&b).minus(x).intersection(&range);
        if n >> bit & 1 == 0 {
            (a, b) = (double(&a), between);
        } else {
            (a, b) = (between, double(&b));
        }
    }
    a
}
