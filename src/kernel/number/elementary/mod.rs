//! Enclosures of the functions of the language at any precision from 32 to 4096 bits.
//!
//! Every function is cut into pieces on which it is monotone; on a piece only the ends are
//! evaluated. A value at a point comes from argument reduction and a power series whose
//! remainder is bounded in [`super::fixed::Fixed::series`], or from an enveloping
//! asymptotic series. Domains are those of the language; a box that is not certainly
//! inside is refused, never cut down:
//!
//! | function | domain |
//! | --- | --- |
//! | exp sin cos atan sinh cosh tanh asinh abs floor ceil min max erf erfc | all reals |
//! | log log2 gamma lgamma digamma trigamma | `x > 0` (for the last four a part of their domain) |
//! | sqrt, asin acos, acosh, atanh | `x >= 0`, `-1 <= x <= 1`, `x >= 1`, `-1 < x < 1` |
//! | tan | no odd multiple of pi/2 in the box |
//! | factorial, binomial | one integer each, `>= 0` |
//! | chebyshev(n, x) | one integer `n >= 0`, all `x` |

mod circular;
mod constants;
mod error;
mod exponential;
mod gamma;
mod integer;
mod logarithm;
#[cfg(test)]
mod tests;

pub use constants::Constant;
pub use integer::{binomial_over_integers, factorial_over_integers};
pub use logarithm::pow;

use super::function::Function;
use super::interval::Interval;
use super::{MAX_PRECISION, MIN_PRECISION, Refusal};

/// Encloses a function on a box; ends have at most `p` bits.
///
/// `p` outside 32..4096 is moved to the nearer of the two, which is as sound.
pub fn apply(function: Function, arguments: &[Interval], p: u32) -> Result<Interval, Refusal> {
    if !function.arity().accepts(arguments.len()) {
        return Err(Refusal::WrongArity);
    }
    let p = p.clamp(MIN_PRECISION, MAX_PRECISION);
    let x = &arguments[0];
    match function {
        Function::Exp => exponential::exp(x, p),
        Function::Log => logarithm::log(x, p),
        Function::Log2 => logarithm::log2(x, p),
        Function::Sqrt => x.sqrt(p),
        Function::Abs => Ok(x.abs()),
        Function::Min => Ok(arguments.iter().skip(1).fold(x.clone(), |m, y| m.min(y))),
        Function::Max => Ok(arguments.iter().skip(1).fold(x.clone(), |m, y| m.max(y))),
        Function::Floor => Ok(x.floor()),
        Function::Ceil => Ok(x.ceil()),
        Function::Sin => circular::sin(x, p),
        Function::Cos => circular::cos(x, p),
        Function::Tan => circular::tan(x, p),
        Function::Asin => circular::asin(x, p),
        Function::Acos => circular::acos(x, p),
        Function::Atan => circular::atan(x, p),
        Function::Sinh => exponential::sinh(x, p),
        Function::Cosh => exponential::cosh(x, p),
        Function::Tanh => exponential::tanh(x, p),
        Function::Asinh => logarithm::asinh(x, p),
        Function::Acosh => logarithm::acosh(x, p),
        Function::Atanh => logarithm::atanh(x, p),
        Function::Gamma => gamma::gamma(x, p),
        Function::Lgamma => gamma::lgamma(x, p),
        Function::Digamma => gamma::digamma(x, p),
        Function::Trigamma => gamma::trigamma(x, p),
        Function::Erf => error::erf(x, p),
        Function::Erfc => error::erfc(x, p),
        Function::Factorial => integer::factorial(x, p),
        Function::Binomial => integer::binomial(x, &arguments[1], p),
        Function::Chebyshev => integer::chebyshev(x, &arguments[1], p),
    }
}

/// Computes with some more bits than asked for.
fn guarded(p: u32, f: impl Fn(u32) -> Result<Interval, Refusal>) -> Result<Interval, Refusal> {
    Ok(f(p + 8)?.round(p))
}

/// As [`guarded`], for values that may lie near a zero of the function: more bits are
/// taken until the width is small against the value, or the limit is reached.
fn refined(p: u32, f: impl Fn(u32) -> Result<Interval, Refusal>) -> Result<Interval, Refusal> {
    let mut work = p + 16;
    loop {
        let value = f(work)?;
        if value.is_tight(p + 1) || work > 3 * p + 64 {
            return Ok(value.round(p));
        }
        work += p / 2;
    }
}

/// The range of an increasing function, from its values at the ends; `at_minus_infinity`
/// and `at_plus_infinity` are bounds that replace them at infinite ends.
fn increasing(
    x: &Interval,
    at_minus_infinity: Option<Interval>,
    at_plus_infinity: Option<Interval>,
    f: impl Fn(&Interval) -> Result<Interval, Refusal>,
) -> Result<Interval, Refusal> {
    if x.as_point().is_some() {
        return f(x);
    }
    let low = match x.lower() {
        Some(a) => Some(f(&Interval::point(a.clone()))?),
        None => at_minus_infinity,
    };
    let high = match x.upper() {
        Some(b) => Some(f(&Interval::point(b.clone()))?),
        None => at_plus_infinity,
    };
    let lower = low.as_ref().and_then(Interval::lower).cloned();
    let upper = high.as_ref().and_then(Interval::upper).cloned();
    Interval::new(lower, upper).ok_or(Refusal::TooLarge("precision"))
}

/// As [`increasing`], for a decreasing function.
fn decreasing(
    x: &Interval,
    at_minus_infinity: Option<Interval>,
    at_plus_infinity: Option<Interval>,
    f: impl Fn(&Interval) -> Result<Interval, Refusal>,
) -> Result<Interval, Refusal> {
    increasing(&x.neg(), at_plus_infinity, at_minus_infinity, |x| f(&x.neg()))
}
