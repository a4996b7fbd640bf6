//! Sums, products, quotients and powers against exact rational arithmetic.

use super::{Random, big, bits, interval};
use crate::enclosure::{BigFloat, BigInterval, Definedness, Enclosure, End, Interval, Toward};
use num_rational::BigRational;

const ROUNDS: usize = 4000;

fn exact(x: f64) -> BigRational {
    x.to_rational().expect("finite")
}

/// The enclosure contains the exact value and is at most two units wide.
fn check(what: &str, operands: (f64, f64), value: &Interval, expected: &BigRational) {
    assert!(value.contains_rational(expected), "{what} {operands:?}: {value:?} misses {expected}");
    let (lo, hi) = (*value.lo(), *value.hi());
    let next_but_one = lo.next_up().next_up();
    assert!(
        hi <= next_but_one || hi == f64::INFINITY || lo == f64::NEG_INFINITY,
        "{what} {operands:?}: {value:?} is too wide"
    );
}

#[test]
fn f64_arithmetic_contains_the_exact_results() {
    let mut random = Random(1);
    for _ in 0..ROUNDS {
        let (a, b) = (random.number(), random.number());
        let (x, y) = (Interval::point(a), Interval::point(b));
        let (p, q) = (exact(a), exact(b));
        check("+", (a, b), &x.plus(&y), &(&p + &q));
        check("-", (a, b), &x.minus(&y), &(&p - &q));
        check("*", (a, b), &x.times(&y), &(&p * &q));
        if b != 0.0 {
            let mut defined = Definedness::Continuous;
            check("/", (a, b), &x.over(&y, &mut defined), &(&p / &q));
            assert!(defined.is_continuous());
        }
        check("square", (a, a), &x.square(), &(&p * &p));
    }
}

#[test]
fn exact_results_stay_points() {
    let mut random = Random(2);
    for _ in 0..ROUNDS {
        let (a, b) = (random.below(1 << 20) as f64 - 5e5, random.below(1 << 20) as f64 + 1.0);
        let (x, y) = (Interval::point(a), Interval::point(b));
        let product = x.times(&y);
        assert!(product.is_point() && *product.lo() == a * b);
        assert!(x.plus(&y).is_point() && x.minus(&y).is_point());
        let back = product.over(&y, &mut Definedness::Continuous.clone());
        assert_eq!(back, x, "{a} * {b} / {b}");
        let root = Enclosure::apply(
            crate::enclosure::Function::Sqrt,
            &[y.square()],
            &mut Definedness::Continuous.clone(),
        );
        assert_eq!(root, y, "sqrt({b}^2)");
    }
}

#[test]
fn values_at_members_lie_in_the_values_on_boxes() {
    // The inclusion that IEEE 1788-2015 demands of every operation, clause 6.4.
    let mut random = Random(3);
    for _ in 0..ROUNDS {
        let (x, y) = (random.interval(), random.interval());
        let (a, b) = (random.member(&x), random.member(&y));
        let (p, q) = (exact(a), exact(b));
        let mut defined = Definedness::Continuous;
        let quotient = x.over(&y, &mut defined);
        let wide_quotient = big(&x).over(&big(&y), &mut defined.clone());
        let results = [
            (x.plus(&y), big(&x).plus(&big(&y)), Some(&p + &q)),
            (x.minus(&y), big(&x).minus(&big(&y)), Some(&p - &q)),
            (x.times(&y), big(&x).times(&big(&y)), Some(&p * &q)),
            (quotient, wide_quotient, (b != 0.0).then(|| &p / &q)),
        ];
        for (fast, precise, value) in results {
            if let Some(value) = value {
                assert!(fast.contains_rational(&value), "{a} {b}: {x:?} {y:?} {fast:?}");
                assert!(precise.contains_rational(&value), "{a} {b}: {x:?} {y:?}");
            }
            assert!(precise.rounded_to(bits()).is_subset_of(&big(&fast)), "{x:?} {y:?} {fast:?}");
        }
        assert_eq!(defined.is_everywhere(), !y.contains_zero());
    }
}

#[test]
fn products_and_quotients_with_zero_and_infinity() {
    // IEEE 1788-2015, clause 10.5.2 and table 9.1: the hull of the results at members.
    let inf = f64::INFINITY;
    let whole = Interval::whole(());
    let zero = Interval::point(0.0);
    assert_eq!(zero.times(&whole), zero);
    assert_eq!(interval(0.0, 1.0).times(&interval(1.0, inf)), interval(0.0, inf));
    assert_eq!(interval(-1.0, 1.0).times(&interval(1.0, inf)), whole);
    let over = |x: Interval, y: Interval| {
        let mut defined = Definedness::Continuous;
        (x.over(&y, &mut defined), defined)
    };
    let partly = Definedness::Partly;
    assert_eq!(over(interval(1.0, 2.0), interval(0.0, 1.0)), (interval(1.0, inf), partly));
    assert_eq!(over(interval(1.0, 2.0), interval(-1.0, 0.0)), (interval(-inf, -1.0), partly));
    assert_eq!(over(interval(-2.0, -1.0), interval(0.0, 1.0)), (interval(-inf, -1.0), partly));
    assert_eq!(over(interval(0.0, 1.0), interval(0.0, 1.0)), (interval(0.0, inf), partly));
    assert_eq!(over(interval(1.0, 2.0), interval(-1.0, 1.0)), (whole, partly));
    assert_eq!(over(zero, interval(-1.0, 1.0)), (zero, partly));
    assert_eq!(over(zero, zero), (Interval::empty(()), Definedness::Nowhere));
    assert_eq!(over(interval(1.0, 2.0), interval(1.0, inf)), (interval(0.0, 2.0), Definedness::Continuous));
    assert_eq!(
        over(interval(-inf, 2.0), interval(-4.0, -2.0)),
        (interval(-1.0, inf), Definedness::Continuous)
    );
}

#[test]
fn the_empty_set_stays_empty_and_satisfies_nothing() {
    let (empty, one) = (Interval::empty(()), Interval::point(1.0));
    for result in [
        empty.plus(&one),
        one.minus(&empty),
        empty.times(&one),
        empty.negated(),
        empty.square(),
        empty.abs(),
        one.intersection(&interval(2.0, 3.0)),
    ] {
        assert_eq!(result, empty);
    }
    let mut defined = Definedness::Continuous;
    assert!(one.over(&empty, &mut defined).is_empty());
    assert!(defined.is_nowhere());
    assert_eq!(empty.hull(&one), one);
    assert!(empty.midpoint().is_none());
    for holds in [
        empty.is_certainly_positive(),
        empty.is_certainly_negative(),
        empty.is_certainly_non_negative(),
        empty.is_certainly_non_positive(),
        empty.is_certainly_at_most(&one),
        one.is_certainly_less_than(&empty),
        empty.is_possibly_less_than(&one),
        one.is_possibly_at_most(&empty),
        empty.contains(&0.0),
        empty.contains_rational(&exact(0.0)),
    ] {
        assert!(!holds);
    }
}

#[test]
fn relations_say_their_quantifier() {
    let (x, y) = (interval(0.0, 2.0), interval(2.0, 3.0));
    assert!(x.is_certainly_at_most(&y) && !x.is_certainly_less_than(&y));
    assert!(x.is_possibly_less_than(&x) && !x.is_certainly_less_than(&x));
    assert!(!interval(3.0, 4.0).is_possibly_less_than(&interval(1.0, 3.0)));
    assert!(interval(3.0, 4.0).is_possibly_at_most(&interval(1.0, 3.0)));
    assert!(x.is_certainly_non_negative() && !x.is_certainly_positive());
}

#[test]
fn infinities_are_no_members() {
    let inf = f64::INFINITY;
    assert!(Interval::new(inf, inf).is_none() && Interval::new(-inf, -inf).is_none());
    assert!(Interval::new(1.0, 0.0).is_none());
    assert!(Interval::point(inf).is_empty());
    assert!(Interval::new(f64::NAN, 1.0).is_none() && Interval::new(1.0, f64::NAN).is_none());
    assert!(Interval::point(f64::NAN).is_empty());
    assert!(!Interval::whole(()).contains(&f64::NAN));
    assert!(!Interval::whole(()).contains(&inf));
    assert!(Interval::whole(()).midpoint() == Some(0.0));
    for x in [interval(-inf, -5.0), interval(-inf, 3.0), interval(-3.0, inf), interval(7.0, inf)] {
        let (left, right) = x.halves().expect("unbounded");
        assert_eq!(left.hull(&right), x);
        assert!(left.lo() < left.hi() && right.lo() < right.hi());
        let (left, right) = big(&x).halves().expect("unbounded");
        assert_eq!(left.hull(&right), big(&x));
    }
    assert!(interval(1.0, 1.0f64.next_up()).halves().is_none());
}

#[test]
fn rationals_of_any_size_become_tight_boxes() {
    let mut random = Random(4);
    for _ in 0..ROUNDS {
        let (a, b, c) = (random.number(), random.number(), random.number());
        let mut value = exact(a) * exact(c);
        if b != 0.0 {
            value /= exact(b);
        }
        let fast = Interval::from_rational(&value, ());
        let precise = BigInterval::from_rational(&value, bits());
        assert!(fast.contains_rational(&value) && precise.contains_rational(&value), "{value}");
        assert!(precise.is_subset_of(&big(&fast)));
        let (lo, hi) = (*fast.lo(), *fast.hi());
        assert!(hi <= lo.next_up().next_up() || hi == f64::INFINITY || lo == f64::NEG_INFINITY);
        // Every number is its own rational.
        assert_eq!(Interval::from_rational(&exact(a), ()), Interval::point(a));
        let back = BigFloat::from_f64(a, bits(), Toward::Up);
        assert_eq!(back.to_rational(), Some(exact(a)));
        assert!(back.order_rational(&exact(a)).is_eq());
        assert_eq!(back.order_rational(&exact(b)), a.order(&b));
    }
}

#[test]
fn constants() {
    // The digits are those of OEIS A000796, A001113 and A001620.
    let known = [
        (Interval::pi(()), BigInterval::pi(bits()), "3.1415926535897932384626433832795028"),
        (Interval::e(()), BigInterval::e(bits()), "2.7182818284590452353602874713526624"),
        (Interval::euler(()), BigInterval::euler(bits()), "0.5772156649015328606065120900824024"),
    ];
    for (fast, precise, digits) in known {
        let (lo, hi) = precise.to_decimals(39).expect("not empty");
        assert!(lo.starts_with(digits) && hi.starts_with(digits), "{lo} {hi}");
        assert!(precise.is_subset_of(&big(&fast)) && !fast.is_point());
        assert!(*fast.hi() <= fast.lo().next_up().next_up());
    }
}
