//! Functions of integers: the factorial and the binomial coefficient.
//!
//! The arguments are known to be integers from the form of the term; their
//! enclosures are boxes around the integers that occur.

use crate::enclosure::domain::Definedness;
use crate::enclosure::function::Function;
use crate::enclosure::interval::Enclosure;
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};

impl<E: End> Enclosure<E> {
    /// The hull of the integers `>= 0` among the members, recording whether
    /// there are other integers.
    pub(super) fn natural_hull(&self, defined: &mut Definedness) -> Self {
        let integers = self.integer_hull();
        let from_zero = Self::small(0.0, f64::INFINITY, self.precision());
        let naturals = integers.intersection(&from_zero);
        defined.lower_to(if naturals.is_empty() {
            Definedness::Nowhere
        } else if integers.lo().sign().is_lt() {
            Definedness::Partly
        } else if naturals.is_point() {
            Definedness::Continuous
        } else {
            Definedness::Everywhere
        });
        naturals
    }

    /// `n! = gamma(n+1)`, which does not decrease from 0 on.
    pub(super) fn factorial(&self, defined: &mut Definedness) -> Self {
        let n = self.natural_hull(defined);
        if n.is_empty() {
            return n;
        }
        let one = E::small(1.0, self.precision());
        Self::between(
            n.lo().plus(&one, Down).at(Function::Gamma, Down),
            n.hi().plus(&one, Up).at(Function::Gamma, Up),
        )
    }

    /// Binomial coefficients: they do not decrease in `n`, and for fixed `n`
    /// they rise in `k` up to `n/2` and then fall, to 0 beyond `n`.
    pub(super) fn binomial(&self, other: &Self, defined: &mut Definedness) -> Self {
        let n = self.natural_hull(defined);
        let k = other.natural_hull(defined);
        let precision = self.precision();
        if n.is_empty() || k.is_empty() {
            return Self::empty(precision);
        }
        let value = |n: i64, k: i64, toward| {
            if k > n { E::small(0.0, precision) } else { E::binomial(n, k, precision, toward) }
        };
        // Ends beyond every machine integer are answered coarsely.
        let k_lo = k.lo().as_integer().unwrap_or(i64::MAX);
        let k_hi = k.hi().as_integer().unwrap_or(i64::MAX);
        let lo = match n.lo().as_integer() {
            Some(n) => {
                let (a, b) = (value(n, k_lo, Down), value(n, k_hi, Down));
                if a.order(&b).is_gt() { b } else { a }
            }
            None => E::small(if k_hi == 0 { 1.0 } else { 0.0 }, precision),
        };
        let hi = match n.hi().as_integer() {
            Some(n) => value(n, (n / 2).clamp(k_lo, k_hi), Up),
            None if k_hi == 0 => E::small(1.0, precision),
            None => E::small(f64::INFINITY, precision),
        };
        Self::between(lo, hi)
    }
}

/// A bound of the binomial coefficient through the logarithms of three
/// gamma functions, in the format of `like`; `0 <= k <= n`.
pub(in crate::enclosure) fn binomial_by_gamma<E: End>(n: i64, k: i64, like: &E, toward: Toward) -> E {
    // lgamma of a 64-bit number is below 2^70; its bits before the point and
    // some in hand are what the exponential costs.
    let precision = like.with_more_bits(96).precision();
    let log_factorial = |m: i64| {
        Enclosure::<E>::from_integer(m, precision)
            .plus(&Enclosure::small(1.0, 1.0, precision))
            .lgamma(&mut Definedness::Continuous.clone())
    };
    let logarithm = log_factorial(n).minus(&log_factorial(k)).minus(&log_factorial(n - k));
    match toward {
        Down => logarithm.lo().at(Function::Exp, Down),
        Up => logarithm.hi().at(Function::Exp, Up),
    }
    .rounded_to(like.precision(), toward)
}
