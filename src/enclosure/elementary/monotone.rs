//! Functions that are monotone on their whole domain, which is an interval,
//! and `cosh`, which is so on each side of 0.

use crate::enclosure::domain::Definedness;
use crate::enclosure::function::Function;
use crate::enclosure::interval::{Enclosure, greater, lesser};
use crate::enclosure::rounding::{End, Toward};
use Toward::{Down, Up};
use std::cmp::Ordering;

/// The domain of a function between two numbers (or infinities), all finite
/// ends of it open or all closed.
struct Domain {
    least: f64,
    greatest: f64,
    open: bool,
}

const ALL: Domain = Domain::new(f64::NEG_INFINITY, f64::INFINITY, true);
const POSITIVE: Domain = Domain::new(0.0, f64::INFINITY, true);
const NON_NEGATIVE: Domain = Domain::new(0.0, f64::INFINITY, false);
const FROM_ONE: Domain = Domain::new(1.0, f64::INFINITY, false);
const CLOSED_UNIT: Domain = Domain::new(-1.0, 1.0, false);
const OPEN_UNIT: Domain = Domain::new(-1.0, 1.0, true);

impl Domain {
    const fn new(least: f64, greatest: f64, open: bool) -> Domain {
        Domain { least, greatest, open }
    }

    /// Whether a point whose order relative to an end of the domain is given
    /// lies on the domain's side of it.
    #[inline]
    fn admits(&self, order: Ordering, outside: Ordering, infinite: bool) -> bool {
        order != outside && (order != Ordering::Equal || !self.open || infinite)
    }
}

impl<E: End> Enclosure<E> {
    /// A non-empty enclosure cut down to a domain; empty if they do not meet.
    #[inline]
    fn restricted(&self, domain: &Domain, defined: &mut Definedness) -> Self {
        let least = E::small(domain.least, self.precision());
        let greatest = E::small(domain.greatest, self.precision());
        let above = |x: &E| domain.admits(x.order(&least), Ordering::Less, x.is_infinite());
        let below = |x: &E| domain.admits(x.order(&greatest), Ordering::Greater, x.is_infinite());
        if !above(self.hi()) || !below(self.lo()) {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(self.precision());
        }
        if !above(self.lo()) || !below(self.hi()) {
            defined.lower_to(Definedness::Partly);
        }
        Self::between(greater(self.lo(), &least).clone(), lesser(self.hi(), &greatest).clone())
    }

    #[inline]
    pub(super) fn increasing(&self, f: Function) -> Self {
        Self::between(self.lo().at(f, Down), self.hi().at(f, Up))
    }

    #[inline]
    pub(super) fn decreasing(&self, f: Function) -> Self {
        Self::between(self.hi().at(f, Down), self.lo().at(f, Up))
    }

    /// One of the functions that are monotone on their domain.
    #[inline]
    pub(super) fn monotone(&self, f: Function, defined: &mut Definedness) -> Self {
        let domain = match f {
            Function::Log | Function::Log2 => POSITIVE,
            Function::Sqrt => NON_NEGATIVE,
            Function::Asin | Function::Acos => CLOSED_UNIT,
            Function::Acosh => FROM_ONE,
            Function::Atanh => OPEN_UNIT,
            _ => ALL,
        };
        let x = self.restricted(&domain, defined);
        if x.is_empty() {
            return x;
        }
        match f {
            Function::Acos | Function::Erfc => x.decreasing(f),
            _ => x.increasing(f),
        }
    }

    #[inline]
    pub(super) fn cosh(&self) -> Self {
        Self::between(self.mignitude().at(Function::Cosh, Down), self.magnitude().at(Function::Cosh, Up))
    }
}
