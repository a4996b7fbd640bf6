//! The functions of the language on enclosures, one file for each family.
//!
//! Every function returns the hull of its values at the points of its
//! arguments where it is defined, and lowers the record of definedness if it
//! could not establish that it is defined at all of them. Bounds at single
//! points come from [`End::at`]; these files know where a function increases,
//! where it has extrema and poles, and where it is defined.

mod chebyshev;
mod digamma;
mod gamma;
mod integer;
mod monotone;
mod piecewise;
mod power;
mod trigamma;
mod trigonometric;

pub(super) use digamma::digamma_by_series;
pub(super) use integer::binomial_by_gamma;

use super::domain::Definedness;
use super::function::Function;
use super::interval::Enclosure;
use super::rounding::End;

impl<E: End> Enclosure<E> {
    /// The values of a function at the members of its arguments. A wrong
    /// number of arguments is answered by the useless enclosure, all reals
    /// and [`Definedness::Partly`].
    ///
    /// The integer arguments of `factorial`, `binomial` and `chebyshev` are
    /// taken to range over the integers of their enclosures: whether a term
    /// is an integer is seen from its form, not from its enclosure.
    #[inline]
    #[must_use]
    pub fn apply(function: Function, arguments: &[Self], defined: &mut Definedness) -> Self {
        if !function.arity().admits(arguments.len()) {
            defined.lower_to(Definedness::Partly);
            let precision = arguments.first().map(Self::precision);
            return Self::whole(precision.unwrap_or_default());
        }
        if arguments.iter().any(Self::is_empty) {
            defined.lower_to(Definedness::Nowhere);
            return Self::empty(arguments[0].precision());
        }
        let x = &arguments[0];
        match function {
            Function::Exp
            | Function::Log
            | Function::Log2
            | Function::Sqrt
            | Function::Asin
            | Function::Acos
            | Function::Atan
            | Function::Sinh
            | Function::Tanh
            | Function::Asinh
            | Function::Acosh
            | Function::Atanh
            | Function::Erf
            | Function::Erfc => x.monotone(function, defined),
            Function::Cosh => x.cosh(),
            Function::Abs => x.abs(),
            Function::Min => Self::least_of(arguments),
            Function::Max => Self::greatest_of(arguments),
            Function::Floor => x.floor(defined),
            Function::Ceil => x.ceil(defined),
            Function::Sin => x.sin(),
            Function::Cos => x.cos(),
            Function::Tan => x.tan(defined),
            Function::Gamma => x.gamma(defined),
            Function::Lgamma => x.lgamma(defined),
            Function::Digamma => x.digamma(defined),
            Function::Trigamma => x.trigamma(defined),
            Function::Factorial => x.factorial(defined),
            Function::Binomial => x.binomial(&arguments[1], defined),
            Function::Chebyshev => x.chebyshev(&arguments[1], defined),
        }
    }
}
