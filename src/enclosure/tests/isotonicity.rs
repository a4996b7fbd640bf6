//! A smaller box has a smaller result: inclusion isotonicity (IEEE 1788-2015,
//! clause 6.4), up to rounding, and its record of definedness is no worse.

use super::{bits, interval, unary, widened};
use crate::enclosure::{BigInterval, Definedness, Enclosure, End, Function, Interval};
use proptest::prelude::*;

fn numbers() -> impl Strategy<Value = f64> {
    prop_oneof![
        -20.0..20.0f64,
        -1.0..1.0f64,
        proptest::num::f64::NORMAL,
        proptest::sample::select(vec![0.0, 1.0, -1.0, 2.0, 0.5, 1.5, -0.5]),
    ]
}

/// A box and a box inside it.
fn nested() -> impl Strategy<Value = (Interval, Interval)> {
    [numbers(), numbers(), numbers(), numbers()].prop_map(|mut ends| {
        ends.sort_by(f64::total_cmp);
        (interval(ends[1], ends[2]), interval(ends[0], ends[3]))
    })
}

fn check<E: End>(
    what: &str,
    inner: &(Enclosure<E>, Definedness),
    outer: &(Enclosure<E>, Definedness),
) -> Result<(), TestCaseError> {
    prop_assert!(
        inner.0.is_subset_of(&widened(&outer.0, 4000.0)),
        "{}: {:?} is not in {:?}",
        what,
        inner,
        outer
    );
    prop_assert!(!outer.1.is_everywhere() || inner.1.is_everywhere(), "{}", what);
    prop_assert!(!outer.1.is_continuous() || inner.1.is_continuous(), "{}", what);
    prop_assert!(!outer.1.is_nowhere() || inner.1.is_nowhere(), "{}", what);
    Ok(())
}

fn recorded<E: End>(run: impl Fn(&mut Definedness) -> Enclosure<E>) -> (Enclosure<E>, Definedness) {
    let mut defined = Definedness::Continuous;
    let value = run(&mut defined);
    (value, defined)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn functions((inner, outer) in nested()) {
        for f in unary() {
            let on = |x: &Interval| recorded(|d| Interval::apply(f, &[*x], d));
            check(f.name(), &on(&inner), &on(&outer))?;
            let on = |x: &Interval| {
                let x = BigInterval::from_interval(x, bits());
                recorded(|d| BigInterval::apply(f, std::slice::from_ref(&x), d))
            };
            check(f.name(), &on(&inner), &on(&outer))?;
        }
    }

    #[test]
    fn operations((a, b) in nested(), (c, d) in nested()) {
        let on = |run: &dyn Fn(&Interval, &Interval, &mut Definedness) -> Interval| {
            (recorded(|record| run(&a, &c, record)), recorded(|record| run(&b, &d, record)))
        };
        let (inner, outer) = on(&|x, y, _| x.plus(y));
        check("+", &inner, &outer)?;
        let (inner, outer) = on(&|x, y, _| x.minus(y));
        check("-", &inner, &outer)?;
        let (inner, outer) = on(&|x, y, _| x.times(y));
        check("*", &inner, &outer)?;
        let (inner, outer) = on(&|x, y, record| x.over(y, record));
        check("/", &inner, &outer)?;
        let (inner, outer) = on(&|x, y, record| x.to_power(y, record));
        check("^", &inner, &outer)?;
        let (inner, outer) = on(&|x, y, record| Interval::apply(Function::Max, &[*x, *y], record));
        check("max", &inner, &outer)?;
    }
}
