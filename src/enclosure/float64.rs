//! Ends in `f64`, for the many boxes of a search where speed counts.
//!
//! Sums, products, quotients and roots are those of IEEE 754, rounded to
//! nearest, and then moved to the next number outward unless the result is
//! seen to be exact. Elementary functions come from a library whose results
//! are correctly rounded to nearest, and are moved outward by one unit as
//! well; functions of the platform's mathematical library are never used,
//! because their error has no proved bound and differs between machines.

use super::function::Function;
use super::interval::Enclosure;
use super::rounding::{End, Toward};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{Float as _, ToPrimitive, Zero};
use std::cmp::Ordering;

/// The next number in the given direction; infinities that arose by overflow
/// come back to the largest finite number when that is the safe side.
#[inline]
fn outward(result: f64, toward: Toward) -> f64 {
    match toward {
        Toward::Down => result.next_down(),
        Toward::Up => result.next_up(),
    }
}

/// The useless but true answer.
#[inline]
fn unknown(toward: Toward) -> f64 {
    match toward {
        Toward::Down => f64::NEG_INFINITY,
        Toward::Up => f64::INFINITY,
    }
}

/// Outward, unless the error of the rounded result has the safe sign.
/// `error` is exact minus rounded; a NaN counts as unknown.
#[inline]
fn corrected(result: f64, error: f64, toward: Toward) -> f64 {
    match toward {
        Toward::Down if error >= 0.0 => result,
        Toward::Up if error <= 0.0 => result,
        _ => outward(result, toward),
    }
}

/// How many of the low bits of the 53 bits of the significand are zero.
#[inline]
fn trailing_zeros(x: f64) -> u32 {
    (x.to_bits() | 1 << 52).trailing_zeros()
}

/// Whether the rounded product of two finite non-zero numbers is surely exact:
/// the significant bits of the factors fit together into 53, or a factor is a
/// power of two, and none was lost below the range.
#[inline]
fn product_is_exact(a: f64, b: f64, product: f64) -> bool {
    let (ta, tb) = (trailing_zeros(a), trailing_zeros(b));
    lost_no_bits(product) && (ta + tb >= 53 || ta == 52 || tb == 52)
}

/// Whether a rounded result is surely one of a full significand. The least
/// normal number is left out: a result below it may have been rounded to it.
#[inline]
fn lost_no_bits(result: f64) -> bool {
    result.abs() > f64::MIN_POSITIVE && result.is_finite()
}

/// Moves a bound that was computed back to where the function's values are.
#[inline]
fn within(value: f64, least: f64, greatest: f64) -> f64 {
    value.max(least).min(greatest)
}

impl End for f64 {
    type Precision = ();

    #[inline]
    fn precision(&self) {}

    #[inline]
    fn small(value: f64, (): ()) -> f64 {
        value
    }

    #[inline]
    fn from_f64(value: f64, (): (), _: Toward) -> f64 {
        value
    }

    fn from_rational(value: &BigRational, (): (), toward: Toward) -> f64 {
        let small = |n: &BigInt| n.to_i64().filter(|m| m.unsigned_abs() <= 1 << 53);
        match (small(value.numer()), small(value.denom())) {
            (Some(n), Some(1)) => n as f64,
            (Some(n), Some(d)) => (n as f64).over(&(d as f64), toward),
            _ => super::mpfr::rational_to_f64(value, toward),
        }
    }

    #[inline]
    fn spacing((): ()) -> f64 {
        f64::EPSILON
    }

    #[inline]
    fn pi((): (), toward: Toward) -> f64 {
        // pi = 3.14159265358979323846... lies above the nearest f64, 3.141592653589793116...
        match toward {
            Toward::Down => std::f64::consts::PI,
            Toward::Up => std::f64::consts::PI.next_up(),
        }
    }

    #[inline]
    fn euler((): (), toward: Toward) -> f64 {
        // Euler's constant 0.577215664901532860606... lies below the nearest
        // f64, which is 0.577215664901532865549...
        const NEAREST: f64 = 0.577_215_664_901_532_9;
        match toward {
            Toward::Down => NEAREST.next_down(),
            Toward::Up => NEAREST,
        }
    }

    #[inline]
    fn order(&self, other: &f64) -> Ordering {
        // Ends are never NaN, so the order is total.
        self.partial_cmp(other).unwrap_or(Ordering::Equal)
    }

    #[inline]
    fn sign(&self) -> Ordering {
        self.order(&0.0)
    }

    #[inline]
    fn is_infinite(&self) -> bool {
        f64::is_infinite(*self)
    }

    #[inline]
    fn is_no_number(&self) -> bool {
        self.is_nan()
    }

    #[inline]
    fn negated(&self) -> f64 {
        -self
    }

    #[inline]
    fn plus(&self, other: &f64, toward: Toward) -> f64 {
        let (a, b) = (*self, *other);
        let sum = a + b;
        if f64::is_infinite(a) || f64::is_infinite(b) {
            return if sum.is_nan() { unknown(toward) } else { sum };
        }
        if sum.abs() > 1e300 || a.abs() > 1e300 {
            return outward(sum, toward);
        }
        // The error of a rounded sum is a floating-point number and these six
        // operations give it exactly (Knuth, The Art of Computer Programming,
        // vol. 2, section 4.2.2, theorem B).
        let second = sum - a;
        let error = (a - (sum - second)) + (b - second);
        corrected(sum, error, toward)
    }

    #[inline]
    fn minus(&self, other: &f64, toward: Toward) -> f64 {
        self.plus(&-other, toward)
    }

    #[inline]
    fn times(&self, other: &f64, toward: Toward) -> f64 {
        let (a, b) = (*self, *other);
        if a == 0.0 || b == 0.0 {
            return 0.0;
        }
        let product = a * b;
        if f64::is_infinite(a) || f64::is_infinite(b) || product_is_exact(a, b, product) {
            return product;
        }
        if product == 0.0 {
            // An underflow keeps its sign.
            return match ((a > 0.0) == (b > 0.0), toward) {
                (true, Toward::Down) | (false, Toward::Up) => 0.0,
                _ => outward(0.0, toward),
            };
        }
        outward(product, toward)
    }

    #[inline]
    fn over(&self, other: &f64, toward: Toward) -> f64 {
        let (a, b) = (*self, *other);
        if a == 0.0 || f64::is_infinite(b) {
            return 0.0;
        }
        let quotient = a / b;
        if f64::is_infinite(a) {
            return quotient;
        }
        if quotient.is_normal() {
            let back = quotient * b;
            if product_is_exact(quotient, b, back) && back == a {
                return quotient;
            }
        } else if quotient == 0.0 {
            return match ((a > 0.0) == (b > 0.0), toward) {
                (true, Toward::Down) | (false, Toward::Up) => 0.0,
                _ => outward(0.0, toward),
            };
        }
        outward(quotient, toward)
    }

    fn to_integer_power(&self, exponent: i64, toward: Toward) -> f64 {
        // Adding 0 makes a negative zero positive.
        let (x, odd) = (*self + 0.0, exponent % 2 != 0);
        if x < 0.0 {
            let toward_size = if odd { toward.reversed() } else { toward };
            let size = (-x).to_integer_power(exponent, toward_size);
            return if odd { -size } else { size };
        }
        match exponent {
            0 => 1.0,
            1 => x,
            2 => x.times(&x, toward),
            3 => x.times(&x, toward).times(&x, toward),
            4 => {
                let square = x.times(&x, toward);
                square.times(&square, toward)
            }
            _ => {
                let rounded = exponent as f64;
                if exponent.unsigned_abs() <= 1 << 53 {
                    return x.to_power(&rounded, toward);
                }
                // The exponent lies between two numbers, and the power is
                // monotone in it.
                let a = x.to_power(&rounded.next_down(), toward);
                let b = x.to_power(&rounded.next_up(), toward);
                match toward {
                    Toward::Down => a.min(b),
                    Toward::Up => a.max(b),
                }
            }
        }
    }

    fn to_power(&self, exponent: &f64, toward: Toward) -> f64 {
        let (x, y) = (*self + 0.0, *exponent);
        let power = core_math::pow(x, y);
        if power.is_nan() {
            return unknown(toward);
        }
        if x == 0.0 || f64::is_infinite(x) || f64::is_infinite(y) || y == 0.0 || x == 1.0 || y == 1.0 {
            return power;
        }
        // A small integer power with few significant bits is exact.
        let bits = f64::from(53 - trailing_zeros(x));
        if y.abs() <= 1100.0 && y == y.trunc() && lost_no_bits(power) {
            let is_power_of_two = x.is_normal() && trailing_zeros(x) == 52;
            if is_power_of_two || (y > 0.0 && bits * y <= 53.0) {
                return power;
            }
        }
        within(outward(power, toward), 0.0, f64::INFINITY)
    }

    #[inline]
    fn floor(&self) -> f64 {
        f64::floor(*self)
    }

    #[inline]
    fn ceil(&self) -> f64 {
        f64::ceil(*self)
    }

    fn as_integer(&self) -> Option<i64> {
        (f64::floor(*self) == *self && self.abs() < 9.0e18).then_some(*self as i64)
    }

    fn between(lo: &f64, hi: &f64) -> f64 {
        match (f64::is_infinite(*lo), f64::is_infinite(*hi)) {
            (false, false) => within(0.5 * lo + 0.5 * hi, *lo, *hi),
            (true, true) => 0.0,
            (false, true) if *lo < 0.0 => 0.0,
            (false, true) => (2.0 * lo + 1.0).min(f64::MAX),
            (true, false) if *hi > 0.0 => 0.0,
            (true, false) => (2.0 * hi - 1.0).max(f64::MIN),
        }
    }

    #[inline]
    fn at(&self, f: Function, toward: Toward) -> f64 {
        let x = *self;
        // Every function here is widened by one unit after its correctly
        // rounded value; what follows only keeps exact values exact and stays
        // inside the function's range.
        let near = |value: f64| {
            if value.is_nan() { unknown(toward) } else { outward(value, toward) }
        };
        let odd = |value: f64| if x == 0.0 { 0.0 } else { near(value) };
        match f {
            Function::Exp => match x {
                0.0 => 1.0,
                f64::NEG_INFINITY => 0.0,
                f64::INFINITY => x,
                _ => near(core_math::exp(x)).max(0.0),
            },
            Function::Log => match x {
                1.0 => 0.0,
                0.0 => f64::NEG_INFINITY,
                f64::INFINITY => x,
                _ => near(core_math::log(x)),
            },
            Function::Log2 => match x {
                0.0 => f64::NEG_INFINITY,
                f64::INFINITY => x,
                _ if x.is_normal() && trailing_zeros(x) == 52 => core_math::log2(x),
                _ => near(core_math::log2(x)),
            },
            Function::Sqrt => {
                if x == 0.0 || x == f64::INFINITY {
                    return x;
                }
                let root = x.sqrt();
                let square = root * root;
                if product_is_exact(root, root, square) && square == x { root } else { near(root) }
            }
            Function::Sin => within(odd(core_math::sin(x)), -1.0, 1.0),
            Function::Cos if x == 0.0 => 1.0,
            Function::Cos => within(near(core_math::cos(x)), -1.0, 1.0),
            Function::Tan => odd(core_math::tan(x)),
            Function::Asin => odd(core_math::asin(x)),
            Function::Acos if x == 1.0 => 0.0,
            Function::Acos => near(core_math::acos(x)).max(0.0),
            Function::Atan => odd(core_math::atan(x)),
            Function::Sinh if f64::is_infinite(x) => x,
            Function::Sinh => odd(core_math::sinh(x)),
            Function::Cosh if x == 0.0 => 1.0,
            Function::Cosh if f64::is_infinite(x) => f64::INFINITY,
            Function::Cosh => near(core_math::cosh(x)).max(1.0),
            Function::Tanh => within(odd(core_math::tanh(x)), -1.0, 1.0),
            Function::Asinh if f64::is_infinite(x) => x,
            Function::Asinh => odd(core_math::asinh(x)),
            Function::Acosh if x == 1.0 => 0.0,
            Function::Acosh if f64::is_infinite(x) => x,
            Function::Acosh => near(core_math::acosh(x)).max(0.0),
            Function::Atanh if x.abs() == 1.0 => f64::INFINITY.copysign(x),
            Function::Atanh => odd(core_math::atanh(x)),
            Function::Gamma if x == f64::INFINITY => x,
            // (n-1)! is a number with 53 bits up to 22!.
            Function::Gamma if (1.0..=23.0).contains(&x) && x == x.trunc() => core_math::tgamma(x),
            Function::Gamma => near(core_math::tgamma(x)),
            Function::Lgamma if x == 1.0 || x == 2.0 => 0.0,
            Function::Lgamma if x == f64::INFINITY => x,
            Function::Lgamma => near(core_math::lgamma(x)),
            Function::Digamma => super::elementary::digamma_by_series(x, toward),
            Function::Erf => within(odd(core_math::erf(x)), -1.0, 1.0),
            Function::Erfc if x == 0.0 => 1.0,
            Function::Erfc => within(near(core_math::erfc(x)), 0.0, 2.0),
            Function::Abs
            | Function::Min
            | Function::Max
            | Function::Floor
            | Function::Ceil
            | Function::Factorial
            | Function::Binomial
            | Function::Chebyshev
            | Function::Trigamma => unknown(toward),
        }
    }

    #[inline]
    fn angle_is_computable(&self) -> bool {
        self.is_finite()
    }

    #[inline]
    fn with_more_bits(&self, _: u32) -> f64 {
        *self
    }

    #[inline]
    fn rounded_to(&self, (): (), _: Toward) -> f64 {
        *self
    }

    fn binomial(n: i64, k: i64, (): (), toward: Toward) -> f64 {
        // The partial products are binomial coefficients, hence integers.
        let mut product = 1u128;
        for i in 1..=k.min(n - k) {
            match product.checked_mul((n - i + 1) as u128) {
                Some(next) => product = next / i as u128,
                None => return super::elementary::binomial_by_gamma(n, k, &0.0, toward),
            }
        }
        let rounded = product as f64;
        let error = if product <= 1 << 53 { 0.0 } else { f64::NAN };
        corrected(rounded, error, toward)
    }

    fn to_rational(&self) -> Option<BigRational> {
        if !self.is_finite() {
            return None;
        }
        let (mantissa, exponent, sign) = self.integer_decode();
        let mantissa = BigInt::from(mantissa) * i32::from(sign);
        let shift = usize::from(exponent.unsigned_abs());
        Some(if mantissa.is_zero() {
            BigRational::zero()
        } else if exponent >= 0 {
            BigRational::from_integer(mantissa << shift)
        } else {
            BigRational::new(mantissa, BigInt::from(1) << shift)
        })
    }

    fn order_rational(&self, value: &BigRational) -> Ordering {
        match self.to_rational() {
            Some(exact) => exact.cmp(value),
            None => self.sign(),
        }
    }
}

/// An enclosure with ends in `f64`.
pub type Interval = Enclosure<f64>;
