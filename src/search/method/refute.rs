//! The refuter: looks for a point where an obligation is false or a side
//! undefined, brings it to a simple exact form, and makes sure of it as the kernel
//! will. What it cannot make sure of it does not return.

use num_rational::BigRational;
use num_traits::{One, Signed};

use crate::enclosure::{BigFloat, Bits, Function};
use crate::expression::{Constant, Sort, Term};
use crate::statement::Sequent;

use super::super::engine::Search;
use super::super::exact::{enclose, is_inside, is_refuted};
use super::super::sample::{
    BIG_PRICE, BITS, Look, Margin, Probe, Seen, descend, points, price_of_points, quick, simplest, size_of,
    values,
};
use super::super::tight::tight;

/// Precision to which a witness is verified.
pub const WITNESS_BITS: u32 = 1024;

/// Ways of looking, from cheap to thorough.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Zeal {
    /// A few hundred points in `f64`.
    Quick,
    /// All points at high precision, then descent from the lowest.
    Thorough,
}

/// A point of the context where the goal is false, as simple as was found.
#[must_use]
pub fn refute(s: &Sequent, zeal: Zeal, hints: &[Vec<f64>], search: &mut Search) -> Option<Vec<Term>> {
    refute_by(s, zeal, hints, &|point| is_refuted(s, point, WITNESS_BITS), search)
}

/// The same with another test for what counts as refuted; the goal guides the search.
#[must_use]
pub fn refute_by(
    s: &Sequent,
    zeal: Zeal,
    hints: &[Vec<f64>],
    test: &dyn Fn(&[Term]) -> bool,
    search: &mut Search,
) -> Option<Vec<Term>> {
    for hint in hints {
        let exact: Option<Vec<Term>> =
            hint.iter().map(|x| BigRational::from_float(*x).map(Term::number)).collect();
        let Some(terms) = exact else { continue };
        if let Some(point) = std::iter::once(terms.clone()).chain(readings(s, &terms)).find(|p| test(p)) {
            return Some(simplified(s, &point, test));
        }
    }
    let parts = tight(s, if zeal == Zeal::Quick { 4 } else { 12 });
    let many = parts.len() as u64;
    parts.iter().zip(0..).find_map(|(part, done)| {
        let share = search.left() / (many - done);
        let test = |point: &[Term]| test(&part.restore(s, point));
        let point = search.within(share, |search| match zeal {
            Zeal::Quick => quick(&part.sequent, 400, search).filter(|p| test(p)),
            Zeal::Thorough => lowest(&part.sequent, search).into_iter().find(|p| test(p)),
        })?;
        Some(part.restore(s, &simplified(&part.sequent, &point, &test)))
    })
}

/// A point of the context, if one is found.
#[must_use]
pub fn inhabit(s: &Sequent, search: &mut Search) -> Option<Vec<Term>> {
    let test = |point: &[Term]| is_inside(s, point, WITNESS_BITS);
    let absurd = s.with_absurd();
    if let Some(point) = refute_by(&absurd, Zeal::Quick, &[], &test, search) {
        return Some(point);
    }
    // What f64 cannot tell, such as an end that is attained exactly.
    tight(&absurd, 4).iter().find_map(|part| {
        let points = points(&part.sequent, 200).into_iter().take(200);
        let mut whole = points.map(|p| part.restore(s, &p));
        whole.find(|p| search.spend(100).is_ok() && test(p))
    })
}

/// Candidates by thorough sampling, first in `f64`, then at high precision.
fn lowest(s: &Sequent, search: &mut Search) -> Vec<Vec<Term>> {
    let share = search.left() / 3;
    let fast = search.within(share, |search| {
        let probe = Probe::<f64>::new(s, ())?;
        Some(lowest_by(s, probe, (), 1, search))
    });
    let (seen, refuted) = fast.unwrap_or_default();
    if refuted {
        return seen;
    }
    let bits = Bits::new(BITS);
    let Some(mut probe) = Probe::<BigFloat>::new(s, bits) else { return Vec::new() };
    let share = search.left() / 4;
    if let Some(point) = search.within(share, |search| near(s, &mut probe, &seen, search)) {
        return vec![point];
    }
    let (mut found, refuted) = lowest_by(s, probe, bits, BIG_PRICE, search);
    if !refuted {
        found.extend(seen);
    }
    found
}

/// A false point close to one of these: where a statement touches, it may be
/// false only next to the point of contact.
fn near(
    s: &Sequent,
    probe: &mut Probe<BigFloat>,
    touching: &[Vec<Term>],
    search: &mut Search,
) -> Option<Vec<Term>> {
    let n = s.variables.len();
    let single = (0..n).flat_map(|i| {
        [1, -1].map(|sign| -> Vec<i64> { (0..n).map(|j| if i == j { sign } else { 0 }).collect() })
    });
    let joint = [1, -1].map(|sign| vec![sign; n]);
    let directions: Vec<Vec<i64>> = single.chain(joint.into_iter().filter(|_| n > 1)).collect();
    for point in touching.iter().take(12) {
        for direction in &directions {
            for k in (1..=16).map(|k| 4 * k) {
                let step = BigRational::new(1.into(), num_traits::pow(2.into(), k));
                let moved: Vec<Term> = (point.iter().zip(direction).zip(&s.variables))
                    .map(|((t, d), v)| {
                        if *d == 0 || v.domain.sort != Sort::Real {
                            return t.clone();
                        }
                        let moved = t.add(&Term::number(&step * BigRational::from_integer((*d).into())));
                        moved.rational_value().map_or(moved, Term::number)
                    })
                    .collect();
                if !probe.pay(BIG_PRICE, search) {
                    return None;
                }
                let Some(at) = values::<BigFloat>(&moved, Bits::new(BITS)) else { continue };
                if let Look::Margin(_, true) = probe.look(&at) {
                    return Some(moved);
                }
            }
        }
    }
    None
}

/// A point seen to be false (then also `true`), else local minima with the exact
/// numbers they may stand for.
fn lowest_by<E: Seen>(
    s: &Sequent,
    mut probe: Probe<E>,
    precision: E::Precision,
    price: u64,
    search: &mut Search,
) -> (Vec<Vec<Term>>, bool) {
    let mut looked: Vec<(Margin, Vec<Term>)> = Vec::new();
    // Half of the work is for the descents.
    let share = search.left() / 2;
    let refuted = search.within(share, |search| {
        search.spend(price_of_points(s, 1500)).ok()?;
        for point in points(s, 1500) {
            if !probe.pay(price, search) {
                break;
            }
            let Some(at) = values::<E>(&point, precision) else { continue };
            match probe.look(&at) {
                Look::Margin(_, true) => return Some(point),
                Look::Margin(m, false) if m.is_known() => looked.push((m, point)),
                _ => {}
            }
        }
        None
    });
    if let Some(point) = refuted {
        return (vec![point], true);
    }
    // Stable: among equals the earlier, simpler point.
    looked.sort_by(|a, b| a.0.compare(&b.0));
    let many = if s.variables.len() == 1 { 12 } else { 8 };
    // Exact zeros are minima already; others among the lowest may lead below.
    let (flat, others): (Vec<_>, Vec<_>) = looked.into_iter().partition(|(m, _)| m.relative == 0.0);
    let mut found: Vec<Vec<Term>> = flat.iter().take(20).map(|(_, p)| p.clone()).collect();
    for (_, start) in others.iter().take(many).chain(flat.iter().take(2)) {
        let (point, margin, refuted) = descend(s, &mut probe, start, (160, price), search);
        if refuted {
            return (vec![point], true);
        }
        if margin.relative.abs() < 1e-12 || margin.gap.abs() < 1e-12 {
            found.extend(readings(s, &point));
        }
    }
    (found, false)
}

/// Exact numbers that the coordinates of a point may stand for: simple fractions,
/// multiples of pi, square roots. One reading is used for all coordinates.
fn readings(s: &Sequent, point: &[Term]) -> Vec<Vec<Term>> {
    let numbers: Option<Vec<&BigRational>> = point.iter().map(Term::as_number).collect();
    let Some(numbers) = numbers else { return Vec::new() };
    let near = |q: &BigRational, digits: i32| {
        let room = num_traits::Pow::pow(BigRational::from_integer(10.into()), -digits);
        let room = if q.abs() > BigRational::one() { &room * q.abs() } else { room };
        simplest(&(q - &room), &(q + &room))
    };
    let real = |i: usize| s.variables[i].domain.sort == Sort::Real;
    let pi = enclose(&Term::constant(Constant::Pi), 128).and_then(|v| v.midpoint());
    let pi = pi.and_then(|m| BigRational::from_float(m.seen()));
    let mut all: Vec<Vec<Term>> = Vec::new();
    let mut add = |reading: &dyn Fn(&BigRational) -> Option<Term>| {
        let read: Option<Vec<Term>> = numbers
            .iter()
            .enumerate()
            .map(|(i, q)| if real(i) { reading(q) } else { Some(Term::number((*q).clone())) })
            .collect();
        if let Some(read) = read
            && !all.contains(&read)
        {
            all.push(read);
        }
    };
    for digits in [2, 3, 4, 5, 6, 8, 10] {
        add(&|q| Some(Term::number(near(q, digits))));
    }
    for digits in [6, 8, 10] {
        if let Some(pi) = &pi {
            add(&|q| Some(Term::constant(Constant::Pi).multiply(&Term::number(near(&(q / pi), digits)))));
        }
        add(&|q| {
            let root = Term::apply1(Function::Sqrt, &Term::number(near(&(q * q), digits)));
            Some(if q.is_negative() { root.negate() } else { root })
        });
    }
    all
}

/// The point with each coordinate made as simple as the test allows.
fn simplified(s: &Sequent, point: &[Term], test: &dyn Fn(&[Term]) -> bool) -> Vec<Term> {
    let mut best = point.to_vec();
    let two = BigRational::from_integer(2.into());
    for i in 0..best.len() {
        let Some(q) = best[i].as_number().cloned() else { continue };
        if s.variables[i].domain.sort != Sort::Real || q.numer().bits() + q.denom().bits() < 8 {
            continue;
        }
        let plain = [(0, 1), (1, 1), (-1, 1), (2, 1), (1, 2), (3, 1), (-2, 1), (1, 3), (10, 1)];
        let mut passes = |value: BigRational| {
            let former = std::mem::replace(&mut best[i], Term::number(value));
            let passed = test(&best);
            if !passed {
                best[i] = former;
            }
            passed
        };
        if plain.into_iter().any(|(n, d): (i64, i64)| passes(BigRational::new(n.into(), d.into()))) {
            continue;
        }
        let mut room = if q.abs() > BigRational::one() { q.abs() } else { BigRational::one() };
        // From coarse to fine: the first that passes is the simplest.
        for _ in 0..120 {
            let candidate = simplest(&(&q - &room), &(&q + &room));
            if candidate == q {
                break;
            }
            if passes(candidate) {
                break;
            }
            room /= &two;
            if size_of(&room) == 0.0 {
                break;
            }
        }
    }
    best
}
