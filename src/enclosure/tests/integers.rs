//! Factorials, binomial coefficients and Chebyshev polynomials against exact
//! integers and exact polynomials.

use super::{Random, bits, interval, pieces, widened};
use crate::enclosure::{BigFloat, BigInterval, Definedness, Enclosure, End, Function, Interval, Toward};
use num_bigint::BigInt;
use num_rational::BigRational;

fn rational(n: BigInt) -> BigRational {
    BigRational::from_integer(n)
}

/// Pascal's triangle up to a row.
fn triangle(rows: usize) -> Vec<Vec<BigInt>> {
    let mut triangle = vec![vec![BigInt::from(1)]];
    for n in 1..=rows {
        let above = &triangle[n - 1];
        let mut row = vec![BigInt::from(1)];
        row.extend(above.windows(2).map(|pair| &pair[0] + &pair[1]));
        row.push(BigInt::from(1));
        triangle.push(row);
    }
    triangle
}

#[test]
fn factorials() {
    let mut product = BigInt::from(1);
    for n in 0..200i64 {
        if n > 0 {
            product *= n;
        }
        let mut defined = Definedness::Continuous;
        let fast = Interval::apply(Function::Factorial, &[Interval::from_integer(n, ())], &mut defined);
        let precise =
            BigInterval::apply(Function::Factorial, &[BigInterval::from_integer(n, bits())], &mut defined);
        assert!(defined.is_continuous());
        assert!(fast.contains_rational(&rational(product.clone())), "{n}!");
        assert!(precise.contains_rational(&rational(product.clone())), "{n}!");
        assert!(precise.is_subset_of(&widened(&Enclosure::point(precise.lo().clone()), 2.0)));
    }
}

#[test]
fn binomials_on_boxes_of_integers() {
    let triangle = triangle(70);
    let value = |n: i64, k: i64| triangle[n as usize].get(k as usize).cloned().unwrap_or_default();
    let mut random = Random(11);
    for _ in 0..400 {
        let (a, b, c, d) = (
            random.below(70) as i64,
            random.below(3) as i64,
            random.below(75) as i64,
            random.below(4) as i64,
        );
        let (n, k) = (interval(a as f64, (a + b).min(70) as f64), interval(c as f64, (c + d) as f64));
        let mut defined = Definedness::Continuous;
        let fast = Interval::apply(Function::Binomial, &[n, k], &mut defined);
        let precise = BigInterval::apply(Function::Binomial, &[super::big(&n), super::big(&k)], &mut defined);
        assert!(defined.is_everywhere());
        let mut values: Vec<BigInt> = Vec::new();
        for n in a..=(a + b).min(70) {
            values.extend((c..=c + d).map(|k| value(n, k)));
        }
        for v in &values {
            assert!(fast.contains_rational(&rational(v.clone())), "{n:?} {k:?}");
            assert!(precise.contains_rational(&rational(v.clone())), "{n:?} {k:?}");
        }
        // 140 bits hold these numbers, so the ends are values.
        let (least, greatest) = (values.iter().min(), values.iter().max());
        assert_eq!(precise.lo().to_rational(), least.cloned().map(rational));
        assert_eq!(precise.hi().to_rational(), greatest.cloned().map(rational));
    }
}

#[test]
fn binomials_of_large_and_unbounded_arguments() {
    let apply = |n: &Interval, k: &Interval| {
        let mut defined = Definedness::Continuous;
        let value = Interval::apply(Function::Binomial, &[*n, *k], &mut defined);
        (value, defined)
    };
    let inf = f64::INFINITY;
    let from = interval(5.0, inf);
    assert_eq!(apply(&from, &Interval::point(2.0)).0, interval(10.0, inf));
    assert_eq!(apply(&from, &Interval::point(0.0)).0, interval(1.0, 1.0));
    assert_eq!(apply(&Interval::point(4.0), &interval(0.0, inf)).0, interval(0.0, 6.0));
    assert_eq!(apply(&from, &interval(-1.0, 0.0)).1, Definedness::Partly);
    // n(n-1)/2 at n = 2^40, exactly.
    let n = 1i64 << 40;
    let (value, _) = apply(&Interval::from_integer(n, ()), &Interval::point(2.0));
    let exact = BigInt::from(n) * BigInt::from(n - 1) / 2;
    assert!(value.contains_rational(&rational(exact)));
    // By logarithms: binomial(20000, 10000) against the exact number.
    let mut exact = BigInt::from(1);
    for i in 0..10000 {
        exact = exact * (20000 - i) / (i + 1);
    }
    let exact = rational(exact);
    let mut defined = Definedness::Continuous;
    let arguments = [BigInterval::from_integer(20000, bits()), BigInterval::from_integer(10000, bits())];
    let value = BigInterval::apply(Function::Binomial, &arguments, &mut defined);
    assert!(value.contains_rational(&exact));
    assert!(value.is_subset_of(&widened(&Enclosure::point(value.lo().clone()), 2.0)));
}

/// `T_n` of a rational number by its three-term recurrence
/// (NIST Digital Library of Mathematical Functions, 18.9.1).
fn chebyshev(n: u32, x: &BigRational) -> BigRational {
    let (mut before, mut value) = (rational(1.into()), rational(1.into()));
    for i in 0..n {
        let next = if i == 0 { x.clone() } else { x * &value * BigInt::from(2) - &before };
        (before, value) = (value, next);
    }
    value
}

#[test]
fn chebyshev_polynomials_at_points_and_on_boxes() {
    let mut random = Random(12);
    for _ in 0..300 {
        let n = random.below(20) as u32;
        let a = 3.0 * (random.unit() - 0.5);
        let width = random.choose(&[0.01, 0.3, 1.0, 2.5]);
        let x = interval(a, a + width * random.unit());
        let degree = Interval::from_integer(i64::from(n), ());
        let mut defined = Definedness::Continuous;
        let fast = Interval::apply(Function::Chebyshev, &[degree, x], &mut defined);
        let precise =
            BigInterval::apply(Function::Chebyshev, &[super::big(&degree), super::big(&x)], &mut defined);
        assert!(defined.is_continuous());
        assert!(precise.is_subset_of(&super::big(&fast)));
        for _ in 0..5 {
            let point = random.member(&x);
            let value = chebyshev(n, &point.to_rational().expect("finite"));
            assert!(precise.contains_rational(&value), "T_{n}({point}) is outside {precise:?}");
        }
        let hull = pieces(&x, 29)
            .iter()
            .map(|piece| {
                BigInterval::apply(
                    Function::Chebyshev,
                    &[super::big(&degree), super::big(piece)],
                    &mut defined,
                )
            })
            .fold(BigInterval::empty(bits()), |all, one| all.hull(&one));
        assert!(precise.is_subset_of(&widened(&hull, 4.0)), "T_{n} on {x:?}");
    }
}

#[test]
fn chebyshev_polynomials_of_several_degrees() {
    let apply = |n: Interval, x: Interval| {
        let mut defined = Definedness::Continuous;
        let value = Interval::apply(Function::Chebyshev, &[n, x], &mut defined);
        (value, defined)
    };
    let inf = f64::INFINITY;
    assert_eq!(
        apply(interval(0.0, inf), interval(-1.0, 1.0)),
        (interval(-1.0, 1.0), Definedness::Everywhere)
    );
    assert_eq!(apply(interval(1.0, 3.0), interval(2.0, 2.0)).0, interval(2.0, 26.0));
    assert_eq!(apply(interval(1.0, inf), interval(2.0, 3.0)).0, interval(2.0, inf));
    assert_eq!(apply(interval(0.0, inf), interval(1.0, 1.0)).0, interval(-1.0, 1.0));
    assert_eq!(apply(interval(-1.0, 2.0), interval(0.0, 0.5)).1, Definedness::Partly);
    let (many, _) = apply(interval(0.0, 40.0), interval(-1.25, 1.25));
    for n in 0..=40 {
        for x in [-1.25, -1.0, 0.3, 1.25f64] {
            let value = chebyshev(n, &x.to_rational().expect("finite"));
            assert!(many.contains_rational(&value), "T_{n}({x})");
        }
    }
}

#[test]
fn a_zero_of_a_chebyshev_polynomial_keeps_its_digits() {
    // The number next to cos(pi/2/101): the value is small and comes from cancellation.
    let x = BigFloat::from_decimal("0.99987904846", bits(), Toward::Down).expect("a decimal");
    let mut defined = Definedness::Continuous;
    let value = BigInterval::apply(
        Function::Chebyshev,
        &[BigInterval::from_integer(101, bits()), BigInterval::point(x)],
        &mut defined,
    );
    assert!(value.is_subset_of(&widened(&Enclosure::point(value.lo().clone()), 2.0)), "{value:?}");
}
