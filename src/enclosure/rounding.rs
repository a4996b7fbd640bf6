//! Up, down, and nothing else: what an end of an enclosure must be able to do.
//!
//! The logic of enclosures (which end of the argument gives which end of the
//! result, where extrema and poles lie) is written once over this trait. It is
//! implemented twice: for `f64` in `float64.rs`, for MPFR numbers in `mpfr.rs`.

use super::function::Function;
use num_rational::BigRational;
use std::cmp::Ordering;
use std::fmt::Debug;

/// The direction in which a result may differ from the exact value.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Toward {
    /// The result is at most the exact value.
    Down,
    /// The result is at least the exact value.
    Up,
}

impl Toward {
    /// The other direction, for the end that is negated afterwards.
    #[inline]
    #[must_use]
    pub fn reversed(self) -> Toward {
        match self {
            Toward::Down => Toward::Up,
            Toward::Up => Toward::Down,
        }
    }
}

/// A finite number or one of the two infinities, never "not a number".
///
/// Each operation with a [`Toward`] returns a number on that side of the exact
/// result. If an implementation cannot compute the result it returns the
/// infinity on that side, which is useless but true. Infinite arguments stand
/// for limits; `0 * infinity` is 0, because an infinite end is never attained
/// and the other factor is exactly 0.
pub trait End: Clone + Debug + PartialEq {
    /// What fixes the format of the numbers: nothing for `f64`, the bits for MPFR.
    type Precision: Copy + Debug + Default + PartialEq;

    /// The precision of this number.
    fn precision(&self) -> Self::Precision;

    /// A power of 2, 0, 3, the negative of such a number, or an infinity.
    /// Two bits hold them, so this is exact at every precision.
    fn small(value: f64, precision: Self::Precision) -> Self;

    /// A bound of any `f64` that is not a NaN.
    fn from_f64(value: f64, precision: Self::Precision, toward: Toward) -> Self;

    /// A bound of a rational number.
    fn from_rational(value: &BigRational, precision: Self::Precision, toward: Toward) -> Self;

    /// The distance from 1 to the next number.
    fn spacing(precision: Self::Precision) -> Self;

    /// Bounds of pi.
    fn pi(precision: Self::Precision, toward: Toward) -> Self;

    /// Bounds of Euler's constant 0.577...
    fn euler(precision: Self::Precision, toward: Toward) -> Self;

    /// The order of two ends.
    fn order(&self, other: &Self) -> Ordering;

    /// The order relative to 0.
    fn sign(&self) -> Ordering;

    /// Whether this is one of the infinities.
    fn is_infinite(&self) -> bool;

    /// Whether this is not a number at all and so cannot be an end. Only
    /// what comes from outside has to be asked.
    fn is_no_number(&self) -> bool;

    /// The number with the opposite sign.
    #[must_use]
    fn negated(&self) -> Self;

    /// Sum; never of two opposite infinities.
    #[must_use]
    fn plus(&self, other: &Self, toward: Toward) -> Self;

    /// Difference; never of two equal infinities.
    #[must_use]
    fn minus(&self, other: &Self, toward: Toward) -> Self;

    /// Product, with `0 * infinity = 0`.
    #[must_use]
    fn times(&self, other: &Self, toward: Toward) -> Self;

    /// Quotient; the divisor is not 0, and not both are infinite.
    #[must_use]
    fn over(&self, other: &Self, toward: Toward) -> Self;

    /// The power with an integer exponent. For a zero base and a negative
    /// exponent the limit from the right, `+infinity`.
    #[must_use]
    fn to_integer_power(&self, exponent: i64, toward: Toward) -> Self;

    /// The power of a base `>= 0`. Where the power is not defined (`0^0`) any
    /// limit of it may be returned; the caller must not rely on it.
    #[must_use]
    fn to_power(&self, exponent: &Self, toward: Toward) -> Self;

    /// The greatest integer that is not above.
    #[must_use]
    fn floor(&self) -> Self;

    /// The least integer that is not below.
    #[must_use]
    fn ceil(&self) -> Self;

    /// The value as an integer, if it is one and fits.
    fn as_integer(&self) -> Option<i64>;

    /// A finite number between the two ends (which may be infinite).
    #[must_use]
    fn between(lo: &Self, hi: &Self) -> Self;

    /// A bound of `f` at this point, or of its one-sided limit at an infinite
    /// end or at a pole of a logarithm. `f` is one of the functions of one
    /// real argument that is neither piecewise (`abs`, `floor`, ...) nor
    /// defined on integers; the point lies in the closure of its domain.
    #[must_use]
    fn at(&self, f: Function, toward: Toward) -> Self;

    /// Whether sine and cosine of this number can be computed in reasonable
    /// time and memory, which needs as many bits of pi as its exponent says.
    fn angle_is_computable(&self) -> bool;

    /// The same number in a format with more bits, where there is one.
    #[must_use]
    fn with_more_bits(&self, extra: u32) -> Self;

    /// A bound in the given format.
    #[must_use]
    fn rounded_to(&self, precision: Self::Precision, toward: Toward) -> Self;

    /// A bound of the binomial coefficient of two integers `0 <= k <= n`.
    fn binomial(n: i64, k: i64, precision: Self::Precision, toward: Toward) -> Self;

    /// The exact value, unless it is infinite or its size is unreasonable.
    fn to_rational(&self) -> Option<BigRational>;

    /// The order relative to a rational number.
    fn order_rational(&self, value: &BigRational) -> Ordering;
}
