//! Ends as MPFR numbers of any precision: the only file that names the crate
//! behind them.
//!
//! MPFR rounds every function correctly in the direction asked for, so the
//! bounds here are the best of their format. What has to be guarded is its
//! range: exponents are limited, arguments of huge exponent would need as many
//! bits of pi, and exact conversion of huge numbers as much memory.

use super::function::Function;
use super::interval::Enclosure;
use super::rounding::{End, Toward};
use num_bigint::{BigInt, Sign};
use num_rational::BigRational;
use num_traits::{ToPrimitive, Zero};
use rug::float::{Constant, Round};
use rug::integer::Order;
use rug::ops::{AddFrom, NegAssign, Pow};
use rug::{Assign, Float, Integer};
use std::cmp::Ordering;

/// Exponents beyond this are neither reduced modulo pi nor written out.
const GREATEST_EXPONENT: u32 = 1 << 16;

/// Binomial coefficients of up to this many factors are computed exactly.
const EXACT_FACTORS: i64 = 4096;

/// The bits of a number's significand.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Bits(u32);

impl Bits {
    /// The least number of bits.
    pub const LEAST: u32 = 2;
    /// The greatest number of bits.
    pub const GREATEST: u32 = 1 << 20;

    /// So many bits, moved into the range from [`Bits::LEAST`] to [`Bits::GREATEST`].
    #[must_use]
    pub fn new(bits: u32) -> Bits {
        Bits(bits.clamp(Self::LEAST, Self::GREATEST))
    }

    /// The number of bits.
    #[must_use]
    pub fn get(self) -> u32 {
        self.0
    }
}

impl Default for Bits {
    fn default() -> Bits {
        Bits(128)
    }
}

/// A number with a significand of a fixed number of bits, or an infinity.
#[derive(Clone, Debug, PartialEq)]
pub struct BigFloat(Float);

/// An enclosure with MPFR ends.
pub type BigInterval = Enclosure<BigFloat>;

fn round(toward: Toward) -> Round {
    match toward {
        Toward::Down => Round::Down,
        Toward::Up => Round::Up,
    }
}

/// A result that MPFR calls "not a number" is unknown, hence infinite.
fn settled(mut value: Float, toward: Toward) -> BigFloat {
    if value.is_nan() {
        value.assign(match toward {
            Toward::Down => f64::NEG_INFINITY,
            Toward::Up => f64::INFINITY,
        });
    }
    BigFloat(value)
}

fn to_integer(value: &BigInt) -> Integer {
    let (sign, digits) = value.to_u64_digits();
    let mut integer = Integer::from_digits(&digits, Order::Lsf);
    if sign == Sign::Minus {
        integer.neg_assign();
    }
    integer
}

fn from_integer(value: &Integer) -> BigInt {
    let sign = match value.cmp0() {
        Ordering::Less => Sign::Minus,
        Ordering::Equal => Sign::NoSign,
        Ordering::Greater => Sign::Plus,
    };
    let digits = value.to_digits::<u32>(Order::Lsf);
    BigInt::new(sign, digits)
}

/// An integer as a number with as many bits as it needs.
fn exact(value: &Integer) -> Float {
    Float::with_val(value.significant_bits().max(2), value)
}

/// A bound in `f64` of a rational number of any size.
pub(super) fn rational_to_f64(value: &BigRational, toward: Toward) -> f64 {
    BigFloat::from_rational(value, Bits(64), toward).to_f64(toward)
}

impl BigFloat {
    fn common_bits(&self, other: &BigFloat) -> u32 {
        self.0.prec().max(other.0.prec())
    }

    /// A bound in `f64`.
    #[must_use]
    pub fn to_f64(&self, toward: Toward) -> f64 {
        self.0.to_f64_round(round(toward))
    }

    /// A bound of a decimal number such as `-12.5e-3`, or nothing if the text
    /// is not one: digits with an optional point, an optional exponent of
    /// base 10 with at most nine digits, and an optional sign.
    #[must_use]
    pub fn from_decimal(text: &str, precision: Bits, toward: Toward) -> Option<BigFloat> {
        if !super::decimal::is_decimal(text) {
            return None;
        }
        let parsed = Float::parse(text).ok()?;
        let value = Float::with_val_round(precision.0, parsed, round(toward)).0;
        Some(settled(value, toward))
    }

    /// The leading decimal digits of a bound, without sign, and the exponent
    /// that goes with a point before the first of them. Nothing for 0 and
    /// infinities.
    pub(super) fn decimal_digits(&self, digits: usize, toward: Toward) -> Option<(String, i32)> {
        if self.0.is_zero() || self.0.is_infinite() {
            return None;
        }
        let (_, text, exponent) = self.0.to_sign_string_exp_round(10, Some(digits.max(1)), round(toward));
        Some((text, exponent?))
    }
}

impl End for BigFloat {
    type Precision = Bits;

    fn precision(&self) -> Bits {
        Bits(self.0.prec())
    }

    fn small(value: f64, precision: Bits) -> BigFloat {
        BigFloat(Float::with_val(precision.0, value))
    }

    fn from_f64(value: f64, precision: Bits, toward: Toward) -> BigFloat {
        settled(Float::with_val_round(precision.0, value, round(toward)).0, toward)
    }

    fn from_rational(value: &BigRational, precision: Bits, toward: Toward) -> BigFloat {
        let quotient = match (value.numer().to_i64(), value.denom().to_i64()) {
            (Some(n), Some(1)) => Float::with_val_round(precision.0, n, round(toward)).0,
            (Some(n), Some(d)) => {
                let n = Float::with_val(64, n);
                Float::with_val_round(precision.0, &n / d, round(toward)).0
            }
            _ => {
                let n = exact(&to_integer(value.numer()));
                let d = to_integer(value.denom());
                Float::with_val_round(precision.0, &n / &d, round(toward)).0
            }
        };
        settled(quotient, toward)
    }

    fn spacing(precision: Bits) -> BigFloat {
        let exponent = 1 - i32::try_from(precision.0).unwrap_or(i32::MAX);
        BigFloat(Float::with_val(precision.0, Float::i_exp(1, exponent)))
    }

    fn pi(precision: Bits, toward: Toward) -> BigFloat {
        BigFloat(Float::with_val_round(precision.0, Constant::Pi, round(toward)).0)
    }

    fn euler(precision: Bits, toward: Toward) -> BigFloat {
        BigFloat(Float::with_val_round(precision.0, Constant::Euler, round(toward)).0)
    }

    fn order(&self, other: &BigFloat) -> Ordering {
        // Ends are never NaN, so the order is total.
        self.0.partial_cmp(&other.0).unwrap_or(Ordering::Equal)
    }

    fn sign(&self) -> Ordering {
        self.0.cmp0().unwrap_or(Ordering::Equal)
    }

    fn is_infinite(&self) -> bool {
        self.0.is_infinite()
    }

    fn is_no_number(&self) -> bool {
        self.0.is_nan()
    }

    fn negated(&self) -> BigFloat {
        let mut value = self.0.clone();
        value.neg_assign();
        BigFloat(value)
    }

    fn plus(&self, other: &BigFloat, toward: Toward) -> BigFloat {
        let bits = self.common_bits(other);
        let sum = Float::with_val_round(bits, &self.0 + &other.0, round(toward)).0;
        settled(sum, toward)
    }

    fn minus(&self, other: &BigFloat, toward: Toward) -> BigFloat {
        let bits = self.common_bits(other);
        let difference = Float::with_val_round(bits, &self.0 - &other.0, round(toward)).0;
        settled(difference, toward)
    }

    fn times(&self, other: &BigFloat, toward: Toward) -> BigFloat {
        let bits = self.common_bits(other);
        if self.0.is_zero() || other.0.is_zero() {
            return BigFloat(Float::new(bits));
        }
        let product = Float::with_val_round(bits, &self.0 * &other.0, round(toward)).0;
        settled(product, toward)
    }

    fn over(&self, other: &BigFloat, toward: Toward) -> BigFloat {
        let bits = self.common_bits(other);
        let quotient = Float::with_val_round(bits, &self.0 / &other.0, round(toward)).0;
        settled(quotient, toward)
    }

    fn to_integer_power(&self, exponent: i64, toward: Toward) -> BigFloat {
        let bits = self.0.prec();
        if self.0.is_zero() && exponent < 0 {
            return BigFloat::small(f64::INFINITY, self.precision());
        }
        let power = if exponent == 2 {
            Float::with_val_round(bits, self.0.square_ref(), round(toward)).0
        } else {
            Float::with_val_round(bits, (&self.0).pow(exponent), round(toward)).0
        };
        settled(power, toward)
    }

    fn to_power(&self, exponent: &BigFloat, toward: Toward) -> BigFloat {
        let bits = self.common_bits(exponent);
        let power = if self.0.is_zero() && exponent.sign().is_lt() {
            // A zero may carry a sign, and this limit must not.
            return BigFloat::small(f64::INFINITY, Bits(bits));
        } else {
            Float::with_val_round(bits, (&self.0).pow(&exponent.0), round(toward)).0
        };
        settled(power, toward)
    }

    fn floor(&self) -> BigFloat {
        BigFloat(self.0.clone().floor())
    }

    fn ceil(&self) -> BigFloat {
        BigFloat(self.0.clone().ceil())
    }

    fn as_integer(&self) -> Option<i64> {
        if !self.0.is_integer() || self.0.get_exp().unwrap_or(0) > 63 {
            return None;
        }
        self.0.to_integer()?.to_i64()
    }

    fn between(lo: &BigFloat, hi: &BigFloat) -> BigFloat {
        let bits = lo.common_bits(hi);
        let number = |value: f64| BigFloat(Float::with_val(bits, value));
        match (lo.is_infinite(), hi.is_infinite()) {
            (false, false) => {
                // Halving is exact except at the very bottom of the range.
                let middle = Float::with_val(bits, &lo.0 + &hi.0) / 2u32;
                let middle = if middle < lo.0 || middle.is_infinite() {
                    lo.0.clone()
                } else if middle > hi.0 {
                    hi.0.clone()
                } else {
                    middle
                };
                BigFloat(middle)
            }
            (true, true) => number(0.0),
            (false, true) if lo.sign().is_lt() => number(0.0),
            (true, false) if hi.sign().is_gt() => number(0.0),
            (false, true) => {
                let mut beyond = Float::with_val(bits, &lo.0 * 2u32);
                beyond.add_from(&Float::with_val(2, 1));
                BigFloat(if beyond.is_infinite() { lo.0.clone() } else { beyond })
            }
            (true, false) => BigFloat::between(&hi.negated(), &number(f64::INFINITY)).negated(),
        }
    }

    fn at(&self, f: Function, toward: Toward) -> BigFloat {
        let mut x = self.0.clone();
        let direction = round(toward);
        match f {
            Function::Exp => x.exp_round(direction),
            // A zero may carry a sign; the limit from the right is meant.
            Function::Log | Function::Log2 if x.is_zero() => {
                return BigFloat::small(f64::NEG_INFINITY, self.precision());
            }
            Function::Log => x.ln_round(direction),
            Function::Log2 => x.log2_round(direction),
            Function::Sqrt => x.sqrt_round(direction),
            Function::Sin => x.sin_round(direction),
            Function::Cos => x.cos_round(direction),
            Function::Tan => x.tan_round(direction),
            Function::Asin => x.asin_round(direction),
            Function::Acos => x.acos_round(direction),
            Function::Atan => x.atan_round(direction),
            Function::Sinh => x.sinh_round(direction),
            Function::Cosh => x.cosh_round(direction),
            Function::Tanh => x.tanh_round(direction),
            Function::Asinh => x.asinh_round(direction),
            Function::Acosh => x.acosh_round(direction),
            Function::Atanh => x.atanh_round(direction),
            Function::Gamma => x.gamma_round(direction),
            Function::Lgamma => x.ln_abs_gamma_round(direction).1,
            Function::Digamma => x.digamma_round(direction),
            Function::Erf => x.erf_round(direction),
            Function::Erfc => x.erfc_round(direction),
            Function::Abs
            | Function::Min
            | Function::Max
            | Function::Floor
            | Function::Ceil
            | Function::Factorial
            | Function::Binomial
            | Function::Chebyshev
            | Function::Trigamma => {
                x.assign(f64::NAN);
                Ordering::Equal
            }
        };
        settled(x, toward)
    }

    fn angle_is_computable(&self) -> bool {
        self.0.is_finite() && self.0.get_exp().unwrap_or(0) <= GREATEST_EXPONENT as i32
    }

    fn with_more_bits(&self, extra: u32) -> BigFloat {
        let bits = Bits::new(self.0.prec().saturating_add(extra));
        BigFloat(Float::with_val(bits.0.max(self.0.prec()), &self.0))
    }

    fn rounded_to(&self, precision: Bits, toward: Toward) -> BigFloat {
        BigFloat(Float::with_val_round(precision.0, &self.0, round(toward)).0)
    }

    fn binomial(n: i64, k: i64, precision: Bits, toward: Toward) -> BigFloat {
        let factors = k.min(n - k);
        if factors > EXACT_FACTORS {
            let like = BigFloat::small(1.0, precision);
            return super::elementary::binomial_by_gamma(n, k, &like, toward);
        }
        let value = Integer::from(n).binomial(factors as u32);
        BigFloat(Float::with_val_round(precision.0, value, round(toward)).0)
    }

    fn to_rational(&self) -> Option<BigRational> {
        if self.0.is_zero() {
            return Some(BigRational::zero());
        }
        if self.0.get_exp()?.unsigned_abs() > GREATEST_EXPONENT {
            return None;
        }
        let (mantissa, exponent) = self.0.to_integer_exp()?;
        let mantissa = from_integer(&mantissa);
        let power = BigInt::from(1) << exponent.unsigned_abs();
        Some(if exponent >= 0 {
            BigRational::from_integer(mantissa * power)
        } else {
            BigRational::new(mantissa, power)
        })
    }

    fn order_rational(&self, value: &BigRational) -> Ordering {
        let value = rug::Rational::from((to_integer(value.numer()), to_integer(value.denom())));
        self.0.partial_cmp(&value).unwrap_or(Ordering::Equal)
    }
}

impl BigInterval {
    /// The `f64` interval as one with MPFR ends.
    #[must_use]
    pub fn from_interval(interval: &super::Interval, precision: Bits) -> BigInterval {
        Self::new(
            BigFloat::from_f64(*interval.lo(), precision, Toward::Down),
            BigFloat::from_f64(*interval.hi(), precision, Toward::Up),
        )
        .unwrap_or_else(|| Self::empty(precision))
    }

    /// The least `f64` interval around this one.
    #[must_use]
    pub fn to_interval(&self) -> super::Interval {
        super::Interval::new(self.lo().to_f64(Toward::Down), self.hi().to_f64(Toward::Up))
            .unwrap_or_else(|| super::Interval::empty(()))
    }

    /// The least interval around a decimal number; nothing if the text is not one.
    #[must_use]
    pub fn from_decimal(text: &str, precision: Bits) -> Option<BigInterval> {
        Self::new(
            BigFloat::from_decimal(text, precision, Toward::Down)?,
            BigFloat::from_decimal(text, precision, Toward::Up)?,
        )
    }
}
