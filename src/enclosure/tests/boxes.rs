//! Functions of one argument on boxes: containment against MPFR values at
//! single points, tightness against the hull of the values on small pieces.

use super::{Random, big, bits, interval, pieces, unary, widened};
use crate::enclosure::{BigFloat, BigInterval, Definedness, End, Function, Interval, Toward};

const ROUNDS: usize = 500;

fn on_interval(f: Function, x: &Interval) -> (Interval, Definedness) {
    let mut defined = Definedness::Continuous;
    (Interval::apply(f, &[*x], &mut defined), defined)
}

fn on_big(f: Function, x: &BigInterval) -> (BigInterval, Definedness) {
    let mut defined = Definedness::Continuous;
    let value = BigInterval::apply(f, std::slice::from_ref(x), &mut defined);
    (value, defined)
}

#[test]
fn values_at_points_lie_in_the_values_on_boxes() {
    for f in unary() {
        let mut random = Random(f as u64);
        for _ in 0..ROUNDS {
            let x = random.interval();
            let (fast, fast_defined) = on_interval(f, &x);
            let (precise, defined) = on_big(f, &big(&x));
            assert_eq!(fast_defined, defined, "{f:?} on {x:?}");
            assert!(
                precise.is_subset_of(&big(&fast)),
                "{f:?} on {x:?}: {fast:?} does not contain {precise:?}"
            );
            for _ in 0..4 {
                let point = random.member(&x);
                let (value, at_point) =
                    on_big(f, &BigInterval::point(BigFloat::from_f64(point, bits(), Toward::Up)));
                assert!(
                    value.is_subset_of(&precise),
                    "{f:?}({point:e}) = {value:?} is not in {precise:?}, the values on {x:?}"
                );
                if at_point.is_nowhere() {
                    assert!(!defined.is_everywhere(), "{f:?} on {x:?}, undefined at {point:e}");
                }
                if defined.is_nowhere() {
                    assert!(at_point.is_nowhere(), "{f:?} on {x:?}, defined at {point:e}");
                }
            }
        }
    }
}

#[test]
fn boxes_are_as_tight_as_the_hull_of_their_pieces() {
    for f in unary() {
        let mut random = Random(100 + f as u64);
        for _ in 0..60 {
            let x = random.ordinary_interval();
            let (fast, defined) = on_interval(f, &x);
            // Next to a pole pieces say more than a box that contains it.
            if !defined.is_everywhere()
                && matches!(f, Function::Gamma | Function::Lgamma | Function::Digamma | Function::Tan)
            {
                continue;
            }
            let small = pieces(&x, 37);
            let hull = small
                .iter()
                .map(|piece| on_interval(f, piece).0)
                .fold(Interval::empty(()), |all, one| all.hull(&one));
            let slack = if f == Function::Digamma { 4000.0 } else { 4.0 };
            assert!(
                fast.is_subset_of(&widened(&hull, slack)),
                "{f:?} on {x:?}: {fast:?} is wider than {hull:?}"
            );
            let (precise, _) = on_big(f, &big(&x));
            let precise_hull = small
                .iter()
                .map(|piece| on_big(f, &big(piece)).0)
                .fold(BigInterval::empty(bits()), |all, one| all.hull(&one));
            assert!(
                precise.is_subset_of(&widened(&precise_hull, 2.0)),
                "{f:?} on {x:?}: {precise:?} is wider than {precise_hull:?}"
            );
        }
    }
}

#[test]
fn waves_on_boxes_around_every_length_of_a_turn() {
    for f in [Function::Sin, Function::Cos] {
        let mut random = Random(7);
        for _ in 0..300 {
            let a = 20.0 * (random.unit() - 0.5);
            let x = interval(a, a + 8.5 * random.unit());
            let (fast, _) = on_interval(f, &x);
            let hull = pieces(&x, 23)
                .iter()
                .map(|piece| on_interval(f, piece).0)
                .fold(Interval::empty(()), |all, one| all.hull(&one));
            assert!(fast.is_subset_of(&widened(&hull, 4.0)), "{f:?} on {x:?}: {fast:?}, {hull:?}");
        }
    }
    let (half, _) = on_interval(Function::Sin, &interval(0.0, 3.0));
    assert_eq!((*half.lo(), *half.hi()), (0.0, 1.0));
    let (all, _) = on_interval(Function::Cos, &interval(-1e300, 1e300));
    assert_eq!(all, interval(-1.0, 1.0));
}

#[test]
fn tangent_between_poles_and_across_them() {
    let (value, defined) = on_interval(Function::Tan, &interval(-1.5, 1.5));
    assert!(defined.is_continuous() && value.is_bounded());
    for x in [interval(1.5, 1.6), interval(0.0, 4.0), interval(-1e9, 1e9)] {
        let (value, defined) = on_interval(Function::Tan, &x);
        assert_eq!((value, defined), (Interval::whole(()), Definedness::Partly));
    }
    // The pole lies between these two neighbours, so on each side all is well.
    let below = std::f64::consts::FRAC_PI_2;
    assert!(on_interval(Function::Tan, &interval(1.0, below)).1.is_continuous());
    assert!(on_interval(Function::Tan, &interval(below.next_up(), 3.0)).1.is_continuous());
    assert!(!on_interval(Function::Tan, &interval(below, below.next_up())).1.is_everywhere());
}

#[test]
fn angles_of_absurd_size_are_answered_at_once() {
    let huge = BigInterval::from_decimal("1e300000000", bits()).expect("a decimal");
    let (value, defined) = on_big(Function::Sin, &huge);
    assert_eq!(
        value,
        BigInterval::new(BigFloat::small(-1.0, bits()), BigFloat::small(1.0, bits())).expect("in order")
    );
    assert!(defined.is_continuous());
    let (value, defined) = on_big(Function::Tan, &huge);
    assert_eq!((value, defined), (BigInterval::whole(bits()), Definedness::Partly));
    assert!(huge.hi().to_rational().is_none());
}

#[test]
fn gamma_across_its_minimum() {
    // NIST Digital Library of Mathematical Functions, 5.4(iii): the minimum is
    // 0.88560 31944 10888 70027 88159 00582 58873 32...
    let x = BigInterval::from_interval(&interval(0.5, 3.0), bits());
    let (value, defined) = on_big(Function::Gamma, &x);
    assert!(defined.is_continuous());
    let (lo, hi) = value.to_decimals(30).expect("not empty");
    assert_eq!(lo, "0.885603194410888700278815900582");
    assert_eq!(hi, "2");
    let (fast, _) = on_interval(Function::Gamma, &interval(0.5, 3.0));
    assert!(*fast.lo() > 0.885_603_194_410_888_3 && *fast.hi() <= 2.0f64.next_up());
}

#[test]
fn the_ends_of_domains_and_of_the_line() {
    let inf = f64::INFINITY;
    let cases = [
        (Function::Exp, interval(-inf, 0.0), interval(0.0, 1.0)),
        (Function::Log, interval(0.0, 1.0), interval(-inf, 0.0)),
        (Function::Sqrt, interval(-1.0, 4.0), interval(0.0, 2.0)),
        (Function::Log2, interval(0.25, 8.0), interval(-2.0, 3.0)),
        (Function::Tanh, interval(0.0, inf), interval(0.0, 1.0)),
        (Function::Cosh, interval(-inf, inf), interval(1.0, inf)),
        (Function::Acosh, interval(0.0, 1.0), interval(0.0, 0.0)),
        (Function::Atanh, interval(0.0, 2.0), interval(0.0, inf)),
        (Function::Erf, interval(-inf, 0.0), interval(-1.0, 0.0)),
        (Function::Gamma, interval(3.0, inf), interval(2.0, inf)),
        (Function::Lgamma, interval(2.0, inf), interval(0.0, inf)),
        (Function::Abs, interval(-3.0, 2.0), interval(0.0, 3.0)),
        (Function::Floor, interval(-0.5, 1.5), interval(-1.0, 1.0)),
        (Function::Ceil, interval(-inf, 1.5), interval(-inf, 2.0)),
        (Function::Asinh, interval(-inf, 0.0), interval(-inf, 0.0)),
        (Function::Sinh, interval(0.0, inf), interval(0.0, inf)),
        (Function::Cos, interval(0.0, 0.0), interval(1.0, 1.0)),
    ];
    for (f, x, expected) in cases {
        assert_eq!(on_interval(f, &x).0, expected, "{f:?} on {x:?}");
        assert_eq!(on_big(f, &big(&x)).0, big(&expected), "{f:?} on {x:?}");
    }
}

#[test]
fn minimum_and_maximum_of_several() {
    let boxes = [interval(0.0, 5.0), interval(-1.0, 7.0), interval(2.0, 3.0)];
    let mut defined = Definedness::Continuous;
    assert_eq!(Interval::apply(Function::Min, &boxes, &mut defined), interval(-1.0, 3.0));
    assert_eq!(Interval::apply(Function::Max, &boxes, &mut defined), interval(2.0, 7.0));
    assert!(defined.is_continuous());
    assert!(Interval::apply(Function::Max, &[boxes[0], Interval::empty(())], &mut defined).is_empty());
    assert!(defined.is_nowhere());
}

#[test]
fn a_wrong_number_of_arguments_gives_the_useless_answer() {
    for f in Function::ALL {
        let mut defined = Definedness::Continuous;
        assert_eq!(Interval::apply(f, &[], &mut defined), Interval::whole(()));
        assert_eq!(defined, Definedness::Partly);
    }
}
