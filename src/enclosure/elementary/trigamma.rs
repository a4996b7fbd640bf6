//! The trigamma function of positive numbers, which only derivatives of the
//! digamma function bring in.
//!
//! It decreases there (NIST Digital Library of Mathematical Functions, 5.15.1).
//! From 16 on its asymptotic series is used, whose error is between 0 and the first
//! term left out (5.11(ii) and 5.15.8); below, 5.15.5 leads there. Bounds are
//! within about 1e-14 of the value whatever the precision of the ends.

use crate::enclosure::domain::Definedness;
use crate::enclosure::interval::Enclosure;
use crate::enclosure::rounding::End;

/// The Bernoulli numbers of order 2, 4, .., 10.
const BERNOULLI: [(i64, i64); 5] = [(1, 6), (-1, 30), (1, 42), (-1, 30), (5, 66)];

impl<E: End> Enclosure<E> {
    pub(super) fn trigamma(&self, defined: &mut Definedness) -> Self {
        let precision = self.precision();
        let zero = Self::from_integer(0, precision);
        if self.lo().sign().is_lt() || self.hi().sign().is_le() {
            defined.lower_to(Definedness::Partly);
            return Self::whole(precision);
        }
        let at = |end: &E| Self::point(end.clone()).trigamma_at_positive();
        let lo = if self.hi().is_infinite() { zero.lo().clone() } else { at(self.hi()).lo().clone() };
        let hi = if self.lo().sign().is_eq() {
            defined.lower_to(Definedness::Partly);
            E::small(f64::INFINITY, precision)
        } else if self.lo().is_infinite() {
            zero.hi().clone()
        } else {
            at(self.lo()).hi().clone()
        };
        Self::between(lo, hi)
    }

    fn trigamma_at_positive(&self) -> Self {
        let precision = self.precision();
        let number = |n: i64| Self::from_integer(n, precision);
        let mut ignored = Definedness::Continuous;
        let (one, start) = (number(1), number(16));
        let (mut y, mut shift) = (self.clone(), number(0));
        while y.lo().order(start.lo()).is_lt() {
            shift = shift.plus(&one.over(&y.square(), &mut ignored));
            y = y.plus(&one);
        }
        let square = one.over(&y.square(), &mut ignored);
        let coefficient =
            |(n, d): (i64, i64)| number(n).over(&number(d), &mut Definedness::Continuous.clone());
        // Between nothing and all of the term left out.
        let mut sum = coefficient(BERNOULLI[4]).hull(&number(0));
        for &bernoulli in BERNOULLI[..4].iter().rev() {
            sum = coefficient(bernoulli).plus(&square.times(&sum));
        }
        let half = one.over(&number(2), &mut ignored);
        let inner = one.plus(&half.over(&y, &mut ignored)).plus(&square.times(&sum));
        inner.over(&y, &mut ignored).plus(&shift)
    }
}

#[cfg(test)]
mod tests {
    use crate::enclosure::{BigInterval, Bits, Definedness, Function, Interval};

    /// DLMF 5.15.2 and 5.15.3 (psi'(1) = pi^2/6, psi'(1/2) = pi^2/2) with 5.15.5.
    #[test]
    fn known_values() {
        let square = std::f64::consts::PI.powi(2);
        for (x, value) in
            [(1.0, square / 6.0), (0.5, square / 2.0), (1.5, square / 2.0 - 4.0), (2.0, square / 6.0 - 1.0)]
        {
            let mut defined = Definedness::Continuous;
            let v = Interval::apply(Function::Trigamma, &[Interval::point(x)], &mut defined);
            assert!(defined.is_everywhere());
            assert!(
                v.lo() - 1e-13 <= value && value <= v.hi() + 1e-13 && v.hi() - v.lo() < 1e-12,
                "{x} {v:?}"
            );
            let wide = BigInterval::from_interval(&Interval::point(x), Bits::new(200));
            let w = BigInterval::apply(Function::Trigamma, &[wide], &mut defined).to_interval();
            assert!(*w.lo() <= value + 1e-13 && *w.hi() >= value - 1e-13, "{x} {w:?}");
        }
    }

    #[test]
    fn ranges_and_domain() {
        let on = |lo: f64, hi: f64| {
            let mut defined = Definedness::Continuous;
            let x = Interval::new(lo, hi).unwrap();
            (Interval::apply(Function::Trigamma, &[x], &mut defined), defined.is_everywhere())
        };
        let (v, everywhere) = on(1.0, f64::INFINITY);
        assert!(everywhere && *v.lo() == 0.0 && *v.hi() < 1.65);
        let (v, everywhere) = on(0.0, 1.0);
        assert!(!everywhere && v.hi().is_infinite() && *v.lo() > 1.64);
        assert!(!on(-1.0, 1.0).1);
    }
}
