//! The general power in all its cases of signs.

use super::{Random, big, bits, interval, pieces, widened};
use crate::enclosure::Definedness::{Continuous, Everywhere, Nowhere, Partly};
use crate::enclosure::{BigFloat, BigInterval, Definedness, End, Interval, Toward};

fn power(b: &Interval, p: &Interval) -> (Interval, Definedness) {
    let mut defined = Continuous;
    (b.to_power(p, &mut defined), defined)
}

#[test]
fn where_powers_are_defined() {
    let at = |b: f64, p: f64| power(&Interval::point(b), &Interval::point(p));
    assert_eq!(at(0.0, 0.0).1, Nowhere);
    assert_eq!(at(0.0, -1.0).1, Nowhere);
    assert_eq!(at(0.0, -0.5).1, Nowhere);
    assert_eq!(at(0.0, 0.5), (Interval::point(0.0), Continuous));
    assert_eq!(at(0.0, 3.0), (Interval::point(0.0), Continuous));
    assert_eq!(at(-2.0, 3.0), (Interval::point(-8.0), Continuous));
    assert_eq!(at(-2.0, -2.0), (Interval::point(0.25), Continuous));
    assert_eq!(at(-2.0, 0.0), (Interval::point(1.0), Continuous));
    assert_eq!(at(-2.0, 0.5).1, Nowhere);
    let on = |b: (f64, f64), p: (f64, f64)| power(&interval(b.0, b.1), &interval(p.0, p.1)).1;
    assert_eq!(on((0.0, 1.0), (0.5, 2.0)), Continuous);
    assert_eq!(on((0.0, 1.0), (0.0, 2.0)), Partly);
    assert_eq!(on((0.0, 0.0), (0.0, 2.0)), Partly);
    assert_eq!(on((0.0, 0.0), (-2.0, 0.0)), Nowhere);
    assert_eq!(on((0.5, 1.0), (-2.0, 2.0)), Continuous);
    assert_eq!(on((-1.0, 1.0), (0.5, 2.0)), Partly);
    assert_eq!(on((-2.0, -1.0), (0.25, 0.75)), Nowhere);
    assert_eq!(on((-2.0, 1.0), (0.0, 0.0)), Partly);
    assert_eq!(on((-2.0, 1.0), (2.0, 2.0)), Continuous);
}

#[test]
fn powers_at_integers_admit_negative_bases() {
    let on = |b: (f64, f64), p: (f64, f64)| {
        let mut defined = Continuous;
        let value = interval(b.0, b.1).to_power_at_integers(&interval(p.0, p.1), &mut defined);
        (value, defined)
    };
    assert_eq!(on((-2.0, 1.0), (1.0, 3.0)), (interval(-8.0, 8.0), Everywhere));
    assert_eq!(on((-2.0, 1.0), (1.5, 2.5)), (interval(0.0, 4.0), Continuous));
    assert_eq!(on((-2.0, 1.0), (0.0, 3.0)).1, Partly);
    assert_eq!(on((0.0, 0.0), (-2.0, 0.0)).1, Nowhere);
    assert_eq!(on((0.0, 0.5), (1.0, f64::INFINITY)), (interval(0.0, 0.5), Continuous));
    assert_eq!(on((2.0, 3.0), (-1.0, 2.0)), (interval(0.5, 9.0), Continuous).with_lo_below(0.34));
}

/// For the expectation above: 3^-1 is not a number of the format.
trait WithLoBelow {
    fn with_lo_below(self, lo: f64) -> Self;
}

impl WithLoBelow for (Interval, Definedness) {
    fn with_lo_below(self, lo: f64) -> Self {
        let third = Interval::point(1.0).over(&Interval::point(3.0), &mut Continuous.clone());
        assert!(*third.hi() < lo);
        (interval(*third.lo(), *self.0.hi()), self.1)
    }
}

#[test]
fn values_at_points_lie_in_the_values_on_boxes() {
    let mut random = Random(21);
    for _ in 0..3000 {
        let (mut b, mut p) = (random.interval(), random.interval());
        if random.below(3) == 0 {
            b = random.ordinary_interval();
        }
        if random.below(3) == 0 {
            let n = random.below(9) as f64 - 4.0;
            p = interval(n, n + random.choose(&[0.0, 0.5, 1.0, 3.0]));
        }
        let (fast, defined) = power(&b, &p);
        let mut precise_defined = Continuous;
        let precise = big(&b).to_power(&big(&p), &mut precise_defined);
        assert_eq!(defined, precise_defined, "{b:?} ^ {p:?}");
        assert!(precise.is_subset_of(&big(&fast)), "{b:?} ^ {p:?}: {precise:?} {fast:?}");
        for _ in 0..4 {
            let x = random.member(&b);
            let mut y = random.member(&p);
            if random.below(2) == 0 && p.contains(&y.round()) {
                y = y.round();
            }
            let point = |v: f64| BigInterval::point(BigFloat::from_f64(v, bits(), Toward::Up));
            let mut at_point = Continuous;
            let value = point(x).to_power(&point(y), &mut at_point);
            assert!(value.is_subset_of(&precise), "{x:e} ^ {y:e} = {value:?} in {b:?} ^ {p:?} = {precise:?}");
            if at_point.is_nowhere() {
                assert!(!defined.is_everywhere(), "{x:e} ^ {y:e} in {b:?} ^ {p:?}");
            }
            if defined.is_nowhere() {
                assert!(at_point.is_nowhere(), "{x:e} ^ {y:e} in {b:?} ^ {p:?}");
            }
        }
    }
}

#[test]
fn positive_bases_are_as_tight_as_the_hull_of_pieces() {
    let mut random = Random(22);
    for _ in 0..200 {
        let a = 2.0 * random.unit();
        let b = interval(a, a + 2.0 * random.unit());
        let p = random.ordinary_interval();
        let (fast, _) = power(&b, &p);
        let mut hull = Interval::empty(());
        for base in pieces(&b, 7) {
            for exponent in pieces(&p, 7) {
                hull = hull.hull(&power(&base, &exponent).0);
            }
        }
        assert!(fast.is_subset_of(&widened(&hull, 4.0)), "{b:?} ^ {p:?}: {fast:?} {hull:?}");
    }
}

#[test]
fn integer_powers_against_products() {
    let mut random = Random(23);
    for _ in 0..2000 {
        let x = random.interval();
        let n = random.below(12) as i64 - 5;
        let mut defined = Continuous;
        let fast = x.to_integer_power(n, &mut defined);
        let precise = big(&x).to_integer_power(n, &mut defined.clone());
        assert!(precise.is_subset_of(&big(&fast)), "{x:?} ^ {n}: {precise:?} {fast:?}");
        let point = random.member(&x);
        if point == 0.0 && n <= 0 {
            assert!(!defined.is_everywhere());
            continue;
        }
        let exact = point.to_rational().expect("finite").pow(n as i32);
        assert!(fast.contains_rational(&exact), "{point:e} ^ {n} in {x:?}: {fast:?}");
        assert!(precise.contains_rational(&exact), "{point:e} ^ {n} in {x:?}");
    }
    for n in [i64::MAX, i64::MIN, (1 << 53) + 1] {
        let mut defined = Continuous;
        let x = interval(1.0 - 1e-15, 1.0 + 1e-15);
        let fast = x.to_integer_power(n, &mut defined);
        let precise = big(&x).to_integer_power(n, &mut defined);
        assert!(precise.is_subset_of(&big(&fast)), "{n}: {fast:?} {precise:?}");
    }
}
