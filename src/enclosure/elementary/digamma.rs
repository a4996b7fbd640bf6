//! The digamma function of an `f64`, for which no correctly rounded code exists.
//!
//! For `y >= 16` the expansion `log y - 1/(2y) - sum B_2k/(2k y^2k)` is cut
//! after `k = 6`; for `y > 0` the error has the sign and at most the size of
//! the first term left out (NIST Digital Library of Mathematical Functions,
//! 5.11.2 and 5.11(ii)). Smaller arguments are shifted up by the recurrence
//! 5.5.2, negative ones reflected by 5.5.4.

use crate::enclosure::domain::Definedness;
use crate::enclosure::float64::Interval;
use crate::enclosure::function::Function;
use crate::enclosure::rounding::Toward;

/// `B_2k/(2k)` for `k = 1, 2, ...` as fractions; the last is that of the term left out.
const COEFFICIENTS: [(f64, f64); 7] =
    [(1.0, 12.0), (-1.0, 120.0), (1.0, 252.0), (-1.0, 240.0), (1.0, 132.0), (-691.0, 32760.0), (1.0, 12.0)];

/// A bound of the digamma function at a number that is not a pole.
pub(in crate::enclosure) fn digamma_by_series(x: f64, toward: Toward) -> f64 {
    if x == f64::INFINITY {
        return x;
    }
    let argument = Interval::point(x);
    let value = if x > 0.0 {
        at_positive(argument)
    } else {
        at_positive(argument.alike(1.0).minus(&argument)).minus(&pi_over_tangent(x))
    };
    match toward {
        Toward::Down => *value.lo(),
        Toward::Up => *value.hi(),
    }
}

fn at_positive(x: Interval) -> Interval {
    let mut ignored = Definedness::Continuous;
    let one = x.alike(1.0);
    let (mut y, mut shift) = (x, x.alike(0.0));
    while *y.lo() < 16.0 {
        shift = shift.plus(&one.over(&y, &mut ignored));
        y = y.plus(&one);
    }
    let square = one.over(&y.square(), &mut ignored);
    let fraction = |(n, d): (f64, f64)| y.alike(n).over(&y.alike(d), &mut Definedness::Continuous.clone());
    // Between nothing and all of the term left out.
    let mut sum = fraction(COEFFICIENTS[6]).hull(&y.alike(0.0));
    for &coefficient in COEFFICIENTS[..6].iter().rev() {
        sum = fraction(coefficient).plus(&square.times(&sum));
    }
    y.increasing(Function::Log)
        .minus(&one.over(&y.plus(&y), &mut ignored))
        .minus(&square.times(&sum))
        .minus(&shift)
}

/// `pi / tan(pi x)` for a negative number that is not an integer.
fn pi_over_tangent(x: f64) -> Interval {
    let tangent = core_math::tanpi(x);
    if tangent.is_infinite() {
        return Interval::point(0.0);
    }
    // Correctly rounded, and one unit in hand.
    match Interval::new(tangent.next_down(), tangent.next_up()) {
        Some(tangent) => Interval::pi(()).over(&tangent, &mut Definedness::Continuous.clone()),
        None => Interval::whole(()),
    }
}
