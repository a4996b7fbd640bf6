//! Ranges on boxes: no sampled value outside, and not wider than the sampled range.

use super::support::*;
use boundwright::kernel::number::Function::{self, *};
use boundwright::kernel::number::{Dyadic, Interval, Refusal, Toward, apply, pow};
use rug::Float;
use rug::ops::Pow;

fn hull(a: f64, b: f64) -> Interval {
    point(a).hull(&point(b))
}

/// Samples `f` on `[a, b]`: all values inside the enclosure, and the enclosure at most 3 %
/// and a rounding wider than the samples reach.
fn check_box(f: Function, a: f64, b: f64) {
    let what = format!("{} on [{a:?}, {b:?}]", f.name());
    let enclosure = apply(f, &[hull(a, b)], 64).unwrap_or_else(|refusal| panic!("{what}: {refusal}"));
    let mut range: Option<Interval> = None;
    for i in 0..=300 {
        let x = if i == 300 { b } else { a + (b - a) * (i as f64 / 300.0) };
        let x = Float::with_val(53, x.clamp(a, b));
        let value =
            reference(f, std::slice::from_ref(&x), 100).unwrap_or_else(|| panic!("{what}: no value at {x}"));
        let value = Interval::point(dyadic(&value));
        // The reference is rounded at 100 bits, the enclosure at 64; it may be exact.
        let slack = value.mul(&hull(1.0, 1.0 + f64::EPSILON.powi(5).max(1e-29)), 120);
        let inside = slack.intersection(&enclosure).is_some();
        assert!(inside, "{what}: value at {x} is outside {enclosure:?}");
        range = Some(range.map_or(value.clone(), |r| r.hull(&value)));
    }
    let range = range.expect("sampled");
    let width = |x: &Interval| {
        let (a, b) = (x.lower().expect("finite"), x.upper().expect("finite"));
        Interval::point(b.add(&a.neg(), 64, Toward::Up).expect("finite"))
    };
    let size = range.abs().mul(&point(1e-17), 64);
    let allowed = width(&range).mul(&point(1.03), 64).add(&size, 64).add(&point(1e-300), 64);
    let excess = width(&enclosure).sub(&allowed, 64);
    assert!(!excess.is_certainly_positive(), "{what}: {enclosure:?} against {range:?}");
}

fn boxes(f: Function, count: usize, a: f64, b: f64) {
    let mut stream = Stream(f as u64 + 77);
    for i in 0..count {
        let (x, y) = (stream.between(a, b), stream.between(a, b));
        let y = if i % 2 == 0 { y } else { (x + (y - x) / 1000.0).clamp(a, b) };
        check_box(f, x.min(y), x.max(y));
    }
    check_box(f, a, b);
}

#[test]
fn ranges() {
    for (f, a, b) in [
        (Exp, -3.0, 3.0),
        (Log, 0.1, 5.0),
        (Log2, 0.1, 5.0),
        (Sqrt, 0.0, 5.0),
        (Abs, -2.0, 3.0),
        (Floor, -2.5, 3.0),
        (Ceil, -2.5, 3.0),
        (Sin, -10.0, 10.0),
        (Sin, -1.0, 1.6),
        (Cos, -10.0, 10.0),
        (Cos, -0.5, 1.5),
        (Tan, -1.5, 1.5),
        (Tan, 1.6, 4.7),
        (Asin, -1.0, 1.0),
        (Acos, -1.0, 1.0),
        (Atan, -5.0, 5.0),
        (Sinh, -3.0, 3.0),
        (Cosh, -3.0, 3.0),
        (Tanh, -3.0, 3.0),
        (Asinh, -3.0, 3.0),
        (Acosh, 1.0, 3.0),
        (Atanh, -0.99, 0.99),
        (Gamma, 0.3, 4.0),
        (Lgamma, 0.3, 4.0),
        (Digamma, 0.3, 4.0),
        (Erf, -3.0, 3.0),
        (Erfc, -3.0, 9.0),
    ] {
        boxes(f, 40, a, b);
    }
    // Across the minimum of gamma, narrow and one-sided.
    for (a, b) in [(1.46, 1.47), (1.4616321449683622, 1.4616321449683624), (1.0, 2.0), (0.5, 1.4616321)] {
        check_box(Gamma, a, b);
        check_box(Lgamma, a, b);
    }
}

#[test]
fn powers() {
    let mut stream = Stream(9);
    let value = |b: f64, e: f64| Float::with_val(200, (&Float::with_val(53, b)).pow(&Float::with_val(53, e)));
    for i in 0..400 {
        let b = stream.magnitude(-200, 200);
        let e = stream.between(-9.0, 9.0) * if i % 3 == 0 { 100.0 } else { 1.0 };
        let p = [32, 64, 100][i % 3];
        let enclosure = pow(&point(b), &point(e), p).expect("positive base");
        check_value(&format!("{b:?}^{e:?} at {p}"), &enclosure, &value(b, e), p as i32 - 4);
    }
    for _ in 0..100 {
        let (b1, b2) = (stream.between(0.1, 3.0), stream.between(0.1, 3.0));
        let (e1, e2) = (stream.between(-3.0, 3.0), stream.between(-3.0, 3.0));
        let enclosure = pow(&hull(b1, b2), &hull(e1, e2), 64).expect("positive base");
        let mut corners: Option<Interval> = None;
        for b in [b1, b2] {
            for e in [e1, e2] {
                let corner = Interval::point(dyadic(&value(b, e)));
                corners = Some(corners.map_or(corner.clone(), |c| c.hull(&corner)));
            }
        }
        // The extreme values of b^e are at corners: contained there, and not by much more.
        let corners = corners.expect("four");
        assert!(enclosure.contains(&corners), "[{b1:?}, {b2:?}]^[{e1:?}, {e2:?}]");
        let grown = corners.mul(&hull(1.0 - 1e-15, 1.0 + 1e-15), 64);
        assert!(grown.contains(&enclosure), "[{b1:?}, {b2:?}]^[{e1:?}, {e2:?}]");
    }
    assert_eq!(pow(&hull(0.0, 4.0), &point(0.5), 64).map(|x| x.contains(&hull(0.0, 2.0))), Ok(true));
    assert_eq!(pow(&point(-2.0), &point(3.0), 64), Ok(point(-8.0)));
    assert_eq!(pow(&point(0.0), &point(2.5), 64), Ok(point(0.0)));
    for (base, exponent) in [
        (point(0.0), point(0.0)),
        (point(0.0), point(-1.0)),
        (hull(0.0, 1.0), hull(0.0, 1.0)),
        (hull(-1.0, 1.0), point(0.5)),
        (hull(-1.0, 1.0), hull(1.0, 2.0)),
        (point(-8.0), point(1.0 / 3.0)),
    ] {
        assert_eq!(pow(&base, &exponent, 64), Err(Refusal::OutsideDomain("power")), "{base:?}^{exponent:?}");
    }
}

/// `T_n` by its three-term recurrence at 400 bits (NIST DLMF table 18.9.1).
fn chebyshev(n: u32, x: f64) -> Float {
    let x = Float::with_val(400, x);
    let (mut a, mut b) = (Float::with_val(400, 1), x.clone());
    for _ in 0..n {
        let next = Float::with_val(400, &x * &b) * 2u32 - &a;
        (a, b) = (b, next);
    }
    a
}

#[test]
fn chebyshev_polynomials() {
    let mut stream = Stream(4);
    for n in [0u32, 1, 2, 3, 7, 20, 101] {
        let degree = point(n.into());
        for _ in 0..60 {
            let x = stream.between(-1.3, 1.3);
            let y = (x + stream.between(0.0, 0.3)).min(1.3);
            let enclosure = apply(Chebyshev, &[degree.clone(), point(x)], 64).expect("defined");
            check_value(&format!("T_{n}({x:?})"), &enclosure, &chebyshev(n, x), 60);
            let enclosure = apply(Chebyshev, &[degree.clone(), hull(x, y)], 64).expect("defined");
            let mut range: Option<Interval> = None;
            for i in 0..=2000 {
                let z = if i == 2000 { y } else { x + (y - x) * (f64::from(i) / 2000.0) };
                let value = Interval::point(dyadic(&chebyshev(n, z.clamp(x, y))));
                range = Some(range.map_or(value.clone(), |r| r.hull(&value)));
            }
            let range = range.expect("sampled");
            assert!(
                enclosure.contains(&range.round(63)) || enclosure.contains(&range),
                "T_{n} on [{x:?}, {y:?}]"
            );
            let margin = Interval::point(Dyadic::from(1))
                .mul(&hull(-3e-3, 3e-3), 64)
                .mul(&range.abs().hull(&point(1.0)), 64);
            assert!(
                range.add(&margin, 64).contains(&enclosure),
                "T_{n} on [{x:?}, {y:?}]: {enclosure:?} against {range:?}"
            );
        }
    }
}
