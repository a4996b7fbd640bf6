//! The domains of the functions, as mathematics has them, on boxes.

use super::interval;
use crate::enclosure::Definedness::{Continuous, Everywhere, Nowhere, Partly};
use crate::enclosure::{BigInterval, Bits, Definedness, Function, Interval};

/// Checks the record of a function on a box over both kinds of ends.
fn check(f: Function, x: (f64, f64), expected: Definedness) {
    let x = interval(x.0, x.1);
    let mut defined = Continuous;
    let value = Interval::apply(f, &[x], &mut defined);
    assert_eq!(defined, expected, "{f:?} on {x:?} is {value:?}");
    assert_eq!(value.is_empty(), expected == Nowhere, "{f:?} on {x:?}");
    let mut defined = Continuous;
    let value = BigInterval::apply(f, &[BigInterval::from_interval(&x, Bits::new(100))], &mut defined);
    assert_eq!(defined, expected, "{f:?} on {x:?}");
    assert_eq!(value.is_empty(), expected == Nowhere, "{f:?} on {x:?}");
}

#[test]
fn domains_of_functions() {
    let inf = f64::INFINITY;
    let least = 5e-324;
    for f in [Function::Log, Function::Log2] {
        check(f, (least, inf), Continuous);
        check(f, (0.0, 1.0), Partly);
        check(f, (0.0, 0.0), Nowhere);
        check(f, (-1.0, -0.0), Nowhere);
    }
    check(Function::Sqrt, (0.0, inf), Continuous);
    check(Function::Sqrt, (-least, 1.0), Partly);
    check(Function::Sqrt, (-1.0, 0.0), Partly);
    check(Function::Sqrt, (-1.0, -least), Nowhere);
    for f in [Function::Asin, Function::Acos] {
        check(f, (-1.0, 1.0), Continuous);
        check(f, (0.0, 1.0f64.next_up()), Partly);
        check(f, (1.0, 2.0), Partly);
        check(f, (1.0f64.next_up(), 2.0), Nowhere);
        check(f, (-inf, -2.0), Nowhere);
    }
    check(Function::Acosh, (1.0, inf), Continuous);
    check(Function::Acosh, (1.0f64.next_down(), 2.0), Partly);
    check(Function::Acosh, (-inf, 0.5), Nowhere);
    check(Function::Atanh, ((-1.0f64).next_up(), 1.0f64.next_down()), Continuous);
    check(Function::Atanh, (-1.0, 0.0), Partly);
    check(Function::Atanh, (1.0, 1.0), Nowhere);
    for f in [Function::Gamma, Function::Lgamma, Function::Digamma] {
        check(f, (least, inf), Continuous);
        check(f, (0.0, 1.0), Partly);
        check(f, (0.0, 0.0), Nowhere);
        check(f, (-3.0, -3.0), Nowhere);
        check(f, (-3.0, -2.5), Partly);
        check(f, (-2.9, -2.1), Continuous);
        check(f, (-2.5, -1.5), Partly);
        check(f, (-inf, -1.5), Partly);
    }
    for f in [
        Function::Exp,
        Function::Sin,
        Function::Cos,
        Function::Atan,
        Function::Sinh,
        Function::Cosh,
        Function::Tanh,
        Function::Asinh,
        Function::Erf,
        Function::Erfc,
        Function::Abs,
    ] {
        check(f, (-inf, inf), Continuous);
    }
}

#[test]
fn steps_are_defined_but_not_continuous() {
    for f in [Function::Floor, Function::Ceil] {
        check(f, (0.25, 0.75), Continuous);
        check(f, (1.0, 1.0), Continuous);
        check(f, (0.5, 1.5), Everywhere);
    }
    check(Function::Floor, (0.5, 1.0), Everywhere);
    check(Function::Floor, (1.0, 1.5), Continuous);
    check(Function::Ceil, (1.0, 1.5), Everywhere);
    check(Function::Ceil, (0.5, 1.0), Continuous);
}

#[test]
fn factorials_look_at_integers_only() {
    check(Function::Factorial, (0.0, 0.0), Continuous);
    check(Function::Factorial, (0.0, 5.0), Everywhere);
    check(Function::Factorial, (-0.5, 5.0), Everywhere);
    check(Function::Factorial, (-1.0, 5.0), Partly);
    check(Function::Factorial, (-3.0, -1.0), Nowhere);
    check(Function::Factorial, (0.25, 0.75), Nowhere);
}

#[test]
fn nothing_is_clipped_in_silence() {
    // sqrt(x - 10^-9) on [0, 1] is undefined near 0 although its enclosure,
    // over the points where it is defined, is non-negative.
    let mut defined = Continuous;
    let inner = interval(0.0, 1.0).minus(&Interval::point(1e-9));
    let value = Interval::apply(Function::Sqrt, &[inner], &mut defined);
    assert!(value.is_certainly_non_negative());
    assert_eq!(defined, Partly);
}
