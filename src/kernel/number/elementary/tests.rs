//! Published values, refusals, and arguments meant to do harm.

use super::super::dyadic::REACH;
use super::super::{Dyadic, Function, Interval, Refusal};
use super::constants::bernoulli;
use super::*;
use crate::kernel::read::term;
use num_rational::BigRational;

/// Reads `-12`, `3/4`, `0.25` or `1.5e-3`.
fn number(text: &str) -> BigRational {
    let (digits, exponent) = text.split_once('e').unwrap_or((text, "0"));
    let number = term(digits).expect("a term").as_number().expect("a number").clone();
    number * BigRational::from_integer(10.into()).pow(exponent.parse().expect("an exponent"))
}

fn near(text: &str, p: u32) -> Interval {
    Interval::from_rational(&number(text), p)
}

fn span(a: &str, b: &str) -> Interval {
    Interval::from_ends(Some(&number(a)), Some(&number(b)), 128).expect("ordered")
}

fn of(f: Function, x: &Interval, p: u32) -> Interval {
    apply(f, std::slice::from_ref(x), p).expect("inside the domain")
}

/// Digits cut off after the last one printed: the value is within one unit of it.
fn check_digits(what: &str, value: &Interval, digits: &str) {
    let printed = number(digits);
    let places = digits.split_once('.').map_or(0, |(_, fraction)| fraction.len());
    let unit = number(&format!("1e-{places}"));
    let around = Interval::from_ends(Some(&(&printed - &unit)), Some(&(&printed + &unit)), 400);
    assert!(around.expect("ordered").contains(value), "{what}: {value:?} is not {digits}");
}

#[test]
fn constants_to_published_digits() {
    // NIST DLMF 3.12.1, 4.2.11, 5.2.3; log 2 from OEIS A002162.
    for (c, digits) in [
        (Constant::Pi, "3.14159265358979323846264338327950288419716939937510"),
        (Constant::E, "2.718281828459045235360287471352662497757247094"),
        (Constant::Euler, "0.57721566490153286060651209008240243104215933593992"),
        (Constant::Log2, "0.69314718055994530941723212145817656807550013436025"),
    ] {
        for p in [200, 300, 1000, 170, 200] {
            check_digits("constant", &c.enclose(p), digits);
            assert!(c.enclose(p).is_tight(p - 3));
        }
        // What was asked for before does not show.
        let first = c.enclose(177);
        let _ = c.enclose(2000);
        assert_eq!(c.enclose(177), first);
    }
}

#[test]
fn bernoulli_numbers() {
    // NIST DLMF table 24.2.3.
    for (k, value) in [
        (1, "1/6"),
        (2, "-1/30"),
        (3, "1/42"),
        (4, "-1/30"),
        (5, "5/66"),
        (6, "-691/2730"),
        (10, "-174611/330"),
    ] {
        assert_eq!(bernoulli(k), number(value), "B_{}", 2 * k);
    }
}

#[test]
fn published_values() {
    let p = 128;
    for (f, x, digits) in [
        // Abramowitz and Stegun, tables 7.1 and 7.3 (erf), 6.1 (gamma), 6.1 (digamma).
        (Function::Erf, "0.5", "0.5204998778"),
        (Function::Erf, "1", "0.8427007929"),
        (Function::Erfc, "2", "0.004677734981"),
        (Function::Gamma, "1.5", "0.8862269254"),
        (Function::Digamma, "1.5", "0.0364899740"),
        // NIST DLMF 5.4.6 (square root of pi).
        (Function::Gamma, "0.5", "1.77245385090551602729"),
    ] {
        check_digits(f.name(), &of(f, &near(x, p), p), digits);
    }
    let pi = Constant::Pi.enclose(p);
    // NIST DLMF 5.4.13: psi(1/2) = -euler - 2 log 2; 5.15.1: psi'(1) = zeta(2) = pi^2/6, and
    // psi'(1/2) = 3 zeta(2) by the same series.
    let value = Constant::Euler.enclose(p).add(&Constant::Log2.enclose(p).scale(1), p).neg();
    assert!(of(Function::Digamma, &near("0.5", p), p).intersection(&value).is_some());
    let square = pi.mul(&pi, p);
    for (x, by) in [("1", 6), ("0.5", 2)] {
        let value = square.div(&Interval::from(by), p).expect("not zero");
        let enclosure = of(Function::Trigamma, &near(x, p), p);
        assert!(enclosure.intersection(&value).is_some() && enclosure.is_tight(p - 4), "at {x}");
    }
    // psi'(x) - psi'(x+1) = 1/x^2 (NIST DLMF 5.15.5), far from where the series starts.
    for x in ["0.001", "0.3", "2.75", "40", "1e30"] {
        let x = near(x, p).lower().cloned().map(Interval::point).expect("finite");
        let next = x.add(&Interval::from(1), 400);
        let step = of(Function::Trigamma, &x, p).sub(&of(Function::Trigamma, &next, p), p);
        let value = Interval::from(1).div(&x.mul(&x, 400), 400).expect("not zero");
        assert!(step.intersection(&value).is_some(), "{x:?}");
        assert!(of(Function::Trigamma, &x, p).is_tight(p - 4), "{x:?}");
    }
    // sin, cos and tan at parts of pi (NIST DLMF table 4.17.1).
    let part = |n: i64| pi.div(&Interval::from(n), p).expect("not zero");
    for (f, n, value) in [(Function::Sin, 6, "0.5"), (Function::Cos, 3, "0.5"), (Function::Tan, 4, "1")] {
        let enclosure = of(f, &part(n), p);
        assert!(enclosure.contains(&near(value, p)) && enclosure.is_tight(p - 8), "{}", f.name());
    }
    assert!(of(Function::Sin, &part(2), p).contains(&Interval::from(1)));
    assert!(of(Function::Cos, &pi, p).contains(&Interval::from(-1)));
}

#[test]
fn the_minimum_of_gamma_is_where_it_is_said_to_be() {
    // psi changes sign between the two ends, and gamma is above the stated value there; as
    // lgamma is convex, its minimum is not below the tangent at the first end.
    let (a, b) = (near("1.461632144968", 200), near("1.461632144969", 200));
    let inner = |end: Option<&Dyadic>| end.cloned().map(Interval::point).expect("finite");
    let (a, b) = (inner(a.upper()), inner(b.lower()));
    let (slope_a, slope_b) = (of(Function::Digamma, &a, 200), of(Function::Digamma, &b, 200));
    assert!(slope_a.is_certainly_negative() && slope_b.is_certainly_positive());
    let least = of(Function::Lgamma, &a, 200).add(&slope_a.mul(&b.sub(&a, 200), 200), 200);
    let stated = of(Function::Log, &near("0.885603194410888700", 200), 200);
    assert!(least.sub(&stated, 200).is_certainly_positive());
    assert!(least.sub(&stated, 200).sub(&near("1e-17", 200), 200).is_certainly_negative());
}

#[test]
fn exact_cases_are_exact() {
    for (f, x, value) in [
        (Function::Exp, "0", "0"),
        (Function::Log, "1", "0"),
        (Function::Log2, "8", "3"),
        (Function::Log2, "0.125", "-3"),
        (Function::Sqrt, "2.25", "1.5"),
        (Function::Sin, "0", "0"),
        (Function::Acos, "1", "0"),
        (Function::Acosh, "1", "0"),
        (Function::Lgamma, "2", "0"),
        (Function::Erf, "0", "0"),
        (Function::Erfc, "0", "1"),
        (Function::Floor, "-2.5", "-3"),
        (Function::Ceil, "-2.5", "-2"),
        (Function::Factorial, "0", "1"),
        (Function::Factorial, "20", "2432902008176640000"),
    ] {
        let value = if f == Function::Exp { "1" } else { value };
        assert_eq!(of(f, &near(x, 128), 128), near(value, 128), "{}({x})", f.name());
    }
    let two = |f, a: &str, b: &str| apply(f, &[near(a, 64), near(b, 64)], 64).expect("defined");
    assert_eq!(two(Function::Binomial, "5", "2"), near("10", 64));
    assert_eq!(two(Function::Binomial, "4", "5"), near("0", 64));
    assert_eq!(two(Function::Binomial, "0", "0"), near("1", 64));
    // T_5(x) = 16 x^5 - 20 x^3 + 5 x (NIST DLMF table 18.5.14), at 3/2.
    assert_eq!(two(Function::Chebyshev, "5", "1.5"), near("61.5", 64));
    assert_eq!(two(Function::Chebyshev, "3", "-0.5"), near("1", 64));
}

#[test]
fn integer_functions_on_boxes() {
    assert_eq!(factorial_over_integers(&span("2.5", "5.5"), 64), Ok(span("6", "120")));
    assert_eq!(factorial_over_integers(&span("0", "1"), 64), Ok(span("1", "1")));
    assert!(factorial_over_integers(&span("0.2", "0.8"), 64).is_err());
    let binomial = |n: &Interval, k: &Interval| binomial_over_integers(n, k, 64);
    assert_eq!(binomial(&span("4", "6"), &span("1", "5")), Ok(span("0", "20")));
    assert_eq!(binomial(&span("7", "9"), &span("2", "3")), Ok(span("21", "84")));
    assert_eq!(binomial(&span("9", "9"), &span("7", "8")), Ok(span("9", "36")));
    // Beyond the exact range: 2000! = gamma(2001), and binomial(10^6, 2000) by its ratio to
    // the next one, (10^6 - 2000)/2001.
    let (a, b) =
        (of(Function::Factorial, &near("2000", 64), 64), of(Function::Factorial, &near("2001", 64), 64));
    assert!(b.div(&a, 64).expect("positive").contains(&near("2001", 64)) && a.is_tight(60));
    let million = near("1000000", 64);
    let (a, b) = (binomial(&million, &near("2000", 64)), binomial(&million, &near("2001", 64)));
    let ratio = b.expect("defined").div(&a.expect("defined"), 64).expect("positive");
    assert!(ratio.contains(&near("998000/2001", 64)) && ratio.is_tight(56));
}

#[test]
fn boxes_that_leave_the_domain_are_refused() {
    for (f, a, b) in [
        (Function::Log, "0", "1"),
        (Function::Log, "-1", "1"),
        (Function::Log2, "0", "1"),
        (Function::Sqrt, "-1e-30", "4"),
        (Function::Asin, "0", "1.0000000000000000000001"),
        (Function::Acos, "-1.0000000000000000000001", "0"),
        (Function::Acosh, "0.9999999999999999999999", "2"),
        (Function::Atanh, "0", "1"),
        (Function::Atanh, "-1", "0"),
        (Function::Tan, "0", "2"),
        (Function::Tan, "-100", "100"),
        (Function::Gamma, "0", "1"),
        (Function::Gamma, "-0.5", "-0.25"),
        (Function::Lgamma, "0", "1"),
        (Function::Digamma, "0", "1"),
        (Function::Trigamma, "0", "1"),
        (Function::Factorial, "-1", "-1"),
        (Function::Factorial, "1/2", "1/2"),
        (Function::Factorial, "2", "3"),
    ] {
        let refusal = apply(f, &[span(a, b)], 64);
        assert!(matches!(refusal, Err(Refusal::OutsideDomain(_))), "{} on [{a}, {b}]: {refusal:?}", f.name());
    }
    for (f, a, b) in [
        (Function::Binomial, "-1", "2"),
        (Function::Binomial, "3", "-2"),
        (Function::Binomial, "3/2", "1"),
        (Function::Chebyshev, "-1", "0.5"),
        (Function::Chebyshev, "1/2", "0.5"),
    ] {
        let refusal = apply(f, &[span(a, a), span(b, b)], 64);
        assert!(matches!(refusal, Err(Refusal::OutsideDomain(_))), "{}({a}, {b})", f.name());
    }
    for f in [Function::Log, Function::Sqrt, Function::Acos, Function::Tan, Function::Gamma] {
        assert!(matches!(apply(f, &[Interval::whole()], 64), Err(Refusal::OutsideDomain(_))));
    }
    assert_eq!(apply(Function::Exp, &[], 64), Err(Refusal::WrongArity));
    assert_eq!(apply(Function::Min, &[Interval::zero()], 64), Err(Refusal::WrongArity));
    assert_eq!(apply(Function::Sin, &[Interval::zero(), Interval::zero()], 64), Err(Refusal::WrongArity));
}

#[test]
fn unbounded_boxes() {
    let ray = |a: &str| Interval::from_ends(Some(&number(a)), None, 64).expect("ordered");
    let zero_to = |b: &str| span("0", b);
    let whole = Interval::whole();
    assert_eq!(of(Function::Exp, &ray("0").neg(), 64), zero_to("1"));
    assert_eq!(of(Function::Exp, &whole, 64), ray("0"));
    assert_eq!(of(Function::Sin, &ray("0"), 64), span("-1", "1"));
    assert_eq!(of(Function::Erfc, &ray("0"), 64), zero_to("1"));
    assert_eq!(of(Function::Erf, &whole, 64), span("-1", "1"));
    assert_eq!(of(Function::Tanh, &ray("0"), 64), zero_to("1"));
    assert_eq!(of(Function::Cosh, &whole, 64), ray("1"));
    assert_eq!(of(Function::Log, &ray("1"), 64), ray("0"));
    assert_eq!(of(Function::Acosh, &ray("1"), 64), ray("0"));
    assert!(zero_to("1.6").contains(&of(Function::Atan, &ray("0"), 64)));
    assert!(of(Function::Gamma, &ray("1"), 64).lower().is_some_and(|x| x.signum() > 0));
    assert!(of(Function::Lgamma, &ray("3"), 64).is_certainly_positive());
    assert!(of(Function::Trigamma, &ray("1"), 64).is_certainly_nonnegative());
    let squares = apply(Function::Chebyshev, &[Interval::from(2), whole.clone()], 64);
    assert_eq!(squares, Ok(ray("-1")));
    assert_eq!(apply(Function::Chebyshev, &[Interval::from(3), whole.clone()], 64), Ok(whole));
}

#[test]
fn huge_and_tiny_arguments_cost_nothing() {
    let power = |k: i64| Interval::point(Dyadic::power_of_two(k));
    let near_one = power(0).add(&power(-4000), 5000);
    let mut count = 0;
    for x in [
        power(REACH - 1),
        power(REACH / 2),
        power(-REACH),
        power(-REACH / 2),
        power(41),
        power(40),
        power(8191),
        near_one,
    ] {
        for x in [x.clone(), x.neg(), x.hull(&Interval::from(1)), x.hull(&x.scale(1))] {
            for f in Function::all() {
                let value = match f.arity().accepts(1) {
                    true => apply(f, std::slice::from_ref(&x), 64),
                    false => apply(f, &[x.clone(), x.clone()], 64),
                };
                // Every answer is an interval or a named refusal, at once.
                count += usize::from(value.is_ok());
            }
            let _ = pow(&x, &x, 64);
            let _ = apply(Function::Chebyshev, &[Interval::from(1 << 32), x.clone()], 64);
        }
    }
    assert!(count > 400, "{count} answers");
    let full = span("-1", "1");
    assert_eq!(of(Function::Sin, &power(REACH - 1), 64), full);
    assert_eq!(apply(Function::Tan, &[power(REACH - 1)], 64), Err(Refusal::TooLarge("argument of tan")));
    let huge = of(Function::Exp, &power(41), 64);
    assert!(huge.upper().is_none() && huge.lower() == Some(&Dyadic::power_of_two(REACH - 1)));
    let tiny = of(Function::Exp, &power(41).neg(), 64);
    assert!(tiny.lower() == Some(&Dyadic::zero()) && tiny.upper() == Some(&Dyadic::power_of_two(-REACH)));
    assert!(of(Function::Exp, &Interval::from(1_000_000), 64).is_tight(60));
    let degree = Interval::from((1 << 32) + 1);
    assert!(matches!(apply(Function::Chebyshev, &[degree, Interval::zero()], 64), Err(Refusal::TooLarge(_))));
    // A precision outside the range is moved into it.
    assert!(of(Function::Exp, &Interval::from(1), 0).is_tight(28));
    assert!(of(Function::Exp, &Interval::from(1), u32::MAX).is_tight(4092));
}
