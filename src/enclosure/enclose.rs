//! What a term can be evaluated over.

use super::domain::Definedness;
use super::function::Function;
use num_rational::BigRational;

/// A set-valued arithmetic over which a term of the language can be walked.
///
/// Each operation returns a set that contains all values of the operation at
/// members of its arguments, and lowers `defined` if it is not certain to be
/// defined at all of them. One record serves for a whole term.
pub trait Enclose: Clone {
    /// What fixes the format of the numbers, such as a number of bits.
    type Precision: Copy;

    /// A set around a rational number.
    fn rational(value: &BigRational, precision: Self::Precision) -> Self;
    /// A set around pi.
    fn pi(precision: Self::Precision) -> Self;
    /// A set around e.
    fn e(precision: Self::Precision) -> Self;
    /// A set around Euler's constant 0.577...
    fn euler(precision: Self::Precision) -> Self;
    /// All reals: the set around what is not known.
    fn whole(precision: Self::Precision) -> Self;

    /// Negatives of members.
    #[must_use]
    fn neg(&self) -> Self;
    /// Sums of members.
    #[must_use]
    fn add(&self, other: &Self) -> Self;
    /// Differences of members.
    #[must_use]
    fn sub(&self, other: &Self) -> Self;
    /// Products of members.
    #[must_use]
    fn mul(&self, other: &Self) -> Self;
    /// Quotients of members.
    #[must_use]
    fn div(&self, other: &Self, defined: &mut Definedness) -> Self;
    /// Powers with a literal integer exponent; `0^n` needs `n > 0`.
    #[must_use]
    fn powi(&self, exponent: i64, defined: &mut Definedness) -> Self;
    /// Powers of members; a negative base needs an integer exponent, and the
    /// base 0 a positive one.
    #[must_use]
    fn pow(&self, exponent: &Self, defined: &mut Definedness) -> Self;
    /// Powers whose exponent is known, from the form of the term, to take
    /// integer values only, so that negative bases do no harm.
    #[must_use]
    fn pow_at_integers(&self, exponent: &Self, defined: &mut Definedness) -> Self;
    /// Values of a function of the language. Integer arguments (of
    /// `factorial`, `binomial` and `chebyshev`) are taken to be known as
    /// integers from the form of the term.
    #[must_use]
    fn apply(function: Function, arguments: &[Self], defined: &mut Definedness) -> Self;
}

#[cfg(feature = "mpfr")]
impl<E: super::End> Enclose for super::Enclosure<E> {
    type Precision = E::Precision;

    #[inline]
    fn rational(value: &BigRational, precision: E::Precision) -> Self {
        Self::from_rational(value, precision)
    }
    #[inline]
    fn pi(precision: E::Precision) -> Self {
        Self::pi(precision)
    }
    #[inline]
    fn e(precision: E::Precision) -> Self {
        Self::e(precision)
    }
    #[inline]
    fn euler(precision: E::Precision) -> Self {
        Self::euler(precision)
    }
    #[inline]
    fn whole(precision: E::Precision) -> Self {
        Self::whole(precision)
    }
    #[inline]
    fn neg(&self) -> Self {
        self.negated()
    }
    #[inline]
    fn add(&self, other: &Self) -> Self {
        self.plus(other)
    }
    #[inline]
    fn sub(&self, other: &Self) -> Self {
        self.minus(other)
    }
    #[inline]
    fn mul(&self, other: &Self) -> Self {
        self.times(other)
    }
    #[inline]
    fn div(&self, other: &Self, defined: &mut Definedness) -> Self {
        self.over(other, defined)
    }
    #[inline]
    fn powi(&self, exponent: i64, defined: &mut Definedness) -> Self {
        self.to_integer_power(exponent, defined)
    }
    #[inline]
    fn pow(&self, exponent: &Self, defined: &mut Definedness) -> Self {
        self.to_power(exponent, defined)
    }
    #[inline]
    fn pow_at_integers(&self, exponent: &Self, defined: &mut Definedness) -> Self {
        self.to_power_at_integers(exponent, defined)
    }
    #[inline]
    fn apply(function: Function, arguments: &[Self], defined: &mut Definedness) -> Self {
        Self::apply(function, arguments, defined)
    }
}
